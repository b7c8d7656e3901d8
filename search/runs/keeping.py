"""Between trials and the store: what is kept is brought into a trial's own numbers, and back."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from types import TracebackType

from search.efficiency.comparing import beats, gap_percent, merit
from search.efficiency.evaluator import score
from search.efficiency.records import Bound
from search.foundation.errors import BadInput
from search.foundation.stopping import Ended, Limits, Observer, Stop
from search.runs.conductor import find
from search.runs.kept import IssuedPlan, Kept, KeptBound, KeptPlan, Run, problem_of
from search.runs.plan import WRONG, Plan
from search.runs.shipped import shipped
from search.runs.store import DEFAULT_PATH, Store
from search.trial.canonical import Canonical, canonical
from search.trial.carrying import from_canonical, to_canonical
from search.trial.checker import broken_rules
from search.trial.records import Contents, Trial

FALSE_SCORE = 1e-6
"""A kept score this far from the true one is an error, not rounding."""


@dataclass(frozen=True, slots=True)
class Recalled:
    """What is kept for a trial, in its own numbers.

    Parameters
    ----------
    contents : the best plan
    plan : how it was found
    bound : the tightest bound, for showing: its certificate was not derived again
    shipped : a bound that came with the program, which may be claimed as it stands
    """

    contents: Contents | None = None
    plan: KeptPlan | None = None
    bound: Bound | None = None
    shipped: Bound | None = None


def recall(store: Store, trial: Trial, numbering: Canonical) -> Recalled:
    """The best plan and bound for a trial, of those in the store and those that came with the program.

    What proves to be false is dropped from the store.

    Parameters
    ----------
    store : where to look
    trial, numbering : the trial and its canonical numbering
    """
    aim = trial.aim.kind.value
    own, ready = store.best(numbering.digest, aim), shipped(numbering.digest, aim)
    found = Recalled() if own is None else _believed(store, trial, numbering, own)
    return found if ready is None else _with_shipped(found, trial, numbering, ready.kept)


def _believed(store: Store, trial: Trial, numbering: Canonical, kept: Kept) -> Recalled:
    aim = trial.aim.kind.value
    contents = plan = bound = None
    if kept.plan is not None:
        plan, contents = kept.plan, _carried(numbering, kept.plan.contents)
        if contents is None or not _is_true(trial, contents, plan):
            store.forget_plan(numbering.digest, aim)
            contents = plan = None
    if kept.bound is not None:
        bound = _bound(trial, numbering, kept.bound)
        if bound is None or (plan is not None and gap_percent(aim, plan.score, bound.value) < -100 * WRONG):
            store.forget_bound(numbering.digest, aim)
            bound = None
    return Recalled(contents, plan, bound)


def _with_shipped(found: Recalled, trial: Trial, numbering: Canonical, ready: Kept) -> Recalled:
    contents, plan, bound = found.contents, found.plan, found.bound
    if ready.plan is not None and ready.plan.beats(plan, trial.aim.kind):
        carried = _carried(numbering, ready.plan.contents)
        if carried is not None and _is_true(trial, carried, ready.plan):
            contents, plan = carried, ready.plan
    given = None if ready.bound is None else _bound(trial, numbering, ready.bound)
    if given is not None and given.beats(bound):
        bound = given
    return Recalled(contents, plan, bound, given)


def _carried(numbering: Canonical, contents: Contents) -> Contents | None:
    try:
        return from_canonical(numbering).contents(contents)
    except (IndexError, TypeError):
        return None


def _is_true(trial: Trial, contents: Contents, plan: KeptPlan) -> bool:
    if broken_rules(trial, contents):
        return False
    return abs(score(trial, contents).aim - plan.score) <= FALSE_SCORE


def _bound(trial: Trial, numbering: Canonical, kept: KeptBound) -> Bound | None:
    try:
        certificate = from_canonical(numbering).certificate(kept.certificate)
    except (IndexError, KeyError, TypeError):
        return None
    return Bound(trial.aim.kind, kept.exact, kept.argument, certificate)


def remember(store: Store, numbering: Canonical, plan: Plan, run: Run) -> None:
    """Write a finished run down, and its plan and bound where they are the best so far.

    Raises
    ------
    BadInput : the store cannot be written to
    """
    carrier = to_canonical(numbering)
    bound = None
    if plan.bound is not None:
        certificate = carrier.certificate(plan.bound.certificate)
        bound = KeptBound(plan.bound.exact, plan.bound.argument, certificate)
    variance = plan.score.aim_variance
    store.keep(
        problem_of(plan.trial, numbering),
        plan.trial.aim.kind.value,
        plan=KeptPlan(
            contents=carrier.contents(plan.contents),
            score=float(plan.score.aim),
            objective=None if variance is None else float(variance),
            seed=plan.seed,
            moves=plan.moves,
            seconds=float(plan.seconds),
            start=plan.start,
            balanced=plan.score.balanced,
        ),
        bound=bound,
        run=run,
    )


def run_of(plan: Plan, limits: Limits, workers: int) -> Run:
    """The run that made a plan, as the store writes it down."""
    return Run(
        seed=plan.seed,
        workers=workers,
        limit_seconds=None if limits.seconds is None else float(limits.seconds),
        limit_moves=limits.moves,
        moves=plan.moves,
        seconds=float(plan.seconds),
        ended_by=str(plan.ended_by),
        score=float(plan.score.aim),
        start=plan.start,
    )


def covers(run: Run, limits: Limits) -> bool:
    """Whether a run has searched at least as far as the limits allow a new one to."""
    if run.ended_by == Ended.INTERRUPTED or run.ended_by not in list(Ended):
        return False
    if run.ended_by == Ended.BOUND_MET:
        return True
    if run.ended_by == Ended.MOVES and run.limit_moves is None:
        return True  # no move was there to be made
    seconds = run.limit_seconds if run.ended_by == Ended.SECONDS else run.seconds
    moves = run.limit_moves if run.ended_by == Ended.MOVES else run.moves
    far = limits.seconds is not None and (seconds or 0.0) >= limits.seconds
    return far or (limits.moves is not None and (moves or 0) >= limits.moves)


class Keeping:
    """One trial and the store: plans start from what is kept, and are kept.

    Parameters
    ----------
    trial : the trial
    path : the store's file; the usual one where None

    Raises
    ------
    BadInput : the store cannot be opened
    """

    def __init__(self, trial: Trial, path: Path | None = None) -> None:
        self.trial = trial
        self.numbering = canonical(trial)
        self.store = Store(path or DEFAULT_PATH)
        self.failure: BadInput | None = None
        """Why the last plan could not be kept, where that went wrong."""

    def __enter__(self) -> Keeping:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.store.close()

    def plan(
        self,
        *,
        limits: Limits,
        seed: int,
        workers: int,
        observer: Observer | None = None,
        stop: Stop | None = None,
    ) -> Plan:
        """Search a plan from the best that is kept, and keep the result; see `conductor.find`."""
        kept = recall(self.store, self.trial, self.numbering)
        plan = find(
            self.trial,
            limits=limits,
            seed=seed,
            workers=workers,
            digest=self.numbering.digest,
            kept=kept.contents,
            known=kept.shipped,
            observer=observer,
            stop=stop,
        )
        try:
            remember(self.store, self.numbering, plan, run_of(plan, limits, workers))
        except BadInput as failure:
            self.failure = failure  # the plan itself must not be lost with it
        return plan

    def issued(self, plan: Plan, mark: str) -> None:
        """Note that a plan was issued under a mark; where that cannot be kept, `failure` tells."""
        if self.failure is not None:
            return
        contents = to_canonical(self.numbering).contents(plan.contents)
        one = IssuedPlan(mark, contents, float(plan.score.aim))
        try:
            self.store.issued(self.numbering.digest, self.trial.aim.kind.value, one)
        except BadInput as failure:
            self.failure = failure

    def better_than(self, score: float, average_variance: float | None) -> float | None:
        """The score of the kept plan where that is better than a plan by more than rounding.

        Parameters
        ----------
        score : of the plan, for the aim
        average_variance : its average pair variance, which ranks equally even plans
        """
        aim = self.trial.aim.kind
        kept = recall(self.store, self.trial, self.numbering).plan
        if kept is None or not beats(kept.merit(aim), merit(aim, score, average_variance)):
            return None
        return kept.score
