"""What the rules imply for the number of plots of each treatment.

Every step counts plots, blocks or meetings, so that a planner can follow it; the steps are repeated
until none of them tightens a range. What is left is a box of ranges, and sums over treatments that may
never meet. Search and bounds use both; counts that cannot all hold make the trial impossible.
"""

from __future__ import annotations

from dataclasses import dataclass
from heapq import heapify, heappop, heappush

import numpy as np

from search.foundation.errors import Impossible
from search.trial.records import Trial
from search.trial.tables import Bools, Ints, Tables, tables

LISTED = 6
"""At most so many names are spelled out in a sentence."""


@dataclass(frozen=True, slots=True)
class SumLimit:
    """Treatments that never share a block have at most `most` plots together."""

    treatments: tuple[int, ...]
    most: int
    why: str


@dataclass(frozen=True, slots=True, eq=False)
class Limits:
    """Implied replication.

    Parameters
    ----------
    least, most : (t,) range of plots of each treatment that all the rules leave
    fewest, fullest : (b,) range of plots that are planted in each block
    planted : fewest and most plots that are planted in all
    sums : limits on sums that the box does not imply already
    told : what the rules force beyond the stated ranges, in sentences
    """

    least: Ints
    most: Ints
    fewest: Ints
    fullest: Ints
    planted: tuple[int, int]
    sums: tuple[SumLimit, ...]
    told: tuple[str, ...]

    @property
    def pinned(self) -> bool:
        """Whether every treatment has one possible number of plots."""
        return bool((self.least == self.most).all())


def limits(trial: Trial) -> Limits:
    """The replication that all the rules together leave.

    Raises
    ------
    Impossible : counts that cannot all hold, told in the words of the file
    """
    return _Implications(trial).run()


def cliques(apart: Ints | np.ndarray) -> tuple[tuple[int, ...], ...]:
    """Sets of treatments no two of which may meet, each as large as greedy growth makes it.

    Parameters
    ----------
    apart : (t, t) True for pairs that never share a block

    Returns
    -------
    for every pair at least one set that holds it
    """
    apart = np.asarray(apart, dtype=bool)
    degree = apart.sum(axis=1)
    covered = np.zeros_like(apart)
    found = []
    for i, j in zip(*np.nonzero(np.triu(apart)), strict=True):
        if covered[i, j]:
            continue
        members = [int(i), int(j)]
        open_ = apart[i] & apart[j]
        while open_.any():
            # Of those that are apart from all members, the one with most room to grow.
            candidates = np.flatnonzero(open_)
            grown = int(
                candidates[
                    np.argmax((apart[candidates] & open_).sum(axis=1) * len(degree) + degree[candidates])
                ]
            )
            members.append(grown)
            open_ = open_ & apart[grown]
        covered[np.ix_(members, members)] = True
        found.append(tuple(sorted(members)))
    return tuple(dict.fromkeys(found))


def caps_of_pairs(rules: Tables) -> Ints:
    """Most meetings of each pair of treatments, one number for each pair."""
    above: Ints = rules.meet_most[np.triu_indices(rules.t, 1)]
    return above


