"""Kind "normalised moment": unequal replications, through what blocks hold and two blocks share."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from itertools import combinations_with_replacement

from search.proof.certificates.case import Case
from search.proof.certificates.claims import (
    Claim,
    claim_of_determinant,
    claim_of_variance,
    exponential_above,
)
from search.proof.certificates.multipliers import known, rows_of, sum_prices, treatments_of
from search.proof.certificates.spectral.cost import logarithm_stays_above
from search.proof.parts import Part, ratio
from search.proof.records import Refuted
from search.trial.records import AimKind

AIMS = (AimKind.ALL_PAIRS, AimKind.OVERALL)
MOST_VECTORS = 20_000
FINE = 10**40


def derive(case: Case, multipliers: Part) -> Claim:
    """A function of M = R^−½ N K⁻¹ N' R^−½ from below by a parabola p of it.

    All of it is then a sum over treatments, blocks and pairs of blocks; prices on the numbers of treatments
    by replication that blocks hold and share let each of them be as cheap as it can.
    """
    if not case.nothing_twice:
        raise Refuted("this kind of certificate is for trials in which nothing stands twice in a block")
    if case.aim is AimKind.OVERALL:
        return _overall(case, multipliers)
    known(multipliers, ("place", "parts", "sums"))
    place = multipliers.ratio("place")
    if not 0 <= place < 1:
        raise Refuted(f"{multipliers.at('place')} must lie from 0 to below 1")
    least = _least(case, multipliers, _Variance(case.trial.t, place))
    return claim_of_variance(case, 2 * least / case.rank)


def _overall(case: Case, multipliers: Part) -> Claim:
    """pdet C = (t/n) Π r Π (1 − x), for the principal minors of I − M of t − 1 rows add up to Π (1 − x)."""
    known(multipliers, ("polynomial", "parts", "sums"))
    p = [ratio(multipliers.at("polynomial"), x) for x in multipliers.items("polynomial")]
    if len(p) != 3 or not logarithm_stays_above(p, Fraction(0), Fraction(1), Fraction(0)):
        raise Refuted(f"{multipliers.at('polynomial')} must have three numbers and stay below −log(1 − x)")
    form = _Logarithm(max(case.most), p[1], p[2])
    least = _least(case, multipliers, form) + p[0] * case.rank - p[1] - p[2]
    greatest = exponential_above(-least) * form.most**case.trial.t
    return claim_of_determinant(case, greatest * Fraction(case.trial.t, case.trial.n))


@dataclass(frozen=True, slots=True)
class _Variance:
    """tr C⁺ through p(x) = 1 + q(1−2x₀)x + qx², which 1/(1−x) exceeds by qx(x−x₀)²/(1−x).

    tr C⁺ ≥ tr R⁻¹p(M) − w'p(M)w/t, w = R^−½1, and p(M) ≼ I + κM there, κ = p(1) − 1.
    """

    t: int
    place: Fraction

    @property
    def square(self) -> Fraction:
        return 1 / (1 - self.place) ** 2

    def treatment(self, r: int) -> Fraction:
        return Fraction(self.t - 1, self.t * r)

    def block(self, first: Fraction, second: Fraction, size: int) -> Fraction:
        linear, over = self.square * (1 - 2 * self.place), 2 / (1 - self.place)
        cost = linear * second / size + self.square * first * second / size**2
        return cost - over * first**2 / (self.t * size)

    def pair(self, first: Fraction, second: Fraction, one: int, other: int) -> Fraction:
        return 2 * self.square * first * second / (one * other)


@dataclass(frozen=True, slots=True)
class _Logarithm:
    """log(most/r) over treatments, and p₁ tr M + p₂ tr M²."""

    most: int
    linear: Fraction
    square: Fraction

    def treatment(self, r: int) -> Fraction:
        # −log(1 − y) = y + y²/2 + ..., y = 1 − r/most, cut off from below
        y, power, total = 1 - Fraction(r, self.most), Fraction(1), Fraction(0)
        for n in range(1, 400):
            power = Fraction(int(power * y * FINE), FINE)
            total += power / n
            if power == 0:
                break
        return Fraction(int(total * FINE), FINE)

    def block(self, first: Fraction, second: Fraction, size: int) -> Fraction:
        return self.linear * first / size + self.square * first**2 / size**2

    def pair(self, first: Fraction, second: Fraction, one: int, other: int) -> Fraction:
        return 2 * self.square * first**2 / (one * other)


def _least(case: Case, multipliers: Part, form: _Variance | _Logarithm) -> Fraction:
    parts = _Parts.of(case, multipliers)
    numbers = Counter(int(size) for size in case.rules.sizes)
    each, total = sum_prices(multipliers, case)
    least = -total
    for i, part in enumerate(parts.of_treatment):
        low, high = max(1, case.least[i]), case.most[i]
        if low > high:
            raise Refuted("the rules leave a treatment no number of plots")
        least += min(form.treatment(r) + (each[i] - parts.plots[part, r]) * r for r in range(low, high + 1))
    for size, number in numbers.items():
        costs = []
        for held, first, second in parts.vectors(size, size):
            cost = form.block(first, second, size)
            for c, many in held.items():
                cost += many * (parts.plots[c] - (c[1] - 1) * parts.meets[size][c])
            costs.append(cost)
        least += number * _cheapest(costs)
    for one, other in combinations_with_replacement(sorted(numbers), 2):
        pairs = numbers[one] * (numbers[one] - 1) // 2 if one == other else numbers[one] * numbers[other]
        if pairs:
            costs = []
            for shared, first, second in parts.vectors(0, min(one, other)):
                cost = form.pair(first, second, one, other)
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
