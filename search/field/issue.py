"""Issuing a plan: once its packet is written, no later run overwrites it."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING

from search.field.packet import write_packet
from search.field.planfile import plan_document, read_plan, write
from search.field.planshape import Document
from search.field.randomise import fresh_seed, lay_out, site_seeds
from search.foundation.documents import write_whole
from search.trial.records import PacketSettings, Precision, Randomise, SearchSettings, Trial

if TYPE_CHECKING:
    from search.runs.plan import Plan

PLAN = "plan.json"


@dataclass(frozen=True, slots=True)
class Issued:
    """A plan on disk with its packet: one document for each site, the first in the folder itself."""

    folder: Path
    trial: Trial
    document: Document
    files: tuple[Path, ...]

    def is_of(self, trial: Trial) -> bool:
        """Whether the plan was issued for this trial, settings of search, layout and paper aside."""
        return _without_settings(self.trial) == _without_settings(trial)


def issued_in(folder: Path) -> Issued | None:
    """The plan that was issued in a folder, its packet drawn again where it is missing.

    Raises
    ------
    BadInput, FaultyTrial : the folder holds a plan file that cannot be trusted
    """
    path = folder / PLAN
    if not path.exists():
        return None
    trial, document = read_plan(path)
    files = [path, *write_packet(trial, document, folder, only_missing=True)]
    for number in range(2, trial.randomise.sites + 1):
        site = _site(folder, number)
        if (site / PLAN).exists():
            files += [site / PLAN, *write_packet(*read_plan(site / PLAN), site, only_missing=True)]
    return Issued(folder, trial, document, tuple(files))


def free_folder(folder: Path) -> Path:
    """The folder itself, or the first one beside it (`-2`, `-3`, …) that holds no plan."""
    return next(path for path in _beside(folder) if not _holds_a_plan(path))


def make_ready(folder: Path) -> None:
    """Find out before a long search whether its result can be written.

    Raises
    ------
    BadInput : the folder cannot be made or written to
    """
    probe = folder / ".part-probe"
    write_whole(probe, "")
    probe.unlink(missing_ok=True)


def issue(plan: Plan, folder: Path, layout_seed: int | None = None) -> Issued:
    """Draw the layouts of a plan and write plan files and packets.

    Parameters
    ----------
    plan : the plan
    folder : where site 1 goes, or beside it where a plan is there already; further sites go into folders
        of their own inside it
    layout_seed : seed of the layout; None draws a fresh one, recorded in the plan file

    Raises
    ------
    BadInput : something cannot be written
    """
    trial = plan.trial
    now = datetime.now(UTC)
    seed = fresh_seed() if layout_seed is None else layout_seed
    seeds = site_seeds(seed, trial.randomise.sites)
    documents = [plan_document(plan, lay_out(trial, plan.contents, site_seed), now) for site_seed in seeds]
    # The plan file goes first: from it the packet can always be drawn again.
    folder = _claimed(folder, documents[0])
    files: list[Path] = []
    for number, document in enumerate(documents, start=1):
        site = folder if number == 1 else _site(folder, number)
        if number > 1:
            write(document, site / PLAN)
        files += [site / PLAN, *write_packet(trial, document, site)]
    return Issued(folder, trial, documents[0], tuple(files))


def _claimed(folder: Path, document: Document) -> Path:
    """The first free folder, with the plan file in it; another run may have claimed one meanwhile."""
    while True:
        free = free_folder(folder)
        try:
            write(document, free / PLAN, new=True)
        except FileExistsError:
            continue
        return free


def _holds_a_plan(folder: Path) -> bool:
    return (folder / PLAN).exists() or any(folder.glob(f"site-*/{PLAN}"))


def _without_settings(trial: Trial) -> Trial:
    return replace(
        trial,
        about=(),
        search=SearchSettings(),
        randomise=Randomise(),
        precision=Precision(),
        packet=PacketSettings(),
    )


def _site(folder: Path, number: int) -> Path:
    return folder / f"site-{number}"


def _beside(folder: Path) -> Iterator[Path]:
    yield folder
    number = 2
    while True:
        yield folder.with_name(f"{folder.name}-{number}")
        number += 1