def _fewest_crossings(least: list[int], most: list[int], plots: int) -> int:
    """The least Σ r(r − 1)/2 over r within the ranges, Σ r = plots: dealt out one by one, fewest first."""
    r = list(least)
    heap = [(plots_of, i) for i, plots_of in enumerate(r) if plots_of < most[i]]
    heapify(heap)
    for _ in range(plots - sum(r)):
        if not heap:
            break
        _, i = heappop(heap)
        r[i] += 1
        if r[i] < most[i]:
            heappush(heap, (r[i], i))
    return sum(x * (x - 1) // 2 for x in r)


def _shared(stands: Bools) -> Ints:
    """Blocks that each two treatments share; in floating point, where products of matrices are quick."""
    counts = stands.astype(np.float64)
    shared: Ints = (counts @ counts.T).astype(np.int64)
    return shared


def _clash(text: str, shown_by: str = "count") -> Impossible:
    return Impossible([text], shown_by)


class _Implications:
    """Tightens ranges step by step and remembers why."""

    def __init__(self, trial: Trial) -> None:
        self.trial = trial
        self.tables: Tables = tables(trial)
        self.names = [treatment.name for treatment in trial.treatments]
        self.blocks = [block.name for block in trial.blocks]
        self.least = self.tables.least.copy()
        self.most = self.tables.most.copy()
        self.fewest = self.tables.fewest.copy()
        self.fullest = self.tables.sizes.copy()
        self.planted = (0, 0)
        self.cliques = cliques(self.tables.apart)
        self.once = bool((self.tables.high <= 1).all())
        self.reasons: dict[int, str] = {}
        self.sums: tuple[SumLimit, ...] = ()

    def run(self) -> Limits:
        self._contradictions()
        self._blocks_can_be_filled()
        self._replicates_can_be_filled()
        self._each_treatment()
        while True:
            before = [x.copy() for x in (self.least, self.most, self.fewest, self.fullest)]
            self._sums_of_cliques()
            self._totals()
            self._meetings()
            now = (self.least, self.most, self.fewest, self.fullest)
            if all((x == y).all() for x, y in zip(before, now, strict=True)):
                break
        self._meetings_in_all()
        sums = tuple(s for s in self.sums if self.most[list(s.treatments)].sum() > s.most)
        told = (*self._told(sums), *self._told_of_filler())
        return Limits(self.least, self.most, self.fewest, self.fullest, self.planted, sums, told)

    # -- steps ---------------------------------------------------------------------------------

    def _contradictions(self) -> None:
        rules = self.tables
        causes = []
        for i, j in zip(*np.nonzero(rules.low > rules.high), strict=True):
            if rules.high[i, j] == 0:
                causes.append(f"{self.blocks[j]} must hold {self.names[i]}, which is kept out of it")
            elif rules.high[i, j] == 1:
                causes.append(
                    f"{self.names[i]} is planted on {rules.low[i, j]} plots of {self.blocks[j]} already, and "
                    "no treatment may stand there twice"
                )
        if causes:
            raise Impossible(causes, "count")
        for i, j in zip(*np.nonzero(np.triu(rules.meet_least > rules.meet_most, 1)), strict=True):
            fewest, most = rules.meet_least[i, j], rules.meet_most[i, j]
            limit = "never may" if rules.apart[i, j] else f"may share at most {most}"
            causes.append(f"{self._named((i, j))} must share {fewest} blocks and {limit}")
        together = _shared(rules.low > 0)
        for i, j in zip(*np.nonzero(np.triu(rules.apart & (together > 0), 1)), strict=True):
            block = self.blocks[int(np.argmax((rules.low[i] > 0) & (rules.low[j] > 0)))]
            causes.append(f"{block} must hold both {self._named((i, j))}, which never share a block")
        for i, j in zip(*np.nonzero(np.triu((together > rules.meet_most) & ~rules.apart, 1)), strict=True):
            causes.append(
                f"{self._named((i, j))} are both required in {together[i, j]} blocks "
                f"and may share at most {rules.meet_most[i, j]}"
            )
        common = _shared(rules.high > 0)
        for i, j in zip(*np.nonzero(np.triu(rules.meet_least > common, 1)), strict=True):
            causes.append(
                f"{self._named((i, j))} must share {rules.meet_least[i, j]} blocks, "
                f"but both may enter only {common[i, j]}"
            )
        if causes:
            raise Impossible(causes, "count")

    def _blocks_can_be_filled(self) -> None:
        rules = self.tables
        room = rules.high.sum(axis=0) - self._lost_to_cliques(np.arange(rules.b))
        for j in np.flatnonzero(room < rules.fewest):
            by_cliques = rules.high[:, j].sum() >= rules.fewest[j]
            why = " with treatments that may share a block" if by_cliques else ""
            raise _clash(
                f"{self.blocks[j]} has {rules.sizes[j]} plots, but at most {room[j]} can be planted{why}",
                shown_by="clique" if by_cliques else "count",
            )
        for j in np.flatnonzero(rules.low.sum(axis=0) > rules.sizes):
            raise _clash(
                f"{self.blocks[j]} has {rules.sizes[j]} plots, but must hold {rules.low[:, j].sum()}"
            )
        self.fullest = np.minimum(self.fullest, room)
        self.fewest = np.maximum(self.fewest, rules.low.sum(axis=0))

    def _lost_to_cliques(self, blocks: Ints) -> Ints:
        """For each block the plots that treatments of disjoint sets, never together, cannot take."""
        high = self.tables.high[:, blocks]
        lost = np.zeros(len(blocks), dtype=np.int64)
        used = np.zeros(self.tables.t, dtype=bool)
        for members in sorted(self.cliques, key=len, reverse=True):
            free = [i for i in members if not used[i]]
            if len(free) > 1:
                used[free] = True
                lost += high[free].sum(axis=0) - high[free].max(axis=0)
        return lost

    def _replicates_can_be_filled(self) -> None:
        rules = self.tables
        for g, replicate in enumerate(self.trial.rules.replicates):
            blocks = list(replicate.blocks)
            plots, wanted = int(rules.sizes[blocks].sum()), int(rules.share[:, g].sum())
            if not self._shared_out(blocks, wanted, wanted):
                raise _clash(
                    f"replicate {replicate.name} has {plots} plots, but its treatments need {wanted}"
                )
            for i in np.flatnonzero(rules.high[:, blocks].sum(axis=1) < rules.share[:, g]):
                raise _clash(f"{self.names[i]} is kept out of too much of replicate {replicate.name}")
            for i in np.flatnonzero(rules.low[:, blocks].sum(axis=1) > rules.share[:, g]):
                raise _clash(
                    f"blocks of replicate {replicate.name} must hold {self.names[i]} more often "
                    "than it stands there"
                )
            for members in self.cliques:
                room = int(rules.high[np.ix_(members, blocks)].max(axis=0).sum())
                needed = int(rules.share[list(members), g].sum())
                if needed > room:
                    raise _clash(
                        f"{self._named(members)} never share a block and need {needed} plots in replicate "
                        f"{replicate.name}, which has room for {room}",
                        shown_by="clique",
                    )

    def _each_treatment(self) -> None:
        rules = self.tables
        settled = rules.share.sum(axis=1)
        outside = rules.group < 0
        room = rules.high.sum(axis=1)
        needs = rules.low.sum(axis=1)
        if rules.share.shape[1]:
            room = settled + rules.high[:, outside].sum(axis=1)
            needs = settled + rules.low[:, outside].sum(axis=1)
        for i in range(rules.t):
            self._at_most(i, int(room[i]), "the blocks it may enter")
            self._at_least(i, int(needs[i]), "the blocks and replicates that must hold it")
            self._at_least(i, int(rules.meet_least[i].max()), "the blocks it must share")

    def _sums_of_cliques(self) -> None:
        found = []
        for members in self.cliques:
            index = list(members)
            room = self._clique_room(index)
            total_least = int(self.least[index].sum())
            if total_least > room:
                raise _clash(
                    f"{self._named(members)} never share a block and need at least {total_least} plots, "
                    f"but the blocks they may enter take at most {room} of them",
                    shown_by="clique",
                )
            why = f"{self._named(members)} never share a block, so together they have at most {room} plots"
            found.append(SumLimit(members, room, why))
            for i in members:
                self._at_most(i, room - total_least + int(self.least[i]), why)
        self.sums = tuple(found)

    def _clique_room(self, members: list[int]) -> int:
        """Plots that treatments which never meet can have together: one of them to a block."""
        rules = self.tables
        room = int(rules.high[members].max(axis=0).sum())
        if rules.share.shape[1]:
            outside = rules.group < 0
            room = int(rules.high[members][:, outside].max(axis=0, initial=0).sum())
            room += int(rules.share[members].sum())
        return room

    def _shared_out(self, blocks: list[int], least: int, most: int) -> bool:
        """Whether blocks can hold so many plots together; what that asks of each of them is kept."""
        fewest, fullest = self.fewest[blocks], self.fullest[blocks]
        if least > fullest.sum() or most < fewest.sum():
            return False
        self.fewest[blocks] = np.maximum(fewest, least - (fullest.sum() - fullest))
        self.fullest[blocks] = np.minimum(fullest, most - (fewest.sum() - fewest))
        return True

    def _totals(self) -> None:
        for g, replicate in enumerate(self.trial.rules.replicates):
            wanted = int(self.tables.share[:, g].sum())
            self._shared_out(list(replicate.blocks), wanted, wanted)
        fewest, fullest = int(self.fewest.sum()), int(self.fullest.sum())
        if self.least.sum() > fullest:
            raise _clash(
                f"the treatments need at least {self.least.sum()} plots, but the blocks have {fullest}"
            )
        # Disjoint sums bound the total from above, treatment by treatment.
        part = {}
        ceiling = 0
        used: set[int] = set()
        for s in sorted(
            self.sums, key=lambda s: int(self.most[list(s.treatments)].sum()) - s.most, reverse=True
        ):
            if used.isdisjoint(s.treatments):
                used.update(s.treatments)
                ceiling += min(s.most, int(self.most[list(s.treatments)].sum()))
                part.update(dict.fromkeys(s.treatments, s))
        ceiling += int(self.most.sum()) - int(self.most[list(used)].sum())
        if ceiling < fewest:
            raise _clash(f"the treatments can have at most {ceiling} plots, but the blocks have {fewest}")
        spare = int(self.least.sum())
        self.planted = (max(fewest, spare), min(fullest, ceiling))
        self._shared_out(list(range(self.tables.b)), *self.planted)
        for i in range(self.tables.t):
            self._at_most(i, fullest - spare + int(self.least[i]), "the plots that the others need")
            without = ceiling - int(self.most[i])
            if i in part:
                s = part[i]
                all_most = int(self.most[list(s.treatments)].sum())
                without = ceiling - min(s.most, all_most) + min(s.most, all_most - int(self.most[i]))
            self._at_least(i, fewest - without, "the plots that the others cannot take")

    def _meetings(self) -> None:
        """Meeting caps and floors limit in how many blocks a treatment can stand."""
        rules = self.tables
        if not self.once or not rules.limits_meetings:
            return
        caps = np.minimum(rules.meet_most, np.minimum.outer(self.most, self.most))
        np.fill_diagonal(caps, 0)
        for i in range(rules.t):
            fewest = np.sort(self.fewest[rules.high[i] > 0] - 1)
            partners = np.sort(self.fullest[rules.high[i] > 0] - 1)
            room, needed = int(caps[i].sum()), int(rules.meet_least[i].sum())
            fits = int(np.searchsorted(np.cumsum(fewest), room, side="right"))
            self._at_most(i, fits, "the meetings that are allowed")
            most = np.cumsum(partners[::-1])
            if needed > (int(most[-1]) if len(most) else 0):
                raise _clash(f"{self.names[i]} must share {needed} blocks with others, more than it can")
            if needed:
                self._at_least(i, int(np.searchsorted(most, needed)) + 1, "the meetings that are required")

    def _meetings_in_all(self) -> None:
        rules = self.tables
        if not self.once:
            return
        pairs = int((self.fewest * (self.fewest - 1) // 2).sum())
        most_pairs = int((self.fullest * (self.fullest - 1) // 2).sum())
        caps = np.triu(np.minimum(rules.meet_most, np.minimum.outer(self.most, self.most)), 1).sum()
        floors = np.triu(rules.meet_least, 1).sum()
        if pairs > caps:
            raise _clash(
                f"the blocks bring about {pairs} meetings of two treatments, but only {caps} are allowed"
            )
        if most_pairs < floors:
            raise _clash(
                f"the rules ask for {floors} meetings of two treatments, "
                f"but the blocks bring about only {most_pairs}"
            )

        self._once_together(bool((caps_of_pairs(rules) <= 1).all()))

    def _once_together(self, applies: bool) -> None:
        """Where no pair meets twice, no two blocks share two treatments: blocks are counted like pairs."""
        if not applies:
            return
        b = self.tables.b
        crossings = _fewest_crossings(self.least.tolist(), self.most.tolist(), self.planted[0])
        if crossings > b * (b - 1) // 2:
            raise _clash(
                f"no pair may meet twice, so each two of the {b} blocks share at most one treatment, "
                f"{b * (b - 1) // 2} times in all; but the plots ask for {crossings} such crossings"
            )

    # -- bookkeeping ---------------------------------------------------------------------------

    def _at_most(self, i: int, most: int, why: str) -> None:
        if most < self.most[i]:
            self.most[i] = most
            self.reasons[i] = why
            self._check(i, why)

    def _at_least(self, i: int, least: int, why: str) -> None:
        if least > self.least[i]:
            self.least[i] = least
            self.reasons[i] = why
            self._check(i, why)

    def _check(self, i: int, why: str) -> None:
        if self.least[i] > self.most[i]:
            stated = self.trial.treatments[i]
            wanted = str(stated.least) if stated.least == stated.most else f"{stated.least} to {stated.most}"
            raise _clash(
                f"{self.names[i]} would need at least {self.least[i]} and at most {self.most[i]} plots "
                f"(stated: {wanted}); cause: {why}"
            )

    def _told(self, sums: tuple[SumLimit, ...]) -> list[str]:
        told = []
        by_reason: dict[tuple[str, int, int], list[int]] = {}
        for i, why in self.reasons.items():
            if (self.least[i], self.most[i]) != (self.tables.least[i], self.tables.most[i]):
                key = (why, int(self.least[i]), int(self.most[i]))
                by_reason.setdefault(key, []).append(i)
        for (why, least, most), who in by_reason.items():
            plots = f"exactly {least}" if least == most else f"{least} to {most}"
            each = "each has" if len(who) > 1 else "it has"
            told.append(
                f"{why}: {each} {plots}"
                if "never share" in why
                else f"{self._named(tuple(sorted(who)))}: {plots} plots, because of {why}"
            )
        told.extend(s.why for s in sums)
        return told

    def _told_of_filler(self) -> list[str]:
        """Which blocks may hold how many plots, where some may stay filler."""
        most, land = self.planted[1], self.trial.land
        told = [f"at most {most} of {land} plots can be planted; the rest is filler"] if most < land else []
        for j, block in enumerate(self.trial.blocks):
            fewest, fullest = int(self.fewest[j]), int(self.fullest[j])
            if block.may_be_emptier and (fewest > 1 or fullest < block.plots):
                plots = f"exactly {fewest}" if fewest == fullest else f"{fewest} to {fullest}"
                told.append(f"{block.name}: {plots} of {block.plots} plots planted")
        return told

    def _named(self, treatments: tuple[int, ...]) -> str:
        names = [self.names[i] for i in treatments]
        if len(names) > LISTED:
            names = [*names[: LISTED - 1], f"{len(names) - LISTED + 1} more"]
        return ", ".join(names[:-1]) + " and " + names[-1] if len(names) > 1 else names[0]
