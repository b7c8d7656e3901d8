"""Second moment against controls: what the controls meet is whole, and so is what the others meet.

Statement. Let q controls (set Q) stand among t treatments, nothing twice in a block, and `w = 1/(q(t−1))`.
For `T = diag(τ_c or τ_n)`, `m ≥ max r_i/τ_i`, `Z = T⁻¹ W T⁻¹` and L = T − C the average variance is at least
`2 tr(W T⁻¹) − tr(Z C) + (1/m) Σ_j (w/τ_j) [a_n Σ_{i∉Q} L_ij² + a_c Σ_{c∈Q} L_cj² + d_j σ_j + e_j]` with
`σ_j = Σ_{c∈Q} L_cj` and the coefficients of `Squares`. That is a sum over treatments and pairs, and not below
its least over whole numbers of meetings with prices on what they add up to.

Proof. `E = T^−½ C T^−½` has its eigenvalues from 0 to m, since C ≼ R. There `p(e) = 2 − e + (1−e)²/m` is
not above 1/e, as `1 − e p(e) = (1−e)² (1 − e/m)`. `T^−½ E⁺ T^−½` is a generalised inverse of C and W 1 = 0,
so `tr(W C⁺) ≥ tr(W T^−½ p(E) T^−½) = 2 tr(W T⁻¹) − tr(Z C) + (1/m) tr(Z L T⁻¹ L)`. W is w times the
Laplacian of the graph of all comparisons, and the rows of L add up to τ_j; so the last trace is the sum
above with `a_n = q/τ_n²`, `a_c = (t+q)/τ_c²`, `d_j = −2τ_j/(τ_c τ_n)`, and `η σ_j²`, `η = (2/τ_c)(1/τ_n −
1/τ_c)`. For one control σ_j² = L_cj²; for several `σ² ≥ 2sσ − s²` where η ≥ 0, and `σ² ≤ q Σ L_cj²` where η
< 0. The plots of a single control are looked at number by number, each with multipliers of its own.

Source. Comparisons with a control: Majumdar and Notz 1983 (from memory); moment and prices: this project.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from fractions import Fraction
from typing import Any

import numpy as np

from search.efficiency.bounds.pairs import Columns, columns_of
from search.efficiency.bounds.problem import Problem, bound_on_variance, text
from search.efficiency.bounds.program import Program
from search.efficiency.records import Bound
from search.foundation.exact import near
from search.trial.records import AimKind, Trial
from search.trial.tables import Ints

NAME = "second moment against controls"
SENTENCE = (
    "A control shares a whole number of blocks with each treatment, and these with each other, so that "
    "comparisons cannot all be measured equally well."
)
TRIES = 40
"""Linear programs that are solved at most, besides one for each number of plots of the control."""
FINE = 10**9


def applies(trial: Trial) -> bool:
    """Whether treatments are compared with controls and nothing may stand twice in a block."""
    return trial.aim.kind is AimKind.AGAINST_CONTROL and not trial.rules.twice_in_block


@dataclass(frozen=True, slots=True)
class Squares:
    """The sum over treatments and pairs for one choice of T.

    Parameters
    ----------
    t, q : treatments, and controls among them
    control, other : τ_c and τ_n
    most : m
    places : s of columns of others and of controls
    """

    t: int
    q: int
    control: Fraction
    other: Fraction
    most: Fraction
    places: tuple[Fraction, Fraction]

    @property
    def weight(self) -> Fraction:
        """1 over the number of comparisons."""
        return Fraction(1, self.q * (self.t - 1))

    @property
    def _eta(self) -> Fraction:
        return 2 / self.control * (1 / self.other - 1 / self.control)

    @property
    def _others(self) -> Fraction:
        return self.q / self.other**2

    @property
    def _controls(self) -> Fraction:
        folded = self._eta * self.q if self.q == 1 or self._eta < 0 else Fraction(0)
        return (self.t + self.q) / self.control**2 + folded

    def _slope(self, tau: Fraction, place: Fraction) -> Fraction:
        tangent = 2 * self._eta * place if self.q > 1 and self._eta > 0 else Fraction(0)
        return -2 * tau / (self.control * self.other) + tangent

    @property
    def constant(self) -> Fraction:
        """What does not depend on the plan."""
        t, q, w = self.t, self.q, self.weight
        total = 2 * w * ((t - q) * q / self.other + q * (t + q - 2) / self.control)
        if q > 1 and self._eta > 0:
            for tau, count, place in ((self.other, t - q, self.places[0]), (self.control, q, self.places[1])):
                total -= w / self.most * count * self._eta * place**2 / tau
        return total

    def row(self, control: bool) -> tuple[Fraction, Fraction, Fraction]:
        """Coefficients of D², D and 1 of a treatment with the diagonal entry D in C."""
        w = self.weight
        tau = self.control if control else self.other
        of_square = (self._controls if control else self._others) * w / (self.most * tau)
        of_line = self._slope(tau, self.places[1]) * w / (self.most * tau) if control else Fraction(0)
        z = w * ((self.t + self.q - 2) if control else self.q) / tau**2
        # of_square (τ − D)² + of_line (τ − D) − z D
        return of_square, -2 * tau * of_square - of_line - z, of_square * tau**2 + of_line * tau

    def pair(self, controls: int) -> tuple[Fraction, Fraction]:
        """Coefficients of λ² and λ of a pair with so many controls in it."""
        w, m = self.weight, self.most
        if controls == 0:
            return 2 * w * self._others / (m * self.other), Fraction(0)
        if controls == 1:
            square = self._controls / self.other + self._others / self.control
            line = self._slope(self.other, self.places[0]) / self.other
            return w / m * square, w / m * line - 2 * w / (self.control * self.other)
        line = self._slope(self.control, self.places[1])
        return 2 * w / (m * self.control) * self._controls, (
            2 * w / (m * self.control) * line - 4 * w / self.control**2
        )


@dataclass(frozen=True, slots=True)
class _Prices:
    """ν by row class and size, μ by size, π by type of sum."""

    partners: list[list[Fraction]]
    plots: list[Fraction]
    sums: list[Fraction]


@dataclass(slots=True)
class _Case:
    """One number of plots of the control, or all of them: the best that is known so far."""

    columns: Columns
    plots: tuple[int, int]
    squares: Squares
    value: float = -np.inf
    prices: _Prices | None = None
    steps: tuple[float, float] = (0.06, 0.06)
    at: int = 0


def find(given: Problem) -> Bound | None:
    """The bound; None where the program is too large or is not solved."""
    trial = given.trial
    controls = np.zeros(trial.t, dtype=np.int64)
    controls[list(trial.controls)] = 1
    columns = columns_of(given, controls)
    if columns is None or not 0 < controls.sum() < trial.t:
        return None
    cases = _cases(given, columns, controls)
    for case in cases:
        if not _tried(given, case, controls, case.squares):
            return None
    for _ in range(TRIES):
        worst = min(cases, key=lambda case: case.value)
        if not _improve(given, worst, controls):
            break
    least = min(_least(given, case, controls) for case in cases)
    if least <= 0:
        return None
    return bound_on_variance(given, NAME, least, {"cases": [_multipliers(case) for case in cases]})


def _cases(given: Problem, columns: Columns, controls: Ints) -> list[_Case]:
    """For a single control each number of plots, for several all together."""
    limits = given.limits
    chosen = np.flatnonzero(controls)
    least, most = int(limits.least[chosen].min()), int(limits.most[chosen].max())
    least = max(least, 1)
    ranges = [(r, r) for r in range(least, most + 1)] if len(chosen) == 1 else [(least, most)]
    found = []
    for low, high in ranges:
        rows = []
        for row in columns.rows:
            vectors = row.vectors
            if controls[row.treatments[0]]:
                plots = vectors.sum(axis=1)
                vectors = vectors[(plots >= low) & (plots <= high)]
            rows.append(replace(row, vectors=vectors))
        if all(len(row.vectors) for row in rows):
            squares = _first(given, controls, low, high)
            found.append(_Case(replace(columns, rows=rows), (low, high), squares))
    return found


def _first(given: Problem, controls: Ints, low: int, high: int) -> Squares:
    """T with eigenvalues near 1, were all alike."""
    trial, limits = given.trial, given.limits
    t, q = trial.t, int(controls.sum())
    v, keep = t - q, 1 - trial.b / trial.n
    plots = min((low + high) / 2, trial.n / (2 * q))
    mine = (trial.n - q * plots) / v
    # every control meets the others in what it does not share with controls
    cut = plots * q * keep * max(0.3, v / (t - 1))
    other = max((trial.n - trial.b - q * plots * keep - cut / v) / max(v - 1, 1), 0.2 * mine)
    control = 1 / q / max(1 / cut - 1 / (v * other), 0.2 / cut)
    tau_c, tau_n = near(control, 1000), near(other, 1000)
    top = int(limits.most[controls == 0].max())
    # controls that a column meets, on average
    met = near(cut / v, 1000), near(control - cut / q, 1000)
    return Squares(t, q, tau_c, tau_n, _most(tau_c, tau_n, high, top), met)


def _most(control: Fraction, other: Fraction, high: int, top: int) -> Fraction:
    return max(Fraction(high) / control, Fraction(top) / other)


def _improve(given: Problem, case: _Case, controls: Ints) -> bool:
    """One step of a search for the best τ: up or down, by ever smaller steps."""
    top = int(given.limits.most[controls == 0].max())
    if max(case.steps) < 0.004:
        return False
    axis, sign = case.at % 4 // 2, 1 - 2 * (case.at % 2)
    factor = 1 + sign * case.steps[axis]
    tau = [case.squares.control, case.squares.other]
    tau[axis] = near(float(tau[axis]) * factor, 1000)
    squares = replace(
        case.squares,
        control=tau[0],
        other=tau[1],
        most=_most(tau[0], tau[1], case.plots[1], top),
    )
    before = case.value
    _tried(given, case, controls, squares)
    if case.value > before:
        return True
    case.at += 1
    if case.at % 2 == 0:
        steps = list(case.steps)
        steps[axis] /= 2.5
        case.steps = steps[0], steps[1]
    return True


# -- prices -------------------------------------------------------------------------------------


def _tried(given: Problem, case: _Case, controls: Ints, squares: Squares) -> bool:
    """Solve the program at this T and keep what is better; False where it is not solved."""
    columns, sizes = case.columns, case.columns.sizes
    program = Program()
    columns.sums.add_rows(program)
    for s, (size, number) in enumerate(zip(sizes, columns.blocks, strict=True)):
        program.equal(("plots", s), size * number)
        for c in range(len(columns.rows)):
            program.equal(("partners", c, s), 0)
    kinds = [bool(controls[row.treatments[0]]) for row in columns.rows]
    for c, rows in enumerate(columns.rows):
        program.equal(("row", c), len(rows.treatments))
        m = rows.vectors
        entries = {("row", c): 1, **columns.sums.entries(rows.memberships, m.sum(axis=1))}
        for s, size in enumerate(sizes):
            entries["plots", s] = m[:, s]
            entries["partners", c, s] = -m[:, s] * (size - 1)
        diagonal = m @ (1 - 1 / sizes)
        square, line, constant = (float(x) for x in squares.row(kinds[c]))
        program.add(square * diagonal**2 + line * diagonal + constant, entries)
    for p, pairs in enumerate(columns.pairs):
        program.equal(("pair", p), pairs.count)
        entries = {("pair", p): 1}
        for s in range(len(sizes)):
            for c in {pairs.first, pairs.second}:
                ends = (pairs.first == c) + (pairs.second == c)
                entries["partners", c, s] = pairs.vectors[:, s] * ends
        square, line = (float(x) for x in squares.pair(kinds[pairs.first] + kinds[pairs.second]))
        meetings = pairs.vectors @ (1 / sizes)
        program.add(square * meetings**2 + line * meetings, entries)
    found = program.solve()
    if found is None:
        return False
    value = found.cost + float(squares.constant)
    if value > case.value:
        price = _rounded
        case.value, case.squares = value, squares
        case.prices = _Prices(
            [[price(found.prices["partners", c, s]) for s in range(len(sizes))] for c in range(len(kinds))],
            [price(found.prices["plots", s]) for s in range(len(sizes))],
            [price(pi) for pi in columns.sums.values(found.prices)],
        )
    return True


def _rounded(x: float) -> Fraction:
    return Fraction(round(x * FINE), FINE)


# -- the exact value ----------------------------------------------------------------------------


def _least(given: Problem, case: _Case, controls: Ints) -> Fraction:
    """The Lagrangian at the prices, exactly."""
    columns, prices, squares = case.columns, case.prices, case.squares
    assert prices is not None
    sizes = columns.sizes.tolist()
    kinds = [bool(controls[row.treatments[0]]) for row in columns.rows]
    total = squares.constant - columns.sums.constant(prices.sums)
    for mu, s, b in zip(prices.plots, sizes, columns.blocks.tolist(), strict=True):
        total += mu * s * b
    for c, rows in enumerate(columns.rows):
        square, line, constant = squares.row(kinds[c])
        of_sums = columns.sums.each(rows.memberships, prices.sums)
        each = [
            nu * (s - 1) - mu + of_sums
            for nu, mu, s in zip(prices.partners[c], prices.plots, sizes, strict=True)
        ]
        costs = []
        for m in rows.vectors.tolist():
            D = sum((x * (1 - Fraction(1, s)) for x, s in zip(m, sizes, strict=True)), Fraction(0))
            costs.append(square * D * D + line * D + sum(x * y for x, y in zip(m, each, strict=True)))
        total += len(rows.treatments) * (min(costs) + constant)
    for pairs in columns.pairs:
        square, line = squares.pair(kinds[pairs.first] + kinds[pairs.second])
        ends = [
            x + y for x, y in zip(prices.partners[pairs.first], prices.partners[pairs.second], strict=True)
        ]
        costs = []
        for a in pairs.vectors.tolist():
            meetings = sum((Fraction(x, s) for x, s in zip(a, sizes, strict=True)), Fraction(0))
            priced = sum((x * y for x, y in zip(a, ends, strict=True)), Fraction(0))
            costs.append(square * meetings**2 + line * meetings - priced)
        total += pairs.count * min(costs)
    return Fraction(total)


def _multipliers(case: _Case) -> dict[str, Any]:
    prices, squares = case.prices, case.squares
    assert prices is not None
    sizes = [str(s) for s in case.columns.sizes.tolist()]
    return {
        "control_plots": list(case.plots),
        "control": text(squares.control),
        "other": text(squares.other),
        "places": [text(x) for x in squares.places],
        "rows": [
            {
                "treatments": rows.treatments.tolist(),
                "partners": {s: text(nu) for s, nu in zip(sizes, partners, strict=True)},
            }
            for rows, partners in zip(case.columns.rows, prices.partners, strict=True)
        ],
        "plots": {s: text(mu) for s, mu in zip(sizes, prices.plots, strict=True)},
        "sums": case.columns.sums.multipliers(prices.sums),
    }
