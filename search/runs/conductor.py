"""One run from a trial to a plan: limits, a first plan, bounds, the search, the standing."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, field, replace

from search.designs.starts import Start, starts
from search.efficiency.bounds import all_bounds
from search.efficiency.bounds.problem import problem as bounded_problem
from search.efficiency.comparing import Merit, beats, gap_percent, merit
from search.efficiency.evaluator import meetings_and_ties, score
from search.efficiency.exhaustion.proving import LONG, case_of, exhausted, worth_of
from search.efficiency.records import Bound
from search.efficiency.reference import reference_product, reference_variance
from search.foundation.stopping import Ended, Limits, Observer, Stop
from search.runs.kernels import wait_for_kernels
from search.runs.plan import PROVEN_PERCENT, Plan
from search.solvers.filler import emptied, filled, spare_of, with_filler
from search.solvers.records import PROVER, Outcome, goal_of, problem_of
from search.solvers.start import feasible_start, further_starts
from search.trial.canonical import canonical
from search.trial.checker import broken_rules
from search.trial.limits import Limits as Replication
from search.trial.limits import limits as implied_limits
from search.trial.records import Aim, AimKind, Contents, Trial
from search.trial.settled import settled
from search.trial.tables import Tables, tables

DECIDE_SECONDS, DECIDE_EFFORT = 600.0, 6.0
"""Where only moves are limited: deterministic work in which the rule solver must find a first plan (about
20 s), and wall time that is never the limit that counts."""
MET = 1e-9
"""A plan whose efficiency is within this part of a bound needs no further one."""
LEAST_SECONDS = 2.0
"""Bounds may take so long even where the search may not."""
ROUNDS_FOR_TIES = 4
"""Where a plan is proved to be as even as can be, so many rounds still look for the best average among
equally even ones."""
STALLED = 2
"""Rounds before a proof by exhaustion is tried."""
STARTS_SHARE = 0.25
"""Part of a limit in seconds after which no further design is adapted as a start."""


def find(
    trial: Trial,
    *,
    limits: Limits,
    seed: int,
    workers: int,
    digest: str = "",
    kept: Contents | None = None,
    known: Bound | None = None,
    observer: Observer | None = None,
    stop: Stop | None = None,
) -> Plan:
    """Search a plan for a trial.

    Parameters
    ----------
    trial : the trial
    limits : how far to search; its clock starts when the kernels are ready
    seed : of the search; the same seed gives the same plan with any number of workers
    workers : threads
    digest : of the problem where it is known already, recorded in the plan
    kept : the best plan of earlier searches: the result is never worse
    known : a bound that was proved before, and may be claimed again
    observer : is told of the first plan, of bounds and of progress
    stop : ends the search from outside

    Raises
    ------
    Impossible : no plan obeys the rules
    Undecided : not known in the time
    """
    observer = observer or Observer()
    stop = stop or Stop(limits)
    planned, implied = settled(trial, implied_limits(trial))
    rules = replace(tables(planned), least=implied.least, most=implied.most)
    first, where_from = feasible_start(
        planned,
        rules,
        implied,
        seed=seed,
        seconds=limits.seconds or DECIDE_SECONDS,
        effort=None if limits.seconds else DECIDE_EFFORT,
        stop=stop,
    )
    observer.first_plan(score(trial, first).aim, where_from)
    bounds = _Bounds(planned, implied, observer, stop, known)
    if known is not None:
        observer.bound(known.value, known.argument)
    best: Start | None = None
    try:
        best = _best_known(planned, kept, observer, stop)
        wait_for_kernels(observer.note, [goal_of(trial.aim.kind)], lambda: stop.interrupted)
    except KeyboardInterrupt:
        # Before the search could begin: the plans that are there already count.
        start = best or Start(first, where_from)
        outcome = Outcome(start.contents, math.nan, 0, 0.0, Ended.INTERRUPTED, -1, start.where_from)
    else:
        outcome = _searched(planned, rules, implied, first, best, bounds, stop, seed, workers)
    bounds.finish(score(trial, outcome.contents).aim)
    better = bounds.proved(outcome.contents)
    if better is not None:
        outcome = replace(outcome, contents=better, run=-1, start=PROVER)
    broken = broken_rules(trial, outcome.contents)
    if broken:
        raise RuntimeError(f"the search broke a rule: {broken[0]}")
    return checked(
        Plan(
            trial=trial,
            contents=outcome.contents,
            score=score(trial, outcome.contents),
            bound=bounds.best,
            ended_by=outcome.ended,
            seed=seed,
            moves=outcome.moves,
            seconds=outcome.seconds,
            start=outcome.start,
            digest=digest or canonical(trial).digest,
        )
    )


def _searched(
    trial: Trial,
    rules: Tables,
    implied: Replication,
    first: Contents,
    best: Start | None,
    bounds: _Bounds,
    stop: Stop,
    seed: int,
    workers: int,
) -> Outcome:
    from search.solvers.rounds import none_better
    from search.solvers.sides import search_smaller_side

    stop.restart()
    known = None if best is None else best.contents
    spare = spare_of(rules, first)
    if known is not None and spare_of(rules, known) != spare:
        known = None  # it leaves other plots empty than the search can: the two are compared afterwards
    full = rules if rules.exact else with_filler(rules, spare)
    outcome = search_smaller_side(
        problem_of(trial, full, sum(spare)),
        filled(rules, first),
        kept=None if known is None else filled(rules, known),
        target=bounds.target,
        stop=stop,
        seed=seed,
        workers=workers,
        watch=lambda value, moves, seconds: bounds.observer.progress(
            bounds.efficiency(value), moves, seconds
        ),
        known="" if best is None else best.where_from,
        others=[filled(rules, other) for other in further_starts(trial, full, implied, seed=seed)],
        prover=bounds.prove if rules.exact else none_better,
    )
    outcome = replace(outcome, contents=emptied(outcome.contents, trial.t))
    if best is not None and beats(_merit(trial, best.contents), _merit(trial, outcome.contents)):
        return replace(outcome, contents=best.contents, objective=math.nan, run=-1, start=best.where_from)
    return outcome


def _best_known(trial: Trial, kept: Contents | None, observer: Observer, stop: Stop) -> Start | None:
    """The best of the kept plan and of designs that fit the trial or nearly do, before any search."""
    # With a limit in seconds the clock may cut in here too; with one in moves it has no say.
    stop.restart()
    share = None if stop.limits.seconds is None else max(1.0, STARTS_SHARE * stop.limits.seconds)
    candidates = []
    for start in starts(trial, stop=stop):
        candidates.append(start)
        if share is not None and stop.elapsed > share:
            break
    if kept is not None and not broken_rules(trial, kept):
        # Checked, for anybody may have written into the store.
        candidates.insert(0, Start(kept, "kept plan"))
    if not candidates:
        return None
    merits = [_merit(trial, start.contents) for start in candidates]
    best = max(range(len(candidates)), key=lambda i: (merits[i], -i))
    observer.first_plan(score(trial, candidates[best].contents).aim, candidates[best].where_from)
    return candidates[best]


def _merit(trial: Trial, contents: Contents) -> Merit:
    found = score(trial, contents)
    return merit(trial.aim.kind, found.aim, found.aim_variance)


def checked(plan: Plan) -> Plan:
    """The plan, unless it beats its own bound: then one of the two is wrong, and nothing is handed out.

    Raises
    ------
    RuntimeError : a bound below an achieved plan
    """
    if plan.bound is not None and plan.is_better_than(plan.bound):
        raise RuntimeError(
            f"bound {plan.bound.value!r} ({plan.bound.argument}) below an achieved plan {plan.score.aim!r}"
        )
    return plan


@dataclass(slots=True)
class _Bounds:
    """Bounds of one trial, found one by one between rounds of the search."""

    trial: Trial
    implied: Replication
    observer: Observer
    stop: Stop
    best: Bound | None = None
    exhausted: bool = False
    at: Contents | None = None
    waiting: Iterator[Bound] = field(init=False)
    reference: float = field(init=False)

    def __post_init__(self) -> None:
        self.waiting = iter(all_bounds(self.trial, self.implied, self._has_time))
        match self.aim:
            case AimKind.OVERALL:
                product = reference_product(self.trial)
                logarithm = math.log(product.numerator) - math.log(product.denominator)
                self.reference = -logarithm / (self.trial.t - 1)
            case AimKind.EVEN_MEETINGS:
                self.reference = self._least_average()
            case _:
                self.reference = float(reference_variance(self.trial))

    @property
    def aim(self) -> AimKind:
        """The aim of the trial."""
        return self.trial.aim.kind

    def target(self, round_: int) -> float:
        """One more bound, then the objective at which a plan meets the best of them."""
        self._step()
        if self.best is None:
            return -math.inf
        match self.aim:
            case AimKind.OVERALL:
                return self.reference - math.log(self.best.value)
            case AimKind.EVEN_MEETINGS:
                average = self.reference if round_ < ROUNDS_FOR_TIES else math.inf
                return meetings_and_ties(int(self.best.exact), average)
        return self.reference / self.best.value

    def efficiency(self, objective: float) -> float:
        """The score for the trial's aim of a plan with this objective: mostly an efficiency."""
        if self.aim.counts_meetings:
            return math.floor(objective) if math.isfinite(objective) else math.inf
        if not math.isfinite(objective):
            return 0.0
        if self.aim is AimKind.OVERALL:
            return math.exp(self.reference - objective)
        return self.reference / objective

    def finish(self, reached: float) -> None:
        """Find the bounds that are left, unless a plan with the score reached meets one."""
        while not self._is_met(reached) and self._step():
            pass

    def _is_met(self, reached: float) -> bool:
        return self.best is not None and gap_percent(self.aim, reached, self.best.value) <= 100 * MET

    def _least_average(self) -> float:
        """A number that quick arguments show the average pair variance of no plan to be below."""
        alike = replace(self.trial, aim=Aim())
        quick = all_bounds(alike, self.implied, lambda seconds: False)
        best = min((bound.exact for bound in quick), default=None)
        return 0.0 if best is None else float(reference_variance(alike) / best)

    def prove(self, round_: int, best: Contents) -> Contents | None:
        """Once no bound is left and a round has brought nothing: a proof by exhaustion, or a better plan."""
        before, self.at = self.at, best
        if round_ < STALLED or before != self.at or self._step():
            return None
        return self.proved(best)

    def proved(self, contents: Contents) -> Contents | None:
        """A better plan, where the proof by exhaustion of its kind comes upon one; its bound is kept.

        It is tried once, and only where the bounds leave a gap, the graphs are few and the time suffices.
        """
        reached = score(self.trial, contents)
        if not self.aim.depends_on_eigenvalues:
            return None
        met = self.best is not None and reached.aim >= self.best.value * (1 - PROVEN_PERCENT / 100)
        if self.exhausted or met or not reached.connected or self.stop.interrupted:
            return None
        given = bounded_problem(self.trial, self.implied)
        case = None if given is None else case_of(given)
        if given is None or case is None or not self._has_time(case.seconds):
            return None
        self.exhausted = True
        limit = self.stop.limits.seconds
        try:
            found = exhausted(
                given,
                case,
                worth_of(case, contents),
                otherwise=self.best,
                seconds=LONG if limit is None else max(1.0, limit - self.stop.elapsed),
                stop=self.stop,
                note=self.observer.note,
            )
        except KeyboardInterrupt:
            return None
        if found is None:
            return None
        if found.bound is not None and found.bound.beats(self.best):
            self.best = found.bound
            self.observer.bound(found.bound.value, found.bound.argument)
        if found.contents is not None:
            self.observer.first_plan(score(self.trial, found.contents).aim, PROVER)
        return found.contents

    def _has_time(self, seconds: float) -> bool:
        """Whether a bound that takes so long fits into the time of the search; without a limit it does."""
        given = self.stop.limits.seconds
        return given is None or self.stop.elapsed + seconds <= max(given, LEAST_SECONDS)

    def _step(self) -> bool:
        bound = next(self.waiting, None)
        if bound is None:
            return False
        if bound.beats(self.best):
            self.best = bound
            self.observer.bound(bound.value, bound.argument)
        return True
