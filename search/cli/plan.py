"""`evenfield plan`: from a trial file to a kept plan and the crew's packet."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from search.cli.output import aside, emit, indented, page
from search.foundation.errors import BadInput, Impossible
from search.foundation.stopping import Ended, Limits, Stop

if TYPE_CHECKING:
    from search.field.issue import Issued
    from search.trial.records import SearchSettings, Trial

INTERRUPTED = 130
USUAL_SECONDS = 20.0


@click.command("plan")
@click.argument("trial", type=click.Path(path_type=Path))
@click.option("--seconds", type=click.FloatRange(0.01, 1e7), help="Search so long.  [default: 20]")
@click.option("--moves", type=click.IntRange(1, 10**15), help="Score so many moves: the same plan anywhere.")
@click.option("--seed", type=click.IntRange(0, 2**63 - 1), help="Seed of the search.")
@click.option("--workers", type=click.IntRange(1, 1024), help="Threads; the plan does not depend on them.")
@click.option("--layout-seed", type=click.IntRange(0, 2**63 - 1), help="Seed of the layout.")
@click.option("--out", type=click.Path(path_type=Path), help="Folder for the plan and its packet.")
@click.option("--store", type=click.Path(path_type=Path), help="File of kept results.")
@click.option("--anew", is_flag=True, help="Write a new plan beside one that is issued already.")
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def command(
    trial: Path,
    seconds: float | None,
    moves: int | None,
    seed: int | None,
    workers: int | None,
    layout_seed: int | None,
    out: Path | None,
    store: Path | None,
    anew: bool,
    as_json: bool,
) -> int:
    """Search a plan for TRIAL, keep it, and write plan.json and the crew's packet.

    A limit given here replaces those of the file. With --moves alone the result does not depend on the
    clock or on the number of workers.
    """
    from search.trial.reading import read_trial

    record = read_trial(trial)
    from search.field.beside import refuse_clash_in_soil

    refuse_clash_in_soil(record)
    if record.wanted is not None:
        record = _cut(record, quiet=as_json)
    folder = out or default_folder(record)
    limits = _limits(record.search, seconds, moves)

    from search.field.issue import free_folder, issue, issued_in, make_ready
    from search.runs.keeping import Keeping

    with Keeping(record, store) as keeping:
        found = issued_in(folder)
        if found is not None and not anew:
            if not found.is_of(record):
                raise BadInput(
                    f"{folder} holds plan {found.document['mark']}, issued for another trial; "
                    "choose another folder with --out, or ask for a new plan beside it with --anew"
                )
            issued_score = found.document["score"]
            better = keeping.better_than(issued_score["aim"], issued_score.get("average_pair_variance"))
            return _tell_issued(found, better, found.trial != record, layout_seed is not None, as_json)
        make_ready(free_folder(folder))

        from search.cli.watching import Watching, interruptible

        stop = Stop(limits)
        try:
            with interruptible(stop), Watching(aside(), quiet=as_json) as watching:
                watching.begin(record)
                plan = keeping.plan(
                    limits=limits,
                    seed=record.search.seed if seed is None else seed,
                    workers=workers or record.search.workers or _processors(),
                    observer=watching,
                    stop=stop,
                )
        except Impossible as error:
            from search.runs.explaining import explained

            raise explained(record, error) from None
        chosen = record.randomise.seed if layout_seed is None else layout_seed
        issued = issue(plan, folder, chosen)
        keeping.issued(plan, issued.document["mark"])
        if keeping.failure is not None:
            raise BadInput(
                f"plan {issued.document['mark']} is written to {issued.folder}, but {keeping.failure}"
            )
    status = INTERRUPTED if plan.ended_by is Ended.INTERRUPTED else 0
    if as_json:
        emit("plan", "planned", _document(issued), status)
    else:
        from search.cli.summary import show_plan

        show_plan(page(), issued)
    return status


def _cut(trial: Trial, quiet: bool) -> Trial:
    """The trial with its bays cut from the map in the best of the ways that were tried."""
    from search.field.bays import ways_to_cut

    ways = ways_to_cut(trial)
    if not quiet:
        console = aside()
        console.print("Ways to cut the map, the best first:")
        for number, way in enumerate(ways, start=1):
            indented(console, way.told, str(number))
    return ways[0].trial


def default_folder(trial: Trial) -> Path:
    """The folder for a trial's plans where --out does not name one."""
    from search.foundation.documents import safe_name

    return Path("results") / safe_name(trial.name)


def _limits(settings: SearchSettings, seconds: float | None, moves: int | None) -> Limits:
    if seconds is None and moves is None:
        seconds, moves = settings.seconds, settings.moves
    if seconds is None and moves is None:
        seconds = USUAL_SECONDS
    return Limits(seconds, moves)


def _processors() -> int:
    from joblib import cpu_count

    return int(cpu_count())


def _document(issued: Issued) -> dict[str, Any]:
    document = issued.document
    keys = ("mark", "score", "bound", "gap_percent", "standing", "ended_by")
    return {
        **{key: document[key] for key in keys},
        "files": [str(path) for path in issued.files],
        "plan": document,
    }


def _tell_issued(found: Issued, better: float | None, edited: bool, reseeded: bool, as_json: bool) -> int:
    if as_json:
        emit("plan", "issued already", {**_document(found), "better_kept": better})
        return 0
    from search.cli.summary import show_plan
    from search.efficiency.comparing import in_figures, measure

    console = page()
    console.print(f"Plan {found.document['mark']} is issued already and stays as it is.")
    if edited:
        console.print("Texts or settings of the file have changed since: that changes nothing in it.")
    if reseeded:
        console.print("For another layout of the same plan: evenfield packet with --layout-seed.")
    if better is None:
        console.print("The store holds no better one. To search for another: --anew")
    else:
        aim = found.trial.aim.kind
        told = f"{measure(aim)} {in_figures(aim, better)}"
        console.print(f"The store holds a better one, {told}. To issue it: --anew")
    show_plan(console, found)
    return 0
