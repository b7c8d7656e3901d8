"""Drawing the packet of a plan file again, on the same plots or on plots drawn anew."""

from __future__ import annotations

from datetime import UTC, datetime
from pathlib import Path

from search.field.issue import PLAN, Issued
from search.field.packet import write_packet
from search.field.planfile import laid_out_anew, read_plan, write
from search.field.planshape import Document
from search.field.randomise import lay_out
from search.foundation.errors import BadInput
from search.trial.records import Contents, Trial


def redraw(path: Path, folder: Path, layout_seed: int | None = None) -> Issued:
    """Write the packet of a plan file into a folder.

    Parameters
    ----------
    path : the plan file
    folder : where the packet goes
    layout_seed : draws a new layout, which is another plan with its own mark and plan file

    Raises
    ------
    BadInput : the plan file cannot be trusted, or the folder holds the packet of another plan
    """
    trial, document = read_plan(path)
    if layout_seed is not None:
        plot_map = lay_out(trial, _contents(trial, document), layout_seed)
        document = laid_out_anew(document, trial, plot_map, datetime.now(UTC))
    files = _write(trial, document, folder, with_plan=layout_seed is not None)
    return Issued(folder, trial, document, tuple(files))


def _contents(trial: Trial, document: Document) -> Contents:
    number = {treatment.name: i for i, treatment in enumerate(trial.treatments)}
    try:
        return tuple(
            tuple(sorted(number[name] for name in document["blocks"][block.name])) for block in trial.blocks
        )
    except KeyError as error:
        raise BadInput(f"the plan names {error}, which its trial does not have") from None


def _write(trial: Trial, document: Document, folder: Path, with_plan: bool) -> list[Path]:
    issued = folder / PLAN
    if issued.exists():
        _, there = read_plan(issued)
        if there["mark"] != document["mark"]:
            raise BadInput(
                f"{folder} holds the packet of plan {there['mark']}, which crews may carry already; "
                f"choose another folder for plan {document['mark']} with --out"
            )
    files, there_already = [], issued.exists()
    if with_plan:
        write(document, issued)
        files.append(issued)
    return files + write_packet(trial, document, folder, only_missing=there_already)
