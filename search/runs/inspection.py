"""What can be said of a trial before any search."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, replace

from search.designs.conditions import Balanced, conditions, nearby, smallest
from search.designs.existence import at_once
from search.designs.records import Existence
from search.foundation.errors import Clash, Impossible, Undecided
from search.runs.cautions import cautions, never_meeting
from search.runs.explaining import USUAL_SECONDS, explained
from search.runs.prospects import Prospects, prospects
from search.solvers.start import feasible_start
from search.trial.limits import Limits, limits
from search.trial.records import Trial
from search.trial.settled import settled
from search.trial.tables import tables


@dataclass(frozen=True, slots=True)
class Inspection:
    """The answer to `evenfield inspect`.

    Parameters
    ----------
    status : possible, impossible or undecided
    shown_by : how that was decided
    causes : why it is impossible or undecided
    clashes : lines of the file that cannot all hold, and what to relax
    implied : what the rules leave of the replication; None where counts clash
    balanced : what counting says of a balanced design, in a sentence
    design : its parameters where the counts allow one
    fewest : the smallest balanced sizes for the trial's treatments and usual block size
    near : other balanced sizes near to the trial's
    never_meeting : pairs that can never meet, though no rule says so by itself
    residual_df : expected for a connected plan
    prospects : what the trial can be expected to show; None where that is not known
    warnings : what a biometrician would want to know first
    """

    status: str
    shown_by: str
    causes: tuple[str, ...]
    clashes: tuple[Clash, ...]
    implied: Limits | None
    balanced: str
    design: Balanced | None
    fewest: Balanced | None
    near: tuple[Balanced, ...]
    never_meeting: tuple[tuple[int, int], ...]
    residual_df: int
    prospects: Prospects | None
    warnings: tuple[str, ...]


def inspect(trial: Trial, *, seconds: float, seed: int = 1) -> Inspection:
    """Whether the rules can be met, what they imply, and whether a balanced design fits.

    Parameters
    ----------
    trial : the trial
    seconds : wall time that the rule solver may take
    seed : of the greedy builder and the solver
    """
    implied, status, shown_by, causes = None, "possible", "", tuple[str, ...]()
    planned, plots = trial, trial.n
    clashes, expected = tuple[Clash, ...](), None
    try:
        implied = limits(trial)
        plots = implied.planted[1]
        planned, exactly = settled(trial, implied)
        rules = replace(tables(planned), least=exactly.least, most=exactly.most)
        first, shown_by = feasible_start(planned, rules, exactly, seed=seed, seconds=seconds)
        expected = prospects(trial, implied, first)
    except Impossible as error:
        status, shown_by, causes = "impossible", error.shown_by, error.causes
        clashes = explained(trial, error, seconds=min(seconds, USUAL_SECONDS), seed=seed).clashes
    except Undecided as error:
        status, causes = "undecided", (str(error),)
    sentence, design = balance(planned)
    sizes = Counter(block.plots for block in planned.blocks)
    usual = max(sizes, key=lambda k: (sizes[k], k))
    fewest = smallest(trial.t, usual) if 2 <= usual < trial.t else None
    return Inspection(
        status=status,
        shown_by=shown_by,
        causes=causes,
        clashes=clashes,
        implied=implied,
        balanced=sentence,
        design=design,
        fewest=fewest,
        near=tuple(x for x in nearby(trial.t, usual, plots) if x not in (fewest, design)),
        never_meeting=never_meeting(trial),
        residual_df=max(0, plots - trial.b - trial.t + 1),
        prospects=expected,
        warnings=cautions(trial, implied),
    )


def balance(trial: Trial) -> tuple[str, Balanced | None]:
    """Whether a balanced design fits the trial, and its parameters if one does or may."""
    if trial.may_be_emptier:
        return (
            "Some plots may stay filler: block sizes are not settled, and no balanced design is sought.",
            None,
        )
    sizes = {block.plots for block in trial.blocks}
    if sizes == {trial.t}:
        return "Every block holds every treatment: complete blocks, balanced as they stand.", None
    if len(sizes) > 1:
        listed = ", ".join(map(str, sorted(sizes)))
        return (
            f"No balanced incomplete block design fits: its blocks are of one size, these have {listed}.",
            None,
        )
    verdict = conditions(trial.t, trial.b, sizes.pop())
    if verdict.allowed is None:
        return f"No balanced incomplete block design fits: {verdict.reason}.", None
    design = verdict.allowed
    if reason := _barred_by_rules(trial, design):
        return f"The sizes would allow a balanced design, the rules do not: {reason}.", None
    known = at_once(design, resolvable=_in_replicates(trial))
    numbers = (
        f"each treatment on {design.r} plots, each pair in "
        f"{'one block' if design.meetings == 1 else f'{design.meetings} blocks'}, efficiency "
        f"{float(design.efficiency):.4f}"
    )
    match known.existence:
        case Existence.IMPOSSIBLE:
            return f"No balanced design exists for these numbers: {known.reason}.", None
        case Existence.EXISTS:
            return f"A balanced design fits: {numbers}. Construction: {known.reason}.", design
    return (
        f"The counts allow a balanced design ({numbers}); whether one exists is not known here: "
        f"{known.reason}.",
        design,
    )


def _in_replicates(trial: Trial) -> bool:
    inside = {j for replicate in trial.rules.replicates for j in replicate.blocks}
    return len(inside) == trial.b


def _barred_by_rules(trial: Trial, design: Balanced) -> str:
    rules = tables(trial)
    if rules.apart.any():
        return "in a balanced design every pair meets, and here some never may"
    if (rules.meet_most[~rules.apart] < design.meetings).any():
        return f"every pair would meet in {design.meetings} blocks, more than a rule allows"
    if (rules.meet_least > design.meetings).any():
        return f"every pair would meet in {design.meetings} blocks, fewer than a rule asks for"
    if (rules.least > design.r).any() or (rules.most < design.r).any():
        return f"every treatment would have {design.r} plots, which some may not"
    return ""
