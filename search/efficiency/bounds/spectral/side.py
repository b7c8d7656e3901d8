"""What every plan with equal blocks and replications has in common, seen from treatments and from blocks.

A side is a symmetric matrix M of whole numbers with an empty diagonal: how much more often two treatments
meet, or two blocks, than every pair would if the meetings were even and rounded down. With the shared
eigenvalues ρ = rk·x of NN' each side has the eigenvalues `offset + rk·x`, besides some that every plan has.

Where meetings are as even as can be, M is a graph (entries 0 and 1). One step away from that a single pair
of members has the entry −1 or 2. Further away only bounds on the entries are used.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, replace

from search.efficiency.bounds.problem import Problem
from search.efficiency.bounds.spectral.walks import FEWEST, MOST

Fixed = tuple[tuple[int, int], ...]
"""Eigenvalues that every plan has, and how often."""
Ends = dict[int, tuple[int, int]]
"""For each entry of M the least and the greatest entry of M² beside it."""
ODD_ENTRIES = (-1, 2)


@dataclass(frozen=True, slots=True)
class Shape:
    """The numbers of a plan with equal blocks and replications.

    Parameters
    ----------
    t, b, r, k : treatments, blocks, plots of a treatment, plots of a block
    sets : replicates into which all blocks fall, 1 where they need not
    apart : with how many others each treatment never shares a block; empty where all may meet
    """

    t: int
    b: int
    r: int
    k: int
    sets: int
    apart: tuple[int, ...] = ()

    @property
    def rank(self) -> int:
        """Nonzero eigenvalues of C in a connected plan."""
        return self.t - 1

    @property
    def without_loss(self) -> int:
        """Dimensions in which every plan keeps its whole replication: x = 0 there."""
        return max(0, self.t - self.b + self.sets - 1)


@dataclass(frozen=True, slots=True)
class Pairs:
    """Ordered pairs of different members that stand in one relation.

    Parameters
    ----------
    count : of them in all
    ends : the entries they can have
    rows : number of the row sums to which their entries count
    """

    count: int
    ends: Ends
    rows: int = 0


@dataclass(frozen=True, slots=True)
class Walks:
    """Closed walks without turning back; in a graph none of their numbers is below 0.

    Parameters
    ----------
    name : by which a certificate prices them
    offset, sign : eigenvalue `offset + sign·rk·x`
    lines, points : lines through a point, points on a line
    fixed : eigenvalues that every plan has
    least : what those of length 3 are not below, where no longer ones are counted; None where none is below 0
    """

    name: str
    offset: int
    sign: int
    lines: int
    points: int
    fixed: Fixed
    least: int | None = None

    @property
    def lengths(self) -> range:
        """Those that are counted."""
        return range(FEWEST, (MOST if self.least is None else FEWEST) + 1)


@dataclass(frozen=True, slots=True)
class Side:
    """One side of a plan.

    Parameters
    ----------
    name : "primal" for treatments, "dual" for blocks
    size : members
    offset : eigenvalue `offset + rk·x`
    fixed : eigenvalues that every plan has
    pairs : relations
    rows : sums of the entries of M and of M², over all members; the diagonal of M² counts to the first
    diagonals : how many members have a diagonal entry of M² from where to where, in steps of 2
    walks : families of closed walks
    excess : `Σ m (m − 1)` over all ordered pairs
    exactly : whether the excess is known, else it is the least
    """

    name: str
    size: int
    offset: int
    fixed: Fixed
    pairs: tuple[Pairs, ...]
    rows: tuple[tuple[int, int], ...]
    diagonals: tuple[tuple[int, int, int], ...]
    walks: tuple[Walks, ...]
    excess: int
    exactly: bool

    def zeros(self, rank: int) -> int:
        """How many more of the `rank` eigenvalues of C there are with x = 0 than this side shows."""
        return rank - (self.size - sum(times for _, times in self.fixed))


@dataclass(frozen=True, slots=True)
class Half:
    """A side before its level is known.

    Parameters
    ----------
    name : of the side
    size : members
    own : entry on the diagonal of NN' or N'N (lines through a member)
    line : members of a line
    sets : sets of members that never meet, all of one size; 1 where there are none
    apart : with how many others each member never meets besides, empty where that is not told
    """

    name: str
    size: int
    own: int
    line: int
    sets: int
    apart: tuple[int, ...] = ()

    @property
    def set_size(self) -> int:
        """Members of a set that never meet, 1 where each is alone."""
        return self.size // self.sets if self.sets > 1 else 1

    @property
    def others(self) -> int:
        """Members that a member may meet."""
        return self.size - self.set_size

    @property
    def total(self) -> int:
        """Meetings of a member."""
        return self.own * (self.line - 1)

    @property
    def base(self) -> int:
        """Meetings that every pair has where they are even."""
        return self.total // self.others

    @property
    def degree(self) -> int:
        """Row sum of M: pairs of a member that meet once more often."""
        return self.total - self.base * self.others

    @property
    def least_squares(self) -> int:
        """Least trace of the square of NN' or N'N."""
        least = self.others * self.base**2 + self.degree * (2 * self.base + 1)
        return self.size * (self.own**2 + least)

    @property
    def offset(self) -> int:
        """Eigenvalue of M where x = 0."""
        # where sets never meet, taking the base out changes nothing but differences between sets
        return -self.own if self.sets > 1 else self.base - self.own

    @property
    def far(self) -> int:
        """Ordered pairs that never meet though pairs would if meetings were even."""
        return sum(self.apart) if self.base else 0

    @property
    def least_steps(self) -> int:
        """Steps from even that those pairs take: each has the entry m = −base, and m (m − 1) twice over."""
        return self.far * self.base * (self.base + 1) // 4

    def variants(self, level: int, exactly: bool) -> list[Side]:
        """The side where the meetings are `level` steps from even, exactly or at least."""
        if exactly and level == 0:
            return [self._even()]
        if exactly and level == 1 and self.sets == 1:
            # a pair that never meets is the odd one
            odd = ODD_ENTRIES[:1] if self.far else ODD_ENTRIES
            return [self._odd(m) for m in odd if 0 <= self.base + m <= self.own]
        return [self._any(level, exactly)]

    def _even(self) -> Side:
        d, size = self.degree, self.size
        ends = _possible({m: self._graph_ends(m) for m in (0, 1)})
        walks = (self._meetings(), self._graph(), self._other())
        return self._side(self._relations(ends, self._graph_within()), ((size, d, d),), walks)

    def _odd(self, odd: int) -> Side:
        """One pair of members has the entry −1 or 2, all others 0 or 1."""
        d, size = self.degree, self.size
        apart = {m: self._graph_ends(m) for m in (0, 1)}
        # one of the two has the odd entry in its row, so that one walk may count −1, or one more
        touching = {m: (max(-1, self._walks_above(m)), d - m + 1) for m in (0, 1)}
        between = {odd: (max(0, self._walks_above(odd), 2 * (d - odd) - (size - 2)), d - odd)}
        pairs = (
            Pairs(size * (size - 1) - 2 - 4 * (size - 2), _possible(apart)),
            Pairs(4 * (size - 2), _possible(touching)),
            Pairs(2, _possible(between)),
        )
        diagonals = ((size - 2, d, d), (2, d + 2, d + 2))
        walks = (self._meetings(), self._graph() if odd > 0 else self._other())
        return self._side(pairs, diagonals, walks, 4)

    def _any(self, level: int, exactly: bool) -> Side:
        total, size = self.total, self.size
        entries = range(-self.base, self.own - self.base + 1)
        ends = {m: (self._walks_above(m), total**2 - self._shift(m)) for m in entries}
        within = -self._shift_within(), total**2 - self._shift_within()
        most = total * (self.own - 2 * self.base) + self.others * self.base**2
        walks = [self._meetings()]
        if self.base == 0 and self.line > 2:
            # M has no entry below 0, so that it is a graph with several edges between two
            walks.append(self._graph())
        if exactly and self.sets == 1:
            walks += [self._bounded(family, level) for family in self._both(walks)]
        relations = self._relations(_possible(ends), within)
        if self.far:
            never = _possible({-self.base: ends[-self.base]})
            relations = Pairs(self.far, never), Pairs(size * self.others - self.far, _possible(ends))
        return self._side(relations, self._diagonals(most), tuple(walks), 4 * level, exactly)

    def _diagonals(self, most: int) -> tuple[tuple[int, int, int], ...]:
        """By the partners that a member never meets: each adds base (base + 1) to what Σ m² is at least."""
        if not self.far:
            return ((self.size, self.degree, most),)
        each = self.base * (self.base + 1)
        numbers = sorted(Counter(self.apart).items())
        return tuple((count, self.degree + partners * each, most) for partners, count in numbers)

    def _bounded(self, family: Walks, level: int) -> Walks:
        """A family of walks of which no more than the least number of triangles is known."""
        spare, most = level - self.least_steps, max(self.apart, default=0) if self.far else 0
        if family.name == "graph":
            known = self.far * self.base, self.base * most, self.base**2 * most
        elif self.far and spare == 0:
            # pairs that never meet stand more than once in what M leaves out, and nothing else is odd
            return family
        else:
            known = 0, self.base * (self.base + 1) * most, 0
        least = max(_least_triangles(family.lines, level), _least_near(family.lines, spare, *known))
        return replace(family, least=least)

    def _both(self, walks: list[Walks]) -> list[Walks]:
        """The graph and the one of all other pairs, as far as they are not among the walks."""
        return [family for family in (self._graph(), self._other()) if family not in walks]

    def _side(
        self,
        pairs: tuple[Pairs, ...],
        diagonals: tuple[tuple[int, int, int], ...],
        walks: tuple[Walks, ...],
        excess: int = 0,
        exactly: bool = True,
    ) -> Side:
        d = self.degree
        kept = tuple(family for family in walks if family.lines > 1)
        pairs = tuple(relation for relation in pairs if relation.count)
        return Side(
            self.name,
            self.size,
            self.offset,
            self.fixed(d),
            pairs,
            self._rows(),
            diagonals,
            kept,
            excess,
            exactly,
        )

    # -- what a plan has ------------------------------------------------------------------------------

    def fixed(self, total: int) -> Fixed:
        """The row sum, and what it leaves for differences between sets."""
        if self.sets == 1:
            return ((total, 1),)
        return ((total, 1), (-(total // (self.sets - 1)), self.sets - 1))

    def _meetings(self) -> Walks:
        return Walks("meetings", -self.own, 1, self.own, self.line, self.fixed(self.total))

    def _graph(self) -> Walks:
        return Walks("graph", self.offset, 1, self.degree, 2, self.fixed(self.degree))

    def _other(self) -> Walks:
        """Of the graph of all pairs that M leaves out."""
        rest = self.others - self.degree
        return Walks("other", -self.offset - (self.sets == 1), -1, rest, 2, self.fixed(rest))

    def _rows(self) -> tuple[tuple[int, int], ...]:
        d = self.degree
        if self.sets == 1:
            return ((self.size * d, self.size * d**2),)
        own = d * self._each(0)
        return ((0, self.size * own), (self.size * d, self.size * (d**2 - own)))

    def _relations(self, ends: Ends, within: tuple[int, int]) -> tuple[Pairs, ...]:
        if self.sets == 1:
            return (Pairs(self.size * self.others, ends),)
        return (
            Pairs(self.size * (self.set_size - 1), {0: within}),
            Pairs(self.size * self.others, ends, 1),
        )

    def _each(self, m: int) -> int:
        """Of the degree of a member, what it has with one other set."""
        return m if self.sets == 1 else self.degree // (self.sets - 1)

    # -- ranges of the entries of M² ------------------------------------------------------------------

    def _between(self) -> int:
        """Members that two members of different sets may both meet."""
        return (self.sets - 2) * self.set_size if self.sets > 1 else self.size - 2

    def _shift(self, m: int) -> int:
        """What the base adds to the square where M has the entry m."""
        return self.base**2 * self._between() + 2 * self.base * (self.degree - self._each(m))

    def _shift_within(self) -> int:
        return self.base**2 * self.others + 2 * self.base * self.degree

    def _walks_above(self, m: int) -> int:
        """Two meetings one after the other, not in one line, are never fewer than none."""
        return (self.line - 2) * (self.base + m) - self._shift(m)

    def _graph_ends(self, m: int) -> tuple[int, int]:
        d, each = self.degree, self._each(m)
        if self.sets == 1:
            shared = 2 * (d - m) - self._between()
        else:
            shared = (self.sets - 2) * max(0, 2 * each - self.set_size)
        return max(0, self._walks_above(m), shared), d - each

    def _graph_within(self) -> tuple[int, int]:
        return max(0, (self.sets - 1) * (2 * self._each(0) - self.set_size)), self.degree


def _least_triangles(d: int, steps: int) -> int:
    """What tr M³ is not below where M is so many steps from a graph of degree d.

    Entries below 0 come to at most `steps` over all pairs. Each takes its weight times an entry of the square
    of the others, at most `d + 2 steps` by Cauchy and Schwarz, six times; among themselves at most 2 steps².
    """
    return -6 * steps * (d + 2 * steps) - 2 * steps**2


def _least_near(d: int, steps: int, known: int, more: int, squares: int) -> int:
    """The same where entries below 0 come to `known` in pairs that are told, and else to `steps`.

    Parameters
    ----------
    d, steps : degree, and steps that are left for all other pairs
    known : the sum of what the told entries are below 0, over ordered pairs
    more : what those pairs add to the squares of the other entries in a row, at most
    squares : what they add to the squares of the entries below 0 in a row, at most
    """
    below = known + 2 * steps
    return -3 * below * (d + more + 2 * steps) - below * (squares + 2 * steps)


def _possible(ends: Ends) -> Ends:
    return {m: (low, high) for m, (low, high) in ends.items() if low <= high}


def shape_of(given: Problem) -> Shape | None:
    """The numbers of a trial; None where blocks or replications differ or something may stand twice."""
    rules, limits = given.rules, given.limits
    sizes, plots = set(rules.sizes.tolist()), {*limits.least.tolist(), *limits.most.tolist()}
    if len(sizes) > 1 or len(plots) > 1 or (rules.high > 1).any():
        return None
    r, k = plots.pop(), sizes.pop()
    whole = bool((rules.group >= 0).all() and rules.share.size and (rules.share == 1).all())
    if r < 2 or not 2 <= k < rules.t:
        return None
    apart = tuple(sorted(rules.apart.sum(axis=1).tolist())) if rules.apart.any() else ()
    return Shape(rules.t, rules.b, r, k, rules.share.shape[1] if whole else 1, apart)


def halves(shape: Shape) -> tuple[Half, Half]:
    """Treatments and blocks."""
    return (
        Half("primal", shape.t, shape.r, shape.k, 1, shape.apart),
        Half("dual", shape.b, shape.k, shape.r, shape.sets),
    )


def steps_of(shape: Shape, number: int) -> tuple[int, int] | None:
    """Steps from even of treatments and of blocks at the level with this number.

    Treatments and blocks have the same eigenvalues, so their levels go together: each step adds 4 to
    `tr (NN')² = tr (N'N)²`, and the first is where one of them is even, or pairs that never meet let it be.
    """
    primal, dual = halves(shape)
    ahead, odd = divmod(primal.least_squares - dual.least_squares, 4)
    level = number + max(primal.least_steps, -ahead)
    return None if odd else (level, level + ahead)


def variants(shape: Shape, number: int, exactly: bool) -> list[tuple[Side, Side]] | None:
    """Both sides at the level with this number, every way they can be; None where no plan has one."""
    steps = steps_of(shape, number)
    if steps is None:
        return None
    primal, dual = halves(shape)
    return [
        (one, other)
        for one in primal.variants(steps[0], exactly)
        for other in dual.variants(steps[1], exactly)
    ]
