"""Why a trial is impossible: a smallest set of lines of its file that cannot all hold.

Divide and conquer over the lines (QuickXplain: Junker 2004), each question answered by counting or by a fresh
hard model: assumption literals were seen to leave plain clashes undecided, and their cores cannot be trusted.
A question that is not decided in its time counts as "possible": the set that is left still clashes, since it
was always shown to, but a smaller one may lie in it. Then it is not called smallest.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field, replace
from enum import Enum

from search.foundation.errors import Impossible, Undecided
from search.solvers.start import feasible_start
from search.trial.limits import limits
from search.trial.lines import demands, only
from search.trial.records import Said, Trial
from search.trial.tables import tables

MOST_CLASHES = 3
QUESTION_SECONDS = 3.0
"""Wall time that one question may take of the rule solver."""
TOGETHER = "each of them can be kept, and any of them can be left out, but together they leave no plan"


class Verdict(Enum):
    """Whether some lines can all hold."""

    POSSIBLE = "possible"
    IMPOSSIBLE = "impossible"
    UNKNOWN = "unknown"


@dataclass(frozen=True, slots=True)
class Clash:
    """Lines that cannot all hold.

    Parameters
    ----------
    lines : in the order of the file; empty where the blocks cannot hold the treatments at all
    is_smallest : every one of them is needed: without it a plan was found
    cause : why, in a sentence
    shown_by : how that was shown
    """

    lines: tuple[Said, ...]
    is_smallest: bool
    cause: str
    shown_by: str


@dataclass(slots=True)
class Questions:
    """Asks whether a trial can be met, remembers answers, and keeps to a time.

    Parameters
    ----------
    until : moment of `time.monotonic` after which nothing is asked any more
    seed : of the greedy builder and the solver
    """

    until: float
    seed: int = 1
    answers: dict[tuple[object, ...], Verdict] = field(default_factory=dict)

    @property
    def left(self) -> float:
        """Seconds that are left."""
        return self.until - time.monotonic()

    def ask(self, trial: Trial, *, by_counting: bool = False) -> Verdict:
        """Whether a plan obeys the trial; counting alone never says that one does."""
        key = (trial.rules, trial.treatments, trial.blocks, by_counting)
        if key not in self.answers:
            if self.left <= 0 and not by_counting:
                return Verdict.UNKNOWN
            self.answers[key] = self._decided(trial, by_counting)
        return self.answers[key]

    def _decided(self, trial: Trial, by_counting: bool) -> Verdict:
        try:
            implied = limits(trial)
            if by_counting:
                return Verdict.UNKNOWN
            rules = replace(tables(trial), least=implied.least, most=implied.most)
            seconds = min(QUESTION_SECONDS, max(0.1, self.left))
            feasible_start(trial, rules, implied, seed=self.seed, seconds=seconds, mending=False)
        except Impossible:
            return Verdict.IMPOSSIBLE
        except Undecided:
            return Verdict.UNKNOWN
        return Verdict.POSSIBLE


def find_clashes(trial: Trial, questions: Questions) -> tuple[Clash, ...]:
    """Clashes of a trial that is known to be impossible, no line in two of them.

    Parameters
    ----------
    trial : the trial
    questions : answers them and keeps the time
    """
    left = list(demands(trial))
    found: list[Clash] = []
    while len(found) < MOST_CLASHES:
        clash = _one_clash(trial, left, questions)
        found.append(clash)
        left = [said for said in left if said not in clash.lines]
        known = questions.ask(only(trial, left), by_counting=True)
        if not clash.lines or questions.left <= 0:
            break
        if known is not Verdict.IMPOSSIBLE and questions.ask(only(trial, left)) is not Verdict.IMPOSSIBLE:
            break
    return tuple(found)


def _one_clash(trial: Trial, lines: Sequence[Said], questions: Questions) -> Clash:
    def by_counting(kept: Sequence[Said]) -> bool:
        return questions.ask(only(trial, kept), by_counting=True) is Verdict.IMPOSSIBLE

    def in_full(kept: Sequence[Said]) -> bool:
        return questions.ask(only(trial, kept)) is Verdict.IMPOSSIBLE

    found = [] if by_counting([]) else list(lines)
    if by_counting(found):
        found = smallest_clash(found, by_counting)  # quick, and leaves few lines for the solver
    found = smallest_clash(found, in_full)
    order = {said: at for at, said in enumerate(lines)}
    found.sort(key=order.__getitem__)
    needed = all(_is_needed(trial, found, said, questions) for said in found)
    cause, shown_by = _cause(trial, found)
    return Clash(tuple(found), needed, cause, shown_by)


def smallest_clash(lines: Sequence[Said], impossible: Callable[[Sequence[Said]], bool]) -> list[Said]:
    """A set of lines that clashes, and of which none can be left out as far as the test can tell.

    Parameters
    ----------
    lines : they are known to clash
    impossible : whether some lines are known to clash; False where nobody knows

    Source: U. Junker, "QuickXplain: preferred explanations and relaxations for over-constrained problems",
    AAAI 2004. About 2c log₂(n/c) + 2c questions for c clashing lines of n.
    """

    def divide(background: list[Said], asked: bool, candidates: list[Said]) -> list[Said]:
        # The background and the candidates together clash: true at the start, kept by each step.
        if asked and impossible(background):
            return []
        if len(candidates) <= 1:
            return candidates
        half = len(candidates) // 2
        first, second = candidates[:half], candidates[half:]
        of_second = divide([*background, *first], True, second)
        of_first = divide([*background, *of_second], bool(of_second), first)
        return [*of_first, *of_second]

    return divide([], True, list(lines))


def _is_needed(trial: Trial, lines: Sequence[Said], said: Said, questions: Questions) -> bool:
    others = [other for other in lines if other != said]
    return questions.ask(only(trial, others)) is Verdict.POSSIBLE


def _cause(trial: Trial, lines: Sequence[Said]) -> tuple[str, str]:
    try:
        limits(only(trial, lines))
    except Impossible as error:
        return error.causes[0], error.shown_by
    return TOGETHER, "the rule solver, with two seeds"
