"""What to relax in an impossible trial: changes to one line, each tried, the smallest first."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace
from enum import IntEnum
from functools import partial

from search.solvers.clash import Clash, Questions, Verdict
from search.trial.lines import demands, only, place, quoted
from search.trial.records import Meeting, Rules, Said, Trial

MOST_TRIED = 12
"""Members of one group, or blocks, that are tried one by one."""


class Size(IntEnum):
    """How much a change takes away from what was asked for, the least first."""

    ONE_NUMBER = 1
    ONE_ENTRY = 2
    MANY_NUMBERS = 3
    WHOLE_LINE = 4


@dataclass(frozen=True, slots=True)
class Change:
    """A change to one line that leaves a plan.

    Parameters
    ----------
    said : the line
    words : what to write there
    size, steps : how large a change it is
    serves_all : with it a plan was found for all the other lines too, not only for those of its clash
    """

    said: Said
    words: str
    size: Size
    steps: int = 1
    serves_all: bool = True


Changed = Callable[[int], Trial]


def changes(trial: Trial, clash: Clash, others: Sequence[Clash], questions: Questions) -> tuple[Change, ...]:
    """Changes to single lines of a clash, each of which alone was seen to leave a plan.

    Where none was seen to leave a plan for the whole file, those that mend this clash are told.

    Parameters
    ----------
    trial : the impossible trial
    clash : one of its clashes
    others : its other clashes: their lines are left out while this one is mended
    questions : answers whether a changed trial can be met
    """
    apart = {said for other in others for said in other.lines}
    kept = [said for said in demands(trial) if said not in apart]
    found = _tried(_Relaxer(trial, kept, questions), clash)
    if not found:
        alone = _tried(_Relaxer(trial, clash.lines, questions), clash)
        found = [replace(change, serves_all=False) for change in alone]
    return tuple(sorted(found, key=lambda change: (change.size, change.steps, change.said.line)))


def _tried(relaxer: _Relaxer, clash: Clash) -> list[Change]:
    found = [change for said in clash.lines for change in relaxer.of(said)]
    if not found:
        found += relaxer.of_all_plots()
    return found + relaxer.of_blocks()


class _Relaxer:
    def __init__(self, trial: Trial, kept: Sequence[Said], questions: Questions) -> None:
        self.trial = trial
        self.kept = kept
        self.questions = questions
        self.names = [treatment.name for treatment in trial.treatments]

    def of(self, said: Said) -> list[Change]:
        """What can be done about one line."""
        match said.sort:
            case "plots" | "plots_each":
                return list(self._plots(said))
            case "meet_at_least" | "meet_at_most":
                return list(self._meeting(said))
            case "never_share_block":
                return list(self._group(said))
            case "planted":
                return []  # what is in the soil is no wish that could be dropped
        words = "twice_in_block: true" if said.sort == "twice_in_block" else "leave it out"
        size = Size.ONE_ENTRY if said.sort in ("keep_out", "must_hold") else Size.WHOLE_LINE
        return [Change(said, words, size)] if self._without(said) else []

    def of_all_plots(self) -> list[Change]:
        """Fewer plots, or a wider choice, in every line that asks for plots: where no single line will do."""
        lines = [said for said in self.kept if said.sort in ("plots", "plots_each")]
        if len(lines) < 2:
            return []
        together = replace(lines[0], items=tuple(i for said in lines for i in said.items))
        most = max(treatment.least for treatment in self.trial.treatments) - 1
        for room, down, up, more in ((most, 1, 0, "fewer"), (self.trial.land, 0, 1, "more")):
            steps = self._least_step(room, partial(self._ranged, together, down, up))
            if steps is not None:
                plots = "one plot" if steps == 1 else f"{steps} plots"
                words = f"allow {plots} {more} in each line that asks for plots"
                return [Change(lines[0], words, Size.MANY_NUMBERS, steps)]
        return []

    def of_blocks(self) -> list[Change]:
        """Plots more or fewer, in one block or spread over them, where that serves."""
        frame = next((said for said in self.trial.said if said.sort in ("blocks", "ground")), None)
        if frame is None or self.trial.even:
            return []  # as even as the plots allow: other plots would be other demands
        short = sum(treatment.least for treatment in self.trial.treatments) - self.trial.land
        taken = sum(treatment.most for treatment in self.trial.treatments)
        spare = 0 if self.trial.may_be_emptier else self.trial.land - taken  # filler takes what is spare
        by = short if short > 0 else -spare if spare > 0 else 0
        if abs(by) > 1:
            changed = self._spread(by)
            words = f"{abs(by)} plots {'more' if by > 0 else 'fewer'} in all"
            served = changed is not None and self._possible(changed)
            return [Change(frame, words, Size.MANY_NUMBERS, abs(by))] if served else []
        for step in (by,) if by else (1, -1):
            for j, block in list(enumerate(self.trial.blocks))[:MOST_TRIED]:
                blocks = list(self.trial.blocks)
                blocks[j] = replace(block, plots=block.plots + step)
                if blocks[j].plots and self._possible(replace(self.trial, blocks=tuple(blocks))):
                    words = f"{blocks[j].plots} plots in {block.name}, one {'more' if step > 0 else 'fewer'}"
                    return [Change(frame, words, Size.ONE_NUMBER)]
        return []

    def _spread(self, by: int) -> Trial | None:
        """The trial with plots added to, or taken from, its blocks in turn."""
        sizes = [block.plots for block in self.trial.blocks]
        for step in range(abs(by)):
            sizes[step % len(sizes)] += 1 if by > 0 else -1
        if min(sizes) < 1:
            return None
        blocks = tuple(replace(b, plots=k) for b, k in zip(self.trial.blocks, sizes, strict=True))
        return replace(self.trial, blocks=blocks)

    def _possible(self, changed: Trial) -> bool:
        return self._as_a_file(only(changed, self.kept))

    def _without(self, said: Said) -> bool:
        left = [other for other in self.kept if other != said]
        return self._as_a_file(only(self.trial, left))

    def _as_a_file(self, changed: Trial) -> bool:
        """Whether a plan is seen for the trial as its file would then be read."""
        as_read = replace(changed, rules=replace(changed.rules, unforced=()))
        return self.questions.ask(as_read) is Verdict.POSSIBLE

    def _least_step(self, most: int, changed: Changed) -> int | None:
        """The fewest steps after which a plan is there; more steps never take one away."""
        if most < 1 or not self._possible(changed(most)):
            return None
        low, high = 0, 1
        while high < most and not self._possible(changed(high)):
            low, high = high, min(2 * high, most)
        while high - low > 1:
            middle = (low + high) // 2
            if self._possible(changed(middle)):
                high = middle
            else:
                low = middle
        return high

    def _plots(self, said: Said) -> Iterator[Change]:
        least = min(self.trial.treatments[i].least for i in said.items)
        most = max(self.trial.treatments[i].most for i in said.items)
        size = Size.ONE_NUMBER if said.sort == "plots" else Size.MANY_NUMBERS
        ways = ((least - 1, 1, 0), (self.trial.land - most, 0, 1), (self.trial.land - most, 1, 1))
        found = False
        for room, down, up in ways:
            if found and down and up:
                return  # one end alone serves
            steps = self._least_step(room, partial(self._ranged, said, down, up))
            if steps is not None:
                found = True
                range_ = f"[{max(1, least - steps * down)}, {most + steps * up}]"
                words = f"plots: {range_}" if said.sort == "plots" else f"plots_each: {range_}"
                yield Change(said, words, size, steps)

    def _ranged(self, said: Said, down: int, up: int, steps: int) -> Trial:
        treatments = list(self.trial.treatments)
        for i in said.items:
            x = treatments[i]
            treatments[i] = replace(x, least=max(1, x.least - steps * down), most=x.most + steps * up)
        return replace(self.trial, treatments=tuple(treatments))

    def _meeting(self, said: Said) -> Iterator[Change]:
        (at,) = said.items
        rules: tuple[Meeting, ...] = getattr(self.trial.rules, said.sort)
        now = rules[at].blocks
        fewer = said.sort == "meet_at_least"

        def changed(steps: int) -> Trial:
            meeting = replace(rules[at], blocks=now - steps if fewer else now + steps)
            return self._ruled({said.sort: (*rules[:at], meeting, *rules[at + 1 :])})

        steps = self._least_step(now if fewer else max(0, self.trial.b - now), changed)
        if steps is not None:
            blocks = now - steps if fewer else now + steps
            size = Size.ONE_NUMBER if rules[at].pair is not None else Size.MANY_NUMBERS
            word = said.sort if rules[at].pair is None else "blocks"
            yield Change(said, f"{word}: {blocks}" if blocks else "leave it out", size, steps)

    def _group(self, said: Said) -> Iterator[Change]:
        (at,) = said.items
        groups = self.trial.rules.never_share_block
        group = groups[at]
        if len(group) == 2:
            if self._without(said):
                yield Change(said, "leave this pair out", Size.ONE_ENTRY)
            return
        few = self._least_step(len(group) - 2, partial(self._smaller, at))
        if few is not None:
            out = ", ".join(self.names[i] for i in group[:few])
            yield Change(said, f"take {out} out of it", Size.ONE_ENTRY, few)
        elif self._without(said):
            yield Change(said, "leave it out", Size.WHOLE_LINE)

    def _smaller(self, at: int, few: int) -> Trial:
        groups = self.trial.rules.never_share_block
        return self._ruled({"never_share_block": (*groups[:at], groups[at][few:], *groups[at + 1 :])})

    def _ruled(self, changed: dict[str, object]) -> Trial:
        values = {name: getattr(self.trial.rules, name) for name in Rules.__slots__}
        return replace(self.trial, rules=Rules(**(values | changed)))


def in_words(trial: Trial, change: Change) -> str:
    """A change as advice."""
    rest = "" if change.serves_all else " (mends this clash; whether the rest can be met was not decided)"
    return f"{place(trial, change.said)} ({quoted(trial, change.said)}): {change.words}{rest}"
