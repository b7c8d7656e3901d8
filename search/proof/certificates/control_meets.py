"""Kind "second moment against controls": whole numbers of meetings with and without a control."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim, claim_of_variance
from search.proof.certificates.lattice import Coordinate, least_cost
from search.proof.certificates.multipliers import (
    Partners,
    known,
    partner_prices,
    prices_by_size,
    rows_of,
    sum_prices,
)
from search.proof.parts import Part, listed, ratio, whole
from search.proof.records import Refuted
from search.trial.records import AimKind

AIMS = (AimKind.AGAINST_CONTROL,)
MOST_CASES = 60
KEYS = ("control_plots", "control", "other", "places", "rows", "plots", "sums")


def derive(case: Case, multipliers: Part) -> Claim:
    """The least over the numbers of plots that controls can have, each with multipliers of its own.

    With T diagonal, L = T − C and E = T^−½CT^−½ of eigenvalues up to m, 1/e ≥ 2 − e + (1−e)²/m makes
    tr(WC⁺) ≥ Σ over comparisons of g'T⁻¹(2T − C + L T⁻¹L/m)T⁻¹g, a sum over treatments and pairs.
    """
    if not case.nothing_twice:
        raise Refuted("this kind of certificate is for trials in which nothing stands twice in a block")
    known(multipliers, ("cases",))
    controls = case.trial.controls
    if not 0 < len(controls) < case.trial.t:
        raise Refuted("this kind of certificate is for some controls among other treatments")
    rows = list(rows_of(multipliers, "cases"))
    if len(rows) > MOST_CASES:
        raise Refuted(f"{multipliers.at('cases')} has more cases than can be checked")
    ranges = [_range(row) for row in rows]
    least, most = min(case.least[c] for c in controls), max(case.most[c] for c in controls)
    if len(controls) == 1:
        (c,) = controls
        for r in range(max(1, least), most + 1):
            if not any(low <= r <= high for low, high in ranges) and _can_have(case, c, r):
                raise Refuted(f"{multipliers.at('cases')} leaves out {r} plots of the control")
    elif not any(low <= max(1, least) and most <= high for low, high in ranges):
        raise Refuted(f"{multipliers.at('cases')} must have one for all numbers of plots of the controls")
    values = [_value(case, row, ends) for row, ends in zip(rows, ranges, strict=True)]
    if not values:
        raise Refuted(f"{multipliers.at('cases')} has none")
    return claim_of_variance(case, min(values))


def _range(row: Part) -> tuple[int, int]:
    ends = [whole(row.at("control_plots"), x) for x in row.items("control_plots")]
    if len(ends) != 2:
        raise Refuted(f"{row.at('control_plots')} must have two numbers")
    return ends[0], ends[1]


def _can_have(case: Case, c: int, r: int) -> bool:
    return bool(case.rules.low[c].sum() <= r <= case.rules.high[c].sum())


@dataclass(frozen=True, slots=True)
class _Quadratic:
    """square·x² + line·x + constant."""

    square: Fraction
    line: Fraction
    constant: Fraction = Fraction(0)


@dataclass(frozen=True, slots=True)
class _Form:
    """Σ over comparisons (c, l), for one T, as a function of the entries of C.

    Parameters
    ----------
    t, q : treatments and controls
    control, other : what T has on its diagonal
    most : m
    places : where the square of what all controls have in a column is replaced by its tangent, in columns
        of other treatments and of controls
    """

    t: int
    q: int
    control: Fraction
    other: Fraction
    most: Fraction
    places: tuple[Fraction, Fraction]

    @property
    def each(self) -> Fraction:
        """Weight of a comparison."""
        return Fraction(1, self.q * (self.t - 1))

    @property
    def start(self) -> Fraction:
        """2 tr(WT⁻¹), and the constants of tangents."""
        per_control = (self.t - 1) * (1 / self.control) + (self.t - self.q) / self.other
        total = 2 * self.each * self.q * (per_control + (self.q - 1) / self.control)
        for tau, number, place in (
            (self.other, self.t - self.q, self.places[0]),
            (self.control, self.q, self.places[1]),
        ):
            total += self.each / (self.most * tau) * number * self._column(tau, place)[2]
        return total

    def _column(self, tau: Fraction, place: Fraction) -> tuple[Fraction, Fraction, Fraction]:
        """Of Σ over comparisons (L_c/τ_c − L_l/τ_l)² in a column that adds up to tau: what an entry of a
        control costs by its square and by itself, and a constant.

        A control stands in t + q − 2 comparisons. The cross terms are −2 Σ_c (L_c/τ_c)(U − L_c/τ_c) with
        U = tau/τ_n + σ(1/τ_c − 1/τ_n), σ the sum of the entries of all controls.
        """
        square = (self.t + self.q - 2) / self.control**2 + 2 / self.control**2
        line = -2 * tau / (self.control * self.other)
        of_sum = -2 / self.control * (1 / self.control - 1 / self.other)
        if self.q == 1:
            return square + of_sum, line, Fraction(0)
        if of_sum < 0:
            return square + self.q * of_sum, line, Fraction(0)
        return square, line + 2 * of_sum * place, -of_sum * place**2

    def diagonal(self, is_control: bool) -> _Quadratic:
        """As a function of C_ii, where L_ii = τ_i − C_ii."""
        tau = self.control if is_control else self.other
        comparisons = self.t + self.q - 2 if is_control else self.q
        factor = self.each / (self.most * tau)
        square, line = self.q / self.other**2, Fraction(0)
        if is_control:
            square, line, _ = self._column(tau, self.places[1])
        return _Quadratic(
            factor * square,
            -factor * (2 * tau * square + line) - self.each * comparisons / tau**2,
            factor * (square * tau**2 + line * tau),
        )

    def between(self, controls: int) -> _Quadratic:
        """As a function of −C_ij for a pair with so many controls in it; both columns count."""
        of_other = _Quadratic(self.q / self.other**2, Fraction(0))
        in_other = _Quadratic(*self._column(self.other, self.places[0])[:2])
        in_control = _Quadratic(*self._column(self.control, self.places[1])[:2])
        over_other, over_control = (self.each / (self.most * tau) for tau in (self.other, self.control))
        if controls == 0:
            return _Quadratic(2 * over_other * of_other.square, Fraction(0))
        if controls == 1:
            # the control's entry in the other's column, and the other's entry in the control's
            return _Quadratic(
                over_other * in_other.square + over_control * of_other.square,
                over_other * in_other.line - 2 * self.each / (self.control * self.other),
            )
        return _Quadratic(
            2 * over_control * in_control.square,
            2 * over_control * in_control.line - 4 * self.each / self.control**2,
        )


def _value(case: Case, row: Part, ends: tuple[int, int]) -> Fraction:
    """What the average variance is not below where every control has so many plots."""
    known(row, KEYS)
    form = _form(case, row, ends)
    numbers = Counter(int(size) for size in case.rules.sizes)
    plots, partners = prices_by_size(row, "plots", case), partner_prices(row, case)
    each, total = sum_prices(row, case)
    least = form.start - total + sum((plots[s] * s * b for s, b in numbers.items()), Fraction(0))
    least += sum(_treatments(case, form, plots, partners, each, ends))
    return least + sum(_pairs(case, form, partners))


def _form(case: Case, row: Part, ends: tuple[int, int]) -> _Form:
    control, other = row.ratio("control"), row.ratio("other")
    places = [ratio(row.at("places"), x) for x in listed(row.at("places"), row.value("places"))]
    if control <= 0 or other <= 0 or len(places) != 2:
        raise Refuted(f"{row.where} must have two numbers above 0 for T, and two places")
    chosen = case.trial.controls
    plots = max(min(ends[1], case.most[c]) for c in chosen)
    others = max(case.most[i] for i in range(case.trial.t) if i not in chosen)
    # C ≼ R, so that no eigenvalue of E is above the greatest r/τ
    most = max(Fraction(plots) / control, Fraction(others) / other)
    if most <= 0:
        raise Refuted(f"{row.at('control_plots')} leaves the controls no plots")
    return _Form(case.trial.t, len(chosen), control, other, most, (places[0], places[1]))


def _treatments(
    case: Case,
    form: _Form,
    plots: dict[int, Fraction],
    partners: Partners,
    each: list[Fraction],
    ends: tuple[int, int],
) -> Iterator[Fraction]:
    rules, controls = case.rules, set(case.trial.controls)
    for i, row in enumerate(partners.row_of):
        cost = form.diagonal(i in controls)
        fewest, most = case.plots_of(i)
        if i in controls:
            fewest, most = max(fewest, ends[0]), min(most, ends[1])
        blocks = [
            Coordinate(
                value=1 - Fraction(1, s),
                cost=partners.rows[row][s] * (s - 1) - price + each[i] + cost.line * (1 - Fraction(1, s)),
                low=int(rules.low[i, rules.sizes == s].sum()),
                high=int(rules.high[i, rules.sizes == s].sum()),
            )
            for s, price in plots.items()
        ]
        yield cost.constant + _found(least_cost(blocks, cost.square, fewest, most))


def _pairs(case: Case, form: _Form, partners: Partners) -> Iterator[Fraction]:
    """Pairs that may meet; those alike together."""
    rules, sizes = case.rules, list(partners.rows[0])
    is_control = np.zeros(case.trial.t, dtype=np.int64)
    is_control[list(case.trial.controls)] = 1
    i, j = np.nonzero(np.triu(~rules.apart, 1))
    most = np.minimum(rules.meet_most, np.minimum.outer(case.implied.most, case.implied.most))
    one, other = partners.row_of[i], partners.row_of[j]
    columns = [np.minimum(one, other), np.maximum(one, other), is_control[i] + is_control[j]]
    columns += [rules.meet_least[i, j], most[i, j]]
    for s in sizes:
        low, high = rules.low[:, rules.sizes == s], rules.high[:, rules.sizes == s]
        columns += [(low @ low.T)[i, j], (high @ high.T)[i, j]]
    kinds, numbers = np.unique(np.stack(columns, axis=1), axis=0, return_counts=True)
    for kind, number in zip(kinds.tolist(), numbers.tolist(), strict=True):
        first, second, controls, fewest, greatest, *ranges = kind
        cost = form.between(controls)
        blocks = [
            Coordinate(
                Fraction(1, s),
                cost.line / s - partners.rows[first][s] - partners.rows[second][s],
                low,
                high,
            )
            for s, low, high in zip(sizes, ranges[::2], ranges[1::2], strict=True)
        ]
        yield number * _found(least_cost(blocks, cost.square, fewest, greatest))


def _found(cost: Fraction | None) -> Fraction:
    if cost is None:
        raise Refuted("the rules leave a treatment or a pair no blocks that add up")
    return cost
