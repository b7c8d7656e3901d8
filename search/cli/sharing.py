"""`evenfield kept export`, `import` and `merge`: results given to others, and taken from them."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import IO, TYPE_CHECKING

import click

from search.cli.output import aside, emit, page
from search.cli.selecting import JSON, STORE, selecting
from search.foundation.errors import BadInput

if TYPE_CHECKING:
    from search.runs.gathering import Gathered
    from search.runs.selection import Selection

REFUSED = 2
TOLD = 20
"""At most so many refused results are spelled out for people; JSON has them all."""
MOST_BYTES = 64 << 20
"""No result takes a longer line."""


@click.command("export")
@click.argument("file", type=click.Path(path_type=Path))
@STORE
@selecting
@JSON
def export(file: Path, store: Path | None, where: Selection, as_json: bool) -> int:
    """Write the selected results to FILE: all of them as .jsonl, or a table to read as .csv.

    A .jsonl file has one result a line, with plan and certificate, and can be imported elsewhere.
    """
    from search.foundation.documents import canonical_json, write_whole
    from search.runs.exchange import document, table
    from search.runs.store import DEFAULT_PATH, Store

    if file.suffix not in (".jsonl", ".csv"):
        raise BadInput(f"{file} must end in .jsonl (to import elsewhere) or in .csv (to read)")
    with Store(store or DEFAULT_PATH, only_reading=True) as kept:
        as_table = file.suffix == ".csv"
        count = kept.count(where, with_plan=as_table)
        if as_table:
            lines = table(kept.list(max(count, 1), where))
        else:
            lines = (f"{canonical_json(document(one))}\n" for one in kept.all_shown(where))
        try:
            write_whole(file, lines, new=True)
        except FileExistsError:
            raise BadInput(f"{file} is there already and stays as it is; choose another name") from None
    if as_json:
        emit("kept", "exported", {"file": str(file), "results": count})
    else:
        page().print(f"{count} results written to {file}", soft_wrap=True)
    return 0


@click.command("import")
@click.argument("file", type=click.Path(path_type=Path))
@STORE
@JSON
def import_(file: Path, store: Path | None, as_json: bool) -> int:
    """Take the results of FILE (.jsonl, as export writes it), every one of them proved again first.

    The better of two is kept. A result with a claim that does not hold is refused; the others are taken.
    """
    from search.proof.results import proved
    from search.runs.gathering import import_lines
    from search.runs.store import DEFAULT_PATH, Store

    try:
        with file.open("rb") as stream, Store(store or DEFAULT_PATH) as kept:
            gathered = import_lines(kept, _lines(stream), proved)
    except OSError as error:
        raise BadInput(f"cannot read {file}: {(error.strerror or 'no access').lower()}") from error
    return _tell("imported", file, gathered, as_json)


def _lines(stream: IO[bytes]) -> Iterator[bytes]:
    while line := stream.readline(MOST_BYTES):
        yield line


@click.command("merge")
@click.argument("other", type=click.Path(path_type=Path))
@STORE
@JSON
def merge(other: Path, store: Path | None, as_json: bool) -> int:
    """Take from the store file OTHER what is better there, and its runs; OTHER stays as it is.

    What would replace something, or is new, is proved again first. An interrupted merge has done a part;
    the same command does the rest.
    """
    from search.proof.results import proved
    from search.runs.gathering import merge as gather
    from search.runs.store import DEFAULT_PATH, Store

    path = store or DEFAULT_PATH
    with Store(other, only_reading=True) as source:
        if path.exists() and path.samefile(other):
            raise BadInput(f"{other} is the store itself; name the other one")
        with Store(path) as kept:
            gathered = gather(kept, source, proved)
    return _tell("merged", other, gathered, as_json)


def _tell(done: str, source: Path, gathered: Gathered, as_json: bool) -> int:
    taken, refused = gathered.taken, gathered.refused
    status = REFUSED if refused else 0
    told = (
        f"{taken.results} results of {source} taken: "
        f"{taken.plans} new or better plans, {taken.bounds} new or tighter bounds, {taken.runs} new runs"
    )
    if as_json:
        counts = {"results": taken.results, "plans": taken.plans, "bounds": taken.bounds, "runs": taken.runs}
        content = {
            **counts,
            "refused": [{"where": one.where, "reason": one.reason} for one in refused],
            "message": f"{told}; {len(refused)} refused" if refused else "",
        }
        emit("kept", "partly refused" if refused else done, content, status)
        return status
    page().print(told, soft_wrap=True)
    if refused:
        console = aside()
        console.print(f"evenfield: {len(refused)} results refused", soft_wrap=True)
        for one in refused[:TOLD]:
            console.print(f"  {source}, {one.where}: {one.reason}", soft_wrap=True)
        if len(refused) > TOLD:
            console.print(f"  and {len(refused) - TOLD} more; --json tells all of them")
    return status
