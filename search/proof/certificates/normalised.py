"""Kind "normalised moment": unequal replications, through what blocks hold and two blocks share."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from itertools import combinations_with_replacement

from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim, claim_of_variance
from search.proof.certificates.multipliers import known, rows_of, sum_prices, treatments_of
from search.proof.parts import Part
from search.proof.records import Refuted
from search.trial.records import AimKind

AIMS = (AimKind.ALL_PAIRS,)
MOST_VECTORS = 20_000


def derive(case: Case, multipliers: Part) -> Claim:
    """tr C⁺ through p(x) = 1 + q(1−2x₀)x + qx², which 1/(1−x) exceeds by qx(x−x₀)²/(1−x).

    With M = R^−½ N K⁻¹ N' R^−½: tr C⁺ ≥ tr R⁻¹p(M) − w'p(M)w/t, w = R^−½1, and p(M) ≼ I + κM there,
    κ = p(1) − 1. All of it is a sum over treatments, blocks and pairs of blocks; prices on the numbers of
    treatments by replication that blocks hold and share let each of them be as cheap as it can.
    """
    if not case.nothing_twice:
        raise Refuted("this kind of certificate is for trials in which nothing stands twice in a block")
    known(multipliers, ("place", "parts", "sums"))
    place = multipliers.ratio("place")
    if not 0 <= place < 1:
        raise Refuted(f"{multipliers.at('place')} must lie from 0 to below 1")
    return claim_of_variance(case, 2 * _trace_of_inverse(case, multipliers, place) / case.rank)


def _trace_of_inverse(case: Case, multipliers: Part, place: Fraction) -> Fraction:
    parts = _Parts.of(case, multipliers)
    square = 1 / (1 - place) ** 2
    linear, over = square * (1 - 2 * place), 2 / (1 - place)
    t, numbers = case.trial.t, Counter(int(size) for size in case.rules.sizes)
    each, total = sum_prices(multipliers, case)
    least = -total
    for i, part in enumerate(parts.of_treatment):
        low, high = max(1, case.least[i]), case.most[i]
        if low > high:
            raise Refuted("the rules leave a treatment no number of plots")
        least += min(
            Fraction(t - 1, t * r) + (each[i] - parts.plots[part, r]) * r for r in range(low, high + 1)
        )
    for size, number in numbers.items():
        costs = []
        for held, first, second in parts.vectors(size, size):
            cost = linear * second / size + square * first * second / size**2 - over * first**2 / (t * size)
            for c, many in held.items():
                cost += many * (parts.plots[c] - (c[1] - 1) * parts.meets[size][c])
            costs.append(cost)
        least += number * _cheapest(costs)
    for one, other in combinations_with_replacement(sorted(numbers), 2):
        pairs = numbers[one] * (numbers[one] - 1) // 2 if one == other else numbers[one] * numbers[other]
        if pairs:
            costs = []
            for shared, first, second in parts.vectors(0, min(one, other)):
                cost = 2 * square * first * second / (one * other)
                for c, many in shared.items():
                    cost += many * (parts.meets[one][c] + parts.meets[other][c])
                costs.append(cost)
            least += pairs * _cheapest(costs)
    return least


Class = tuple[int, int]
"""Number of a part, and number of plots."""


@dataclass(frozen=True, slots=True)
class _Parts:
    """Treatments sorted into parts, and prices by part and number of plots.

    Parameters
    ----------
    of_treatment : part of each treatment
    sets : for each part its number of sets of which a block holds one member at most; 0 for no limit
    room : how many treatments of a part can have a number of plots
    plots, meets : prices, those of meets by block size
    """

    of_treatment: list[int]
    sets: list[int]
    room: dict[Class, int]
    plots: dict[Class, Fraction]
    meets: dict[int, dict[Class, Fraction]]

    @classmethod
    def of(cls, case: Case, multipliers: Part) -> _Parts:
        given = list(rows_of(multipliers, "parts"))
        if not given:
            raise Refuted(f"{multipliers.at('parts')} must have at least one part")
        of_treatment, sets = _sorted_into(case, given)
        room: Counter[Class] = Counter()
        for i, number in enumerate(of_treatment):
            room.update((number, r) for r in range(max(1, case.least[i]), case.most[i] + 1))
        plots: dict[Class, Fraction] = {}
        sizes = {str(size): int(size) for size in case.rules.sizes}
        meets: dict[int, dict[Class, Fraction]] = {size: {} for size in sizes.values()}
        for number, part in enumerate(given):
            own = [c for c in room if c[0] == number]
            plots |= _by_plots(part.part("plots"), own)
            by_size = part.part("meets")
            if by_size.content.keys() != sizes.keys():
                raise Refuted(
                    f"{by_size.where} must have prices for each block size of the trial and no other"
                )
            for name, size in sizes.items():
                meets[size] |= _by_plots(by_size.part(name), own)
        return cls(of_treatment, sets, dict(room), plots, meets)

    def vectors(self, fewest: int, most: int) -> Iterator[tuple[dict[Class, int], Fraction, Fraction]]:
        """How many treatments of each class, from `fewest` to `most` in all; their Σ 1/r and Σ 1/r²."""
        found: list[tuple[dict[Class, int], Fraction, Fraction]] = [({}, Fraction(0), Fraction(0))]
        for c, able in self.room.items():
            part, r = c
            grown = []
            for held, first, second in found:
                left = most - sum(held.values())
                if self.sets[part]:
                    left = min(left, self.sets[part] - sum(m for d, m in held.items() if d[0] == part))
                for many in range(min(able, left) + 1):
                    grown.append(
                        ({**held, c: many}, first + Fraction(many, r), second + Fraction(many, r * r))
                    )
            found = grown
            if len(found) > MOST_VECTORS:
                raise Refuted("the trial has too many numbers of plots for its certificate to be checked")
        return (vector for vector in found if sum(vector[0].values()) >= fewest)


def _sorted_into(case: Case, given: list[Part]) -> tuple[list[int], list[int]]:
    """The part of each treatment, and the number of sets that never meet in each part."""
    of_treatment, sets = [0] * case.trial.t, []
    for number, part in enumerate(given):
        groups = [treatments_of(row, case) for row in rows_of(part, "apart")]
        sets.append(len(groups))
        if bool(groups) != (number > 0):
            raise Refuted(f"{part.where} must have sets that never meet, but for the first part")
        for group in groups:
            for i in group:
                if of_treatment[i]:
                    raise Refuted(f"{part.where} names a treatment that has a part already")
                of_treatment[i] = number
            if any(i != j and not case.rules.apart[i, j] for i in group for j in group):
                raise Refuted(f"{part.where} has a set of treatments that may meet")
    return of_treatment, sets


def _by_plots(part: Part, classes: list[Class]) -> dict[Class, Fraction]:
    names = {str(c[1]): c for c in classes}
    for name in part.content:
        if name not in names:
            raise Refuted(f"{part.where} prices a number of plots that no treatment has")
    return {c: part.ratio(name) if part.has(name) else Fraction(0) for name, c in names.items()}


def _cheapest(costs: list[Fraction]) -> Fraction:
    if not costs:
        raise Refuted("the rules leave a block nothing to hold")
    return min(costs)
