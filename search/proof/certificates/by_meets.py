"""Kind "second moment by block meets": tr C² from below through the treatments that pairs of blocks share."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from fractions import Fraction
from itertools import combinations_with_replacement

from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim, claim_of_spectrum
from search.proof.certificates.multipliers import known, rows_of, sum_prices
from search.proof.certificates.spectrum import second_moment_spectrum
from search.proof.parts import Part
from search.proof.records import Refuted
from search.trial.records import AimKind

AIMS = (AimKind.ALL_PAIRS, AimKind.OVERALL)

Kind = tuple[int, int]
"""Size of a block and number of its replicate, -1 outside."""


def derive(case: Case, multipliers: Part) -> Claim:
    """tr C² = Σ_i r_i² + b − 2 Σ_B σ_B/k_B + Σ_{B≠B'} x_BB'²/(k_B k_B').

    σ_B is the sum of r_i over the treatments of block B, and x_BB' how many treatments two blocks share.
    In every plan the meets of a block with the blocks of one replicate sum to what its treatments have
    there; with prices on these equations and on the blocks' plots the sum falls apart into one small
    minimum for each treatment and one for each pair of blocks. Any prices give a true bound.
    """
    if not case.nothing_twice:
        raise Refuted("this kind of certificate is for trials in which nothing stands twice in a block")
    known(multipliers, ("meets", "plots", "sums"))
    return claim_of_spectrum(case, second_moment_spectrum(case, least_squares(case, multipliers)))


@dataclass(frozen=True, slots=True)
class Costs:
    """What the sum is made of, but for its prices.

    Parameters
    ----------
    square : of r² of each treatment
    plot : by block size, of r of a treatment for each of its plots
    meet : by both sizes, of x² of two blocks
    blocks : by block size, of each block
    """

    square: int
    plot: Callable[[int], Fraction]
    meet: Callable[[int, int], Fraction]
    blocks: Callable[[int], int]


INFORMATION = Costs(1, lambda k: Fraction(-2, k), lambda k, other: Fraction(2, k * other), lambda k: 1)
"""tr C²"""


@dataclass(frozen=True, slots=True)
class _Prices:
    """Prices by kind of block, 0 where the certificate gives none."""

    meets: dict[Kind, dict[int, Fraction]]
    plots: dict[Kind, Fraction]


def least_squares(case: Case, multipliers: Part, costs: Costs = INFORMATION) -> Fraction:
    """A number that the sum, tr C² where nothing else is said, is not below in any plan of the trial."""
    blocks = [(int(s), int(g)) for s, g in zip(case.rules.sizes, case.rules.group, strict=True)]
    prices = _read(multipliers, blocks)
    each, total = sum_prices(multipliers, case)
    squares = sum((prices.plots[kind] * kind[0] + costs.blocks(kind[0]) for kind in blocks), -total)
    return squares + sum(_treatments(case, prices, each, blocks, costs)) + _block_pairs(prices, blocks, costs)


def _read(multipliers: Part, blocks: list[Kind]) -> _Prices:
    kinds, groups = set(blocks), {group for _, group in blocks}
    zero = Fraction(0)
    prices = _Prices({kind: dict.fromkeys(groups, zero) for kind in kinds}, dict.fromkeys(kinds, zero))
    for row in rows_of(multipliers, "meets"):
        kind, group = (row.whole("size"), row.whole("group")), row.whole("with")
        if kind not in kinds or group not in groups:
            raise Refuted(f"{row.where} prices blocks that the trial has not")
        prices.meets[kind][group] = row.ratio("price")
    for row in rows_of(multipliers, "plots"):
        kind = (row.whole("size"), row.whole("group"))
        if kind not in kinds:
            raise Refuted(f"{row.where} prices blocks that the trial has not")
        prices.plots[kind] = row.ratio("price")
    return prices


def _treatments(
    case: Case, prices: _Prices, each: list[Fraction], blocks: list[Kind], costs: Costs
) -> Iterator[Fraction]:
    """For each treatment the least of r² plus what its blocks cost, over r and the blocks it stands in."""
    of_kind = {kind: [block == kind for block in blocks] for kind in prices.plots}
    solved: dict[tuple[object, ...], Fraction] = {}
    for i in range(case.trial.t):
        low, high = case.rules.low[i], case.rules.high[i]
        room = {k: (int(low[here].sum()), int(high[here].sum())) for k, here in of_kind.items()}
        share = tuple(int(x) for x in case.rules.share[i])
        key = (tuple(room.items()), share, case.plots_of(i), each[i])
        if key not in solved:
            least, most = case.plots_of(i)
            found = [
                costs.square * r * r + each[i] * r + cost
                for r in range(least, most + 1)
                if (cost := _blocks_for(r, room, share, prices, costs)) is not None
            ]
            if not found:
                raise Refuted("the rules leave a treatment no blocks that add up")
            solved[key] = min(found)
        yield solved[key]


def _blocks_for(
    r: int, room: dict[Kind, tuple[int, int]], share: tuple[int, ...], prices: _Prices, costs: Costs
) -> Fraction | None:
    """The least cost of the blocks of a treatment with r plots, None where they cannot add up to r.

    Given r the cost of a block depends on its kind alone, so the cheapest kinds are filled first.
    """
    stands = {-1: r - sum(share)} | dict(enumerate(share))
    total = Fraction(0)
    for group, wanted in stands.items():
        kinds = sorted(
            (_cost(r, kind, stands, prices, costs), room[kind]) for kind in room if kind[1] == group
        )
        left = wanted - sum(low for _, (low, _) in kinds)
        if left < 0:
            return None
        for cost, (low, high) in kinds:
            taken = min(left, high - low)
            left -= taken
            total += (low + taken) * cost
        if left:
            return None
    return total


def _cost(r: int, kind: Kind, stands: dict[int, int], prices: _Prices, costs: Costs) -> Fraction:
    size, own = kind
    cost = r * costs.plot(size) - prices.plots[kind]
    for group, price in prices.meets[kind].items():
        cost += price * (stands[group] - (group == own))
    return cost


def _block_pairs(prices: _Prices, blocks: list[Kind], costs: Costs) -> Fraction:
    """Over all pairs of blocks the least of what x meets cost, less their prices."""
    number = Counter(blocks)
    total = Fraction(0)
    for one, other in combinations_with_replacement(sorted(number), 2):
        same = one == other
        pairs = number[one] * (number[one] - 1) // 2 if same else number[one] * number[other]
        if pairs:
            price = prices.meets[one][other[1]] + prices.meets[other][one[1]]
            square = costs.meet(one[0], other[0])
            total += pairs * min(square * x * x - price * x for x in range(min(one[0], other[0]) + 1))
    return total
