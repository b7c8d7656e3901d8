"""Normalised moment: unequal replications, told by what blocks hold and by what two blocks share.

Statement. Let nothing stand twice in a block. For `0 ≤ x₀ < 1`, `q = 1/(1−x₀)²`, `κ = 2/(1−x₀)`,
`tr C⁺ ≥ (1−1/t) Σ 1/r_i + Σ_B [q(1−2x₀) g_B/k_B + q h_B g_B/k_B² − κ h_B²/(t k_B)] + 2q Σ_{B<B'} X Y/(k k')`,
where h, g sum 1/r_i and 1/r_i² over a block, X, Y over what two blocks share. The right-hand side is not
below its least over whole numbers of treatments by replication, with prices on the counts.

Proof. `M = R^−½ N K⁻¹ N' R^−½` has the eigenvalues of a plan in [0, 1], 1 with u ∝ R^½ 1. The polynomial
`p(x) = 1 + q(1−2x₀) x + q x²` lies below 1/(1−x), since `1 − (1−x) p(x) = q x (x−x₀)²`, and below
`1 + κx` on [0, 1]. So `tr C⁺ ≥ tr P R^−½ (p(M) − p(1) uu') R^−½ P = tr R⁻¹ p(M) − (1/t) 1'R^−½ p(M) R^−½ 1`,
in which `p(M) ≼ I + κM` may take the place of the second p(M). Let y_Bc be how many treatments with c plots
block B holds, x_BB'c how many two blocks share. Then `Σ_{B'≠B} x_BB'c = (c−1) y_Bc` and `Σ_B y_Bc` is c times
the number of treatments with c plots; with prices θ and α on these the sum falls apart, block by block, pair
by pair and treatment by treatment. Treatments that never meet are counted apart from the others: of each
such set a block holds at most one.

Overall, `pdet C = (t/n) Π r_i Π (1 − x)` over the other eigenvalues x of M, since the principal minors of
I − M add up to `pdet(C) n / (t Π r_i)`. With p₀ + p₁x + p₂x² below −log(1−x) on [0, 1),
`−Σ log(1 − x) ≥ p₀(t−1) + p₁(tr M − 1) + p₂(tr M² − 1)`, where `tr M = Σ_B h_B/k_B` and
`tr M² = Σ_B h_B²/k_B² + 2 Σ_{B<B'} X²/(k k')`: a sum over treatments, blocks and pairs of the same form.

Source. This project; the moments go back to Paterson 1983 for equal replications (from memory).
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from itertools import combinations_with_replacement
from typing import Any

import numpy as np
from numpy.typing import NDArray

from search.efficiency.bounds.lattice import lattice
from search.efficiency.bounds.problem import Problem, bound_on_determinant, bound_on_variance, text
from search.efficiency.bounds.program import Program
from search.efficiency.bounds.spectral.below import Cost, stays_below
from search.efficiency.bounds.sums import Sums
from search.efficiency.records import Bound
from search.foundation.exact import exponential_above, near
from search.trial.limits import cliques
from search.trial.records import AimKind, Trial
from search.trial.tables import Ints

Floats = NDArray[np.float64]

NAME = "normalised moment"
SENTENCE = (
    "Treatments with few plots weigh more: whole numbers of them stand in each block and are shared by two "
    "blocks, so their information cannot be spread perfectly evenly."
)
MOST_CLASSES = 9
MOST_VECTORS = 4000
PLACES = 9
"""Values of x₀ that are tried on either round of the search for the best."""


def applies(trial: Trial) -> bool:
    """Whether all pairs count alike and nothing may stand twice in a block."""
    return trial.aim.kind.depends_on_eigenvalues and not trial.rules.twice_in_block


HAIR = Fraction(1, 10**9)
"""By how much a parabola stays below the curve that it touches."""

Class = tuple[int, int]
"""Part that a treatment plays (0, or the number of a kind of apart sets), and how many plots it has."""


@dataclass(frozen=True, slots=True, eq=False)
class _Layout:
    """Everything that the program chooses from.

    Parameters
    ----------
    t, sizes : treatments, and number of blocks of each size
    parts : of each part but the first the sets whose members never meet, so that a block holds one of each
    classes : that a treatment can be in
    held : for each size, what a block can hold of each class
    shared : for each two sizes, what two blocks can share of each class
    kinds : treatments by part, least, most and memberships in sums, with their number
    sums : limits on the plots of several treatments together
    """

    t: int
    sizes: dict[int, int]
    parts: list[list[tuple[int, ...]]]
    classes: list[Class]
    held: dict[int, Ints]
    shared: dict[tuple[int, int], Ints]
    kinds: dict[tuple[int, int, int, tuple[int, ...]], int]
    sums: Sums

    @property
    def plots(self) -> Floats:
        """How many plots a treatment of each class has."""
        return np.array([r for _, r in self.classes], dtype=float)

    def block_pairs(self) -> Iterator[tuple[int, int, int]]:
        """Two sizes and the number of pairs of different blocks that have them."""
        for one, other in combinations_with_replacement(sorted(self.sizes), 2):
            number = self.sizes[one]
            count = number * (number - 1) // 2 if one == other else number * self.sizes[other]
            if count:
                yield one, other, count


@dataclass(frozen=True, slots=True)
class _Prices:
    """θ by size and class, α by class, π by type of sum."""

    meets: dict[int, list[Fraction]]
    plots: list[Fraction]
    sums: list[Fraction]


@dataclass(frozen=True, slots=True)
class Variance:
    """What treatments, blocks and pairs of blocks add to tr C⁺, at x₀ = `place`.

    Parameters
    ----------
    place : x₀
    t : treatments
    """

    place: Fraction
    t: int

    constant = Fraction(0)

    @property
    def coefficients(self) -> tuple[Fraction, Fraction, Fraction]:
        """c₁, c₂ and κ."""
        q = 1 / (1 - self.place) ** 2
        return q * (1 - 2 * self.place), q, 2 / (1 - self.place)

    def of_treatment(self, r: int) -> Fraction:
        """A treatment with r plots."""
        return (1 - Fraction(1, self.t)) / r

    def of_block(self, h: Any, g: Any, size: int) -> Any:
        """A block, by its sums of 1/r and of 1/r²."""
        c1, c2, kappa = self.coefficients
        one, two, lost = c1 / size, c2 / size**2, kappa / (self.t * size)
        return _times(one, g) + _times(two, h) * g - _times(lost, h) * h

    def of_pair(self, h: Any, g: Any, one: int, other: int) -> Any:
        """Two blocks, by the sums over what they share."""
        return _times(2 * self.coefficients[1] / (one * other), h) * g

    def multipliers(self) -> dict[str, Any]:
        """As they stand in a certificate."""
        return {"place": text(self.place)}


@dataclass(frozen=True, slots=True)
class Logarithm:
    """What treatments, blocks and pairs of blocks add to `−log pdet C + log(t/n) + t log(most)`.

    Parameters
    ----------
    polynomial : p₀, p₁, p₂, below −log(1 − x)
    t, most : treatments, and the most plots that any of them can have
    """

    polynomial: tuple[Fraction, Fraction, Fraction]
    t: int
    most: int

    @classmethod
    def at(cls, place: float, t: int, most: int) -> Logarithm:
        """The parabola through 0 that touches at the place, a hair lower."""
        place = max(place, 0.01)
        height, slope = -np.log1p(-place), 1 / (1 - place)
        p2 = (slope - height / place) / place
        p1 = height / place - p2 * place
        return cls((-HAIR, near(float(p1)) - HAIR, near(float(p2)) - HAIR), t, most)

    @property
    def constant(self) -> Fraction:
        """What is left of the eigenvalue 1."""
        p0, p1, p2 = self.polynomial
        return p0 * (self.t - 1) - p1 - p2

    def of_treatment(self, r: int) -> Fraction:
        """log(most/r) from below, by the first terms of 2 artanh z, z = (most − r)/(most + r)."""
        z = Fraction(self.most - r, self.most + r)
        total = 2 * sum((z**n / n for n in range(1, 42, 2)), Fraction(0))
        return Fraction(int(total * 10**24), 10**24)

    def of_block(self, h: Any, g: Any, size: int) -> Any:
        """A block, by its sum of 1/r."""
        return _times(self.polynomial[1] / size, h) + _times(self.polynomial[2] / size**2, h) * h

    def of_pair(self, h: Any, g: Any, one: int, other: int) -> Any:
        """Two blocks, by the sum over what they share."""
        return _times(2 * self.polynomial[2] / (one * other), h) * h

    def multipliers(self) -> dict[str, Any]:
        """As they stand in a certificate."""
        return {"polynomial": [text(c) for c in self.polynomial]}


def _times(c: Fraction, x: Any) -> Any:
    """A product, in floats where x is an array of them."""
    return (float(c) if isinstance(x, np.ndarray) else c) * x


Form = Variance | Logarithm


def find(given: Problem) -> Bound | None:
    """The bound at the best place that is found; None where there is too much to choose from."""
    layout = _layout(given)
    if layout is None:
        return None
    best: tuple[float, float, _Prices | None] = (-np.inf, 0.0, None)
    low, high = 0.0, 0.9
    for _ in range(2):
        for place in np.linspace(low, high, PLACES).tolist():
            found = _prices(layout, _form(given, place))
            if found is not None and found[0] > best[0]:
                best = found[0], place, found[1]
        step = (high - low) / (PLACES - 1)
        low, high = max(0.0, best[1] - step), min(0.95, best[1] + step)
    if best[2] is None:
        return None
    form, prices = _form(given, best[1]), best[2]
    least = _least(layout, form, prices)
    multipliers = {
        **form.multipliers(),
        "parts": [
            {"apart": [{"treatments": list(members)} for members in sets], **_by_plots(layout, part, prices)}
            for part, sets in enumerate(layout.parts)
        ],
        "sums": layout.sums.multipliers(prices.sums),
    }
    if least <= 0:
        return None
    if isinstance(form, Variance):
        return bound_on_variance(given, NAME, 2 * least / given.m, multipliers)
    piece = Fraction(0), Fraction(1), Fraction(0)
    if not stays_below(form.polynomial, Cost.LOGARITHM, [piece]):
        return None
    greatest = exponential_above(-least) * Fraction(given.trial.t, given.trial.n) * form.most**form.t
    return bound_on_determinant(given, NAME, greatest, multipliers)


def _form(given: Problem, place: float) -> Form:
    if given.trial.aim.kind is AimKind.OVERALL:
        return Logarithm.at(place, given.trial.t, given.cap)
    return Variance(near(place, 10**6), given.trial.t)


def _by_plots(layout: _Layout, part: int, prices: _Prices) -> dict[str, Any]:
    places = [(at, r) for at, (own, r) in enumerate(layout.classes) if own == part]
    return {
        "meets": {
            str(size): {str(r): text(theta[at]) for at, r in places} for size, theta in prices.meets.items()
        },
        "plots": {str(r): text(prices.plots[at]) for at, r in places},
    }


def _layout(given: Problem) -> _Layout | None:
    limits, rules = given.limits, given.rules
    if (rules.high > 1).any():
        return None
    ranges = list(zip(np.maximum(limits.least, 1).tolist(), limits.most.tolist(), strict=True))
    parts = _parts(rules.apart, ranges)
    part_of = {i: part for part, sets in enumerate(parts) for members in sets for i in members}
    own = [part_of.get(i, 0) for i in range(rules.t)]
    able = Counter((own[i], r) for i, (low, high) in enumerate(ranges) for r in range(low, high + 1))
    classes, sizes, sums = sorted(able), Counter(rules.sizes.tolist()), Sums.of(given)
    if len(classes) > MOST_CLASSES:
        return None

    def vectors(fewest: int, most: int) -> Ints | None:
        room = np.array([min(able[c], len(parts[c[0]]) or most) for c in classes])
        found = lattice(np.zeros_like(room), room, fewest, most, MOST_VECTORS)
        for part, sets in enumerate(parts):
            if found is not None and sets:
                inside = [at for at, c in enumerate(classes) if c[0] == part]
                found = found[found[:, inside].sum(axis=1) <= len(sets)]
        return found

    held = {size: vectors(size, size) for size in sizes}
    shared = {pair: vectors(0, pair[0]) for pair in combinations_with_replacement(sorted(sizes), 2)}
    if any(found is None or not len(found) for found in (*held.values(), *shared.values())):
        return None
    rows = sums.memberships.tolist()
    return _Layout(
        rules.t,
        dict(sizes),
        parts,
        classes,
        {size: found for size, found in held.items() if found is not None},
        {pair: found for pair, found in shared.items() if found is not None},
        dict(Counter((own[i], *ranges[i], tuple(rows[i])) for i in range(rules.t))),
        sums,
    )


def _parts(apart: Any, ranges: list[tuple[int, int]]) -> list[list[tuple[int, ...]]]:
    """Disjoint sets of treatments that never meet, alike ones together; the first part has none."""
    kinds: dict[Any, list[tuple[int, ...]]] = {}
    used: set[int] = set()
    for members in sorted(cliques(apart), key=len, reverse=True):
        if used.isdisjoint(members):
            used.update(members)
            kinds.setdefault(tuple(sorted(ranges[i] for i in members)), []).append(members)
    return [[], *kinds.values()]


def _prices(layout: _Layout, form: Form) -> tuple[float, _Prices] | None:
    """The value of the linear program, and its prices."""
    classes = layout.plots
    program = Program()
    layout.sums.add_rows(program)
    for c in layout.classes:
        program.equal(("plots", c), 0)
        for size in layout.sizes:
            program.equal(("meets", size, c), 0)
    for kind, number in layout.kinds.items():
        part, least, most, memberships = kind
        program.equal(("kind", kind), number)
        for r in range(least, most + 1):
            entries = {("kind", kind): 1, ("plots", (part, r)): -r, **layout.sums.entries(memberships, r)}
            program.add([float(form.of_treatment(r))], entries)
    for size, number in layout.sizes.items():
        y = layout.held[size].astype(float)
        h, g = y @ (1 / classes), y @ (1 / classes**2)
        program.equal(("size", size), number)
        rows: dict[Any, Any] = {("size", size): 1}
        for at, c in enumerate(layout.classes):
            rows["plots", c] = y[:, at]
            rows["meets", size, c] = -(c[1] - 1) * y[:, at]
        program.add(form.of_block(h, g, size), rows)
    for one, other, count in layout.block_pairs():
        x = layout.shared[one, other].astype(float)
        program.equal(("pair", one, other), count)
        rows = {("pair", one, other): 1}
        for at, c in enumerate(layout.classes):
            rows["meets", one, c] = x[:, at] * (2 if one == other else 1)
            if one != other:
                rows["meets", other, c] = x[:, at]
        program.add(form.of_pair(x @ (1 / classes), x @ (1 / classes**2), one, other), rows)
    found = program.solve()
    if found is None:
        return None
    return found.cost + float(form.constant), _Prices(
        {size: [near(-found.prices["meets", size, c]) for c in layout.classes] for size in layout.sizes},
        [near(-found.prices["plots", c]) for c in layout.classes],
        [near(pi) for pi in layout.sums.values(found.prices)],
    )


def _least(layout: _Layout, form: Form, prices: _Prices) -> Fraction:
    """The Lagrangian at the prices, exactly."""
    plots = dict(zip(layout.classes, prices.plots, strict=True))
    total = form.constant - layout.sums.constant(prices.sums)
    for (part, least, most, memberships), number in layout.kinds.items():
        each = layout.sums.each(memberships, prices.sums)
        total += number * min(
            form.of_treatment(r) + (each - plots[part, r]) * r for r in range(least, most + 1)
        )
    for size, number in layout.sizes.items():
        theta = prices.meets[size]
        costs = []
        for y, h, g in _weighed(layout, layout.held[size]):
            cost = form.of_block(h, g, size)
            for (_, r), many, alpha, price in zip(layout.classes, y, prices.plots, theta, strict=True):
                cost += many * (alpha - (r - 1) * price)
            costs.append(cost)
        total += number * min(costs)
    for one, other, count in layout.block_pairs():
        theta = [a + b for a, b in zip(prices.meets[one], prices.meets[other], strict=True)]
        total += count * min(
            form.of_pair(h, g, one, other) + sum((p * m for p, m in zip(theta, x, strict=True)), Fraction(0))
            for x, h, g in _weighed(layout, layout.shared[one, other])
        )
    return total


def _weighed(layout: _Layout, vectors: Ints) -> Iterator[tuple[list[int], Fraction, Fraction]]:
    """Each vector with its sums of 1/c and of 1/c²."""
    for vector in vectors.tolist():
        h = sum((Fraction(many, r) for many, (_, r) in zip(vector, layout.classes, strict=True)), Fraction(0))
        g = sum(
            (Fraction(many, r * r) for many, (_, r) in zip(vector, layout.classes, strict=True)), Fraction(0)
        )
        yield vector, h, g
