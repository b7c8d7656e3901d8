"""Every pair of entries that M and M² can have in one place, and every diagonal entry of M²."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass

from search.proof.certificates.spectral.numbers import ANY, EVEN, ODD, Side


@dataclass(frozen=True, slots=True)
class Places:
    """Ordered pairs of different members about which the same is known.

    Parameters
    ----------
    count : how many there are
    ranges : for each entry m of M the least and greatest entry of M²
    rows : 0 where they count to the first row sums, 1 to the second
    """

    count: int
    ranges: dict[int, tuple[int, int]]
    rows: int


def places(side: Side) -> Iterator[Places]:
    """All ordered pairs, relation by relation."""
    v = side.members
    if side.form == ODD:
        yield from _places_around_odd(side)
    elif side.sets == 1:
        never, ranges = sum(side.apart), _ranges(side)
        if never:
            yield Places(never, {m: ends for m, ends in ranges.items() if m == -side.base}, 0)
        yield Places(v * (v - 1) - never, ranges, 0)
    else:
        yield Places(v * (side.alone - 1), {0: _range_in_set(side)}, 0)
        yield Places(v * (v - side.alone), _ranges(side), 1)


def row_sums(side: Side) -> list[tuple[int, int]]:
    """Sums of all entries of M and of M² over the places of each row number, the diagonal in the first.

    With sets, M times the indicator of a set is d_to_set times that of its complement.
    """
    v, d = side.members, side.d
    if side.sets == 1:
        return [(v * d, v * d * d)]
    in_set = d * side.d_to_set
    return [(0, v * in_set), (v * d, v * (d * d - in_set))]


def diagonals(side: Side) -> list[tuple[int, int, int]]:
    """How many members have a diagonal entry of M² from where to where; its parity is that of d."""
    v, d = side.members, side.d
    if side.form == EVEN:
        return [(v, d, d)]
    if side.form == ODD:
        # a row with the entry −1 has d + 1 ones beside it, one with 2 has d − 2
        return [(v - 2, d, d), (2, d + 2, d + 2)]
    # Σ m² = Σ a² − 2 base Σ a + base² others, and a ≤ lines
    others = v - side.alone
    if side.apart:
        # Σ m = d, and Σ m(m−1) is at least base(base + 1) for each partner that is never met
        most = side.lines * side.meets - 2 * side.base * side.meets + others * side.base**2
        each = side.base * (side.base + 1)
        return [
            (number, d + partners * each, most) for partners, number in sorted(Counter(side.apart).items())
        ]
    return [(v, d, side.lines * side.meets - 2 * side.base * side.meets + others * side.base**2)]


def _places_around_odd(side: Side) -> Iterator[Places]:
    v, d, odd = side.members, side.d, side.odd or 0
    touching, far = 4 * (v - 2), v * (v - 1) - 2 - 4 * (v - 2)
    even = Side(v, side.lines, side.points, 1, 0, True)
    if far:
        yield Places(far, _ranges(even), 0)
    # one of the two members has the odd entry in its row: up to one walk less than none, or one more
    if touching:
        yield Places(touching, _kept({m: (max(-1, _least(side, m)), d - m + 1) for m in (0, 1)}), 0)
    shared = max(0, _least(side, odd), 2 * (d - odd) - (v - 2))
    yield Places(2, _kept({odd: (shared, d - odd)}), 0)


def _ranges(side: Side) -> dict[int, tuple[int, int]]:
    if side.form == ANY:
        top = side.meets**2
        entries = range(-side.base, side.lines - side.base + 1)
        return _kept({m: (_least(side, m), top - _of_base(side, m)) for m in entries})
    if side.sets == 1:
        # two neighbourhoods of d members, without the two members themselves, among the v − 2 others
        v, d = side.members, side.d
        return _kept({m: (max(0, _least(side, m), 2 * (d - m) - (v - 2)), d - m) for m in (0, 1)})
    # in each further set both have d_to_set neighbours
    both = (side.sets - 2) * max(0, 2 * side.d_to_set - side.alone)
    return _kept({m: (max(0, _least(side, m), both), side.d - side.d_to_set) for m in (0, 1)})


def _range_in_set(side: Side) -> tuple[int, int]:
    if side.form == ANY:
        others = side.members - side.alone
        shift = side.base**2 * others + 2 * side.base * side.d
        return -shift, side.meets**2 - shift
    return max(0, (side.sets - 1) * (2 * side.d_to_set - side.alone)), side.d


def _of_base(side: Side, m: int) -> int:
    """The entry of A² − M² where M has the entry m: base² E² + base (E M + M E)."""
    if side.sets == 1:
        return side.base**2 * (side.members - 2) + 2 * side.base * (side.d - m)
    return side.base**2 * (side.sets - 2) * side.alone + 2 * side.base * (side.d - side.d_to_set)


def _least(side: Side, m: int) -> int:
    """A² has at least points − 2 for every meeting: the other members of the line that two share."""
    return (side.points - 2) * (side.base + m) - _of_base(side, m)


def _kept(ranges: dict[int, tuple[int, int]]) -> dict[int, tuple[int, int]]:
    return {m: ends for m, ends in ranges.items() if ends[0] <= ends[1]}
