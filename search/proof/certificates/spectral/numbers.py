"""A trial with equal blocks and replications as numbers, and one side of its plans at one level.

The side of the treatments has A = NN' − rI, that of the blocks A = N'N − kI. With A = base·E + M, E having
ones for every two members that may meet, M is a matrix of whole numbers with equal row sums d < members that
a member may meet. The level is `Σ m(m−1)/4` over ordered pairs, the steps from even.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from search.proof.certificates.case import Case
from search.proof.records import Refuted

EVEN, ODD, ANY = "even", "odd", "any"


@dataclass(frozen=True, slots=True)
class Numbers:
    """t treatments and b blocks, r plots of each treatment and k of each block, in `sets` replicates.

    `apart` says of each treatment with how many others it never shares a block; empty where all may meet.
    """

    t: int
    b: int
    r: int
    k: int
    sets: int
    apart: tuple[int, ...] = ()

    @property
    def kernel(self) -> int:
        """At least so many eigenvalues have x = 0: z with N'z = 0, 1'z = 0."""
        return max(0, self.t - self.b + self.sets - 1)


def numbers_of(case: Case) -> Numbers:
    """Of a trial to which this kind of certificate speaks."""
    rules = case.rules
    sizes, plots = {int(s) for s in rules.sizes}, {*case.least, *case.most}
    if len(sizes) != 1 or len(plots) != 1 or not case.nothing_twice:
        raise Refuted("this kind of certificate is for equal blocks, equal replications, nothing twice")
    r, k = plots.pop(), sizes.pop()
    if r < 2 or not 2 <= k < case.trial.t:
        raise Refuted("this kind of certificate is for incomplete blocks of two plots or more")
    in_replicates = (rules.group >= 0).all() and (rules.share == 1).all() and rules.share.shape[1] > 0
    partners = [sum(bool(x) for x in row) for row in rules.apart]
    apart = tuple(partners) if any(partners) else ()
    return Numbers(case.trial.t, rules.b, r, k, rules.share.shape[1] if in_replicates else 1, apart)


@dataclass(frozen=True, slots=True)
class Side:
    """Members on lines: treatments in blocks, or blocks and the treatments they hold.

    Parameters
    ----------
    members, lines, points : members, lines through a member, members of a line
    sets : sets of members of one size that never meet, 1 where there are none
    level : steps from even, exactly or at least
    exactly : which of them
    odd : at level 1 exactly and without sets, the one entry of M that is not 0 or 1; else None
    apart : of each member, with how many others it has the entry −base below 0; empty where that is not told
    """

    members: int
    lines: int
    points: int
    sets: int
    level: int
    exactly: bool
    odd: int | None = None
    apart: tuple[int, ...] = ()

    @property
    def form(self) -> str:
        """What is known of M: a graph, a graph but for one pair, or only its level."""
        if self.exactly and self.level == 0:
            return EVEN
        return ANY if self.odd is None else ODD

    @property
    def taken(self) -> int:
        """Steps from even that the pairs which never meet take for themselves."""
        return sum(self.apart) * self.base * (self.base + 1) // 4

    @property
    def alone(self) -> int:
        """Members of a set, 1 without sets."""
        return self.members // self.sets if self.sets > 1 else 1

    @property
    def meets(self) -> int:
        """Meetings of a member in all."""
        return self.lines * (self.points - 1)

    @property
    def base(self) -> int:
        """Meetings of every pair where they are even, rounded down."""
        return self.meets // (self.members - self.alone)

    @property
    def d(self) -> int:
        """Row sum of M."""
        return self.meets - self.base * (self.members - self.alone)

    @property
    def d_to_set(self) -> int:
        """Of the row sum, what belongs to one other set."""
        return self.d // (self.sets - 1)

    @property
    def at_zero(self) -> int:
        """Eigenvalue of M on a vector with x = 0 that sums to 0 on all members and on each set."""
        return -self.lines if self.sets > 1 else self.base - self.lines

    def known(self, row_sum: int) -> list[tuple[int, int]]:
        """Eigenvalues of every plan: the vector of ones, and differences between sets."""
        found = [(row_sum, 1)]
        if self.sets > 1:
            found.append((-(row_sum // (self.sets - 1)), self.sets - 1))
        return found

    @property
    def unknown(self) -> int:
        """Number of eigenvalues that a plan decides."""
        return self.members - self.sets

    @property
    def least_squares(self) -> int:
        """Trace of (A + lines·I)² at level 0."""
        others = self.members - self.alone
        ups = self.d
        return self.members * (self.lines**2 + (others - ups) * self.base**2 + ups * (self.base + 1) ** 2)


def pairs_of_sides(numbers: Numbers, number: int, exactly: bool) -> list[tuple[Side, Side]]:
    """Both sides at the level with this number, in every form, in the order of the certificate.

    tr(NN')² = tr(N'N)² ties the levels: each step is worth 4 on either side. Where pairs would meet `base`
    times at the evenest, a pair that never meets adds 2·base(base + 1) to Σ m(m−1), base(base + 1)/2 steps.
    """
    primal = Side(numbers.t, numbers.r, numbers.k, 1, 0, True)
    pairs, base = sum(numbers.apart) // 2, primal.base
    below = pairs * base * (base + 1) // 2
    if below:
        primal = replace(primal, apart=numbers.apart)
    dual = Side(numbers.b, numbers.k, numbers.r, numbers.sets, 0, True)
    ahead = primal.least_squares - dual.least_squares
    if ahead % 4:
        raise Refuted("no plan of the trial has equal traces on both sides")
    level = number + max(0, below, -(ahead // 4))
    return [
        (one, other)
        for one in _forms(primal, level, exactly)
        for other in _forms(dual, level + ahead // 4, exactly)
    ]


def _forms(side: Side, level: int, exactly: bool) -> list[Side]:
    make = (side.members, side.lines, side.points, side.sets, level, exactly)
    if exactly and level == 1 and side.sets == 1:
        # Σ m(m−1) = 4 over ordered pairs: one pair has the entry −1 or 2; −1 if it is one that never meets.
        possible = (-1,) if side.apart else (-1, 2)
        return [Side(*make, odd) for odd in possible if 0 <= side.base + odd <= side.lines]
    return [Side(*make, apart=side.apart)]
