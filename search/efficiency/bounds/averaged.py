"""Averaged information: treatments that the aim treats alike may be averaged over.

Statement. Let the parts be the treatments that the aim treats alike, W the matrix of the aim, V any
symmetric matrix that treats each part alike, and `Z = V W V`. For every connected plan `tr(W C⁺) ≥ 2 tr(W
V) − G`, `G = Σ_B max_m [f_B(m) − Σ_P α_gP m_P] + Σ_i max_r (α_P r_out − π_i r) + Σ α share + Σ π most`,
`f_B(m) = Σ_P z_PP m_P − (Σ_PQ ζ_PQ m_P m_Q + Σ_P ω_P s_P(m_P)) / k_B`, m_P the plots of part P in block B.

Proof. `tr W (C^{+½} − V C^½)(C^{+½} − C^½ V) ≥ 0`, and `W C^½ C^{+½} = W` where the plan is connected:
hence `tr(W C⁺) ≥ 2 tr(W V) − tr(Z C)`, a tangent of a convex function (as in Kiefer 1974). Z has the entry
ζ_PQ for treatments of P and Q, and ω_P more on the diagonal; so `tr Z C = Σ_B f_B(m)` but for `Σ_{i∈P}
n_iB² ≥ s_P(m_P)`, the least where m_P plots are spread evenly. In every plan the plots of a part add up to
the replications of its members, in each replicate g to what these have there; with prices α of any sign,
and π ≥ 0 on limits of sums, each block and each treatment is taken at its best alone.

Source. Averaging over what is alike: Majumdar and Notz 1983 for comparisons with a control (from memory).
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import lcm
from typing import Any

import numpy as np
from numpy.typing import NDArray

from search.efficiency.aims import contrast_rows, exact_weights
from search.efficiency.bounds.lattice import lattice
from search.efficiency.bounds.problem import Problem, bound_on_variance, text
from search.efficiency.bounds.program import Program, Solution
from search.efficiency.bounds.sums import Sums
from search.efficiency.one_thread import one_thread
from search.efficiency.records import Bound
from search.efficiency.reference import reference_variance
from search.trial.records import AimKind, Trial
from search.trial.tables import Ints

Floats = NDArray[np.float64]

NAME = "averaged information"
SENTENCE = (
    "Treatments that the aim treats alike can only lose by being treated unlike, and each block holds whole "
    "numbers of each kind."
)
MOST_HELD = 8000
"""Ways to fill a block, over all kinds of blocks; a trial with more is not tried."""
ROUNDS = 40
ENOUGH = 1e-4
"""Rounds end where a better tangent could bring less than this part of the value."""
FINE = 10**9


def applies(trial: Trial) -> bool:
    """Whether the aim weighs comparisons unequally."""
    return trial.aim.kind in (AimKind.AGAINST_CONTROL, AimKind.CONTRASTS)


def parts_of(trial: Trial) -> list[list[int]]:
    """The treatments that the aim treats alike."""
    if trial.aim.kind is AimKind.AGAINST_CONTROL:
        keys: list[Any] = [treatment.control for treatment in trial.treatments]
    else:
        keys = list(zip(*contrast_rows(trial), strict=True))
    parts: dict[Any, list[int]] = {}
    for i, key in enumerate(keys):
        parts.setdefault(key, []).append(i)
    return list(parts.values())


@dataclass(frozen=True, slots=True, eq=False)
class _Blocks:
    """Blocks that can be filled alike.

    Parameters
    ----------
    size, group, count : plots, replicate (−1 outside all), and how many such blocks there are
    held : all that one can hold, plots by part
    squares : for each of them the least sum of squared numbers of plots within each part
    """

    size: int
    group: int
    count: int
    held: Ints
    squares: Ints


@dataclass(frozen=True, slots=True, eq=False)
class _Layout:
    """Everything that the program chooses from.

    Parameters
    ----------
    parts : their members
    blocks : by what they can hold
    groups : replicates with blocks, −1 for what lies outside all
    share : (groups, parts) plots of each part in each replicate
    kinds : treatments by part, least and most plots outside replicates and in all, memberships in sums
    sums : limits on the plots of several treatments together
    """

    parts: list[list[int]]
    blocks: list[_Blocks]
    groups: list[int]
    share: dict[tuple[int, int], int]
    kinds: dict[tuple[int, int, int, int, tuple[int, ...]], int]
    sums: Sums

    @property
    def sizes(self) -> Floats:
        """Members of each part."""
        return np.array([len(part) for part in self.parts], dtype=float)


@dataclass(frozen=True, slots=True)
class _Prices:
    """α by replicate and part, π by type of sum."""

    plots: dict[tuple[int, int], Fraction]
    sums: list[Fraction]


@dataclass(frozen=True, slots=True, eq=False)
class Averaged:
    """A matrix that treats each part alike: entries between parts, and what the diagonal has besides.

    Parameters
    ----------
    entries : (p, p)
    more : (p,)
    """

    entries: Any
    more: Any

    def times(self, other: Averaged, sizes: Any) -> Averaged:
        """The product, for parts of these sizes."""
        entries = (
            self.entries * other.more[None, :]
            + self.more[:, None] * other.entries
            + (self.entries * sizes[None, :]) @ other.entries
        )
        return Averaged(entries, self.more * other.more)

    def trace(self, sizes: Any) -> Any:
        """Its trace."""
        return (sizes * (self.entries.diagonal() + self.more)).sum()


def find(given: Problem) -> Bound | None:
    """The bound; None where blocks can be filled in too many ways or the program is not solved."""
    layout = _layout(given)
    if layout is None:
        return None
    weights = weights_of(given.trial, layout.parts)
    with one_thread():
        found = _best_tangent(layout, weights, float(reference_variance(given.trial)))
    if found is None:
        return None
    tangent, prices = found
    least = _least(layout, weights, tangent, prices)
    if least <= 0:
        return None
    multipliers = {
        "parts": [{"treatments": list(part)} for part in layout.parts],
        "entries": [[text(x) for x in row] for row in tangent.entries],
        "more": [text(x) for x in tangent.more],
        "plots": [
            {"group": g, "prices": [text(prices.plots[g, p]) for p in range(len(layout.parts))]}
            for g in layout.groups
        ],
        "sums": layout.sums.multipliers(prices.sums),
    }
    return bound_on_variance(given, NAME, least, multipliers)


def weights_of(trial: Trial, parts: Sequence[Sequence[int]]) -> Averaged:
    """W of the aim, exactly."""
    whole = exact_weights(trial)
    entries = np.array(
        [
            [whole[one[-1]][other[0]] if one is not other or len(one) > 1 else Fraction(0) for other in parts]
            for one in parts
        ],
        dtype=object,
    )
    more = np.array([whole[p[0]][p[0]] - entries[at, at] for at, p in enumerate(parts)], dtype=object)
    return Averaged(entries, more)


# -- what a block can hold --------------------------------------------------------------------------------


def _layout(given: Problem) -> _Layout | None:
    rules, limits, sums = given.rules, given.limits, Sums.of(given)
    parts = parts_of(given.trial)
    low = np.array([rules.low[part].sum(axis=0) for part in parts])
    high = np.array([rules.high[part].sum(axis=0) for part in parts])
    alike = Counter(
        (int(rules.sizes[j]), int(rules.group[j]), tuple(low[:, j]), tuple(high[:, j]))
        for j in range(rules.b)
    )
    sizes = np.array([len(part) for part in parts])
    apart = [
        (p, q)
        for p, one in enumerate(parts)
        for q, other in enumerate(parts)
        if p < q and len(one) == len(other) == 1 and rules.apart[one[0], other[0]]
    ]
    blocks, room = [], MOST_HELD
    for (size, group, least, most), count in alike.items():
        held = lattice(np.array(least), np.array(most), size, size, room)
        if held is not None:
            for p, q in apart:
                held = held[(held[:, p] == 0) | (held[:, q] == 0)]
        if held is None or not len(held):
            return None
        room -= len(held)
        # spread evenly: some members have `each` plots, `over` have one more
        each, over = np.divmod(held, sizes)
        squares = sizes * each**2 + over * (2 * each + 1)
        blocks.append(_Blocks(size, group, count, held, squares))
    groups = sorted({one.group for one in blocks})
    settled = rules.share.sum(axis=1) if rules.share.shape[1] else np.zeros(rules.t, dtype=np.int64)
    part_of = {i: p for p, part in enumerate(parts) for i in part}
    rows = sums.memberships.tolist()
    kinds = Counter(
        (part_of[i], int(max(limits.least[i], 1)), int(limits.most[i]), int(settled[i]), tuple(rows[i]))
        for i in range(rules.t)
    )
    share = {
        (g, p): int(rules.share[part, g].sum()) for g in groups if g >= 0 for p, part in enumerate(parts)
    }
    return _Layout(parts, blocks, groups, share, dict(kinds), sums)


# -- the best tangent ---------------------------------------------------------------------------------------


def _best_tangent(layout: _Layout, weights: Averaged, useless: float) -> tuple[Averaged, _Prices] | None:
    """Tangents at ever better averages of plans, until none that the rules leave is much better.

    None where some average is as good as a plan of efficiency 1, with a variance that is `useless`.
    """
    sizes = layout.sizes
    W = Averaged(weights.entries.astype(float), weights.more.astype(float))
    draw = np.random.default_rng(1)
    corners: list[Averaged] = []
    for _ in range(4):
        root = draw.normal(size=(len(sizes), len(sizes)))
        start = _corner(layout, Averaged(-np.abs(root + root.T), np.ones(len(sizes)) * 4 * len(sizes)))
        if start is None:
            return None
        corners.append(start[0])
    best: tuple[float, Averaged, _Prices] | None = None
    shares = np.full(len(corners), 1 / len(corners))
    for _ in range(ROUNDS):
        shares = _best_mixture(corners, shares, W, sizes)
        keep = shares > 1e-9
        corners, shares = [c for c, kept in zip(corners, keep, strict=True) if kept], shares[keep]
        value, V = _inverse(_mixed(corners, shares), W, sizes)
        if V is None or value <= useless:
            return None
        Z = V.times(W, sizes).times(V, sizes)
        found = _corner(layout, Z)
        if found is None:
            break
        corner, prices, greatest = found
        proved = 2 * W.times(V, sizes).trace(sizes) - greatest
        if best is None or proved > best[0]:
            best = proved, V, prices
        if value - best[0] <= ENOUGH * value:
            break
        corners.append(corner)
        shares = np.append(shares * 0.9, 0.1)
    if best is None:
        return None
    return _rounded(best[1]), best[2]


def _rounded(V: Averaged) -> Averaged:
    def exact(values: Floats) -> Any:
        flat = [Fraction(round(float(x) * FINE), FINE) for x in values.ravel()]
        return np.array(flat, dtype=object).reshape(values.shape)

    return Averaged(exact((V.entries + V.entries.T) / 2), exact(V.more))


def _mixed(corners: Sequence[Averaged], shares: Floats) -> Averaged:
    pairs = list(zip(corners, shares, strict=True))
    return Averaged(sum(s * c.entries for c, s in pairs), sum(s * c.more for c, s in pairs))


def _inverse(C: Averaged, W: Averaged, sizes: Floats) -> tuple[float, Averaged | None]:
    """tr(W C⁺), and C⁺ where it counts."""
    root = np.sqrt(sizes)
    compressed = root[:, None] * C.entries * root[None, :] + np.diag(C.more)
    ones = root / np.sqrt(sizes.sum())
    shifted = compressed + np.outer(ones, ones)
    within = (sizes > 1) & (W.more > 0)
    if np.linalg.eigvalsh(shifted)[0] < 1e-9 or (C.more[within] < 1e-9).any():
        return np.inf, None
    inverse = np.linalg.inv(shifted) - np.outer(ones, ones)
    more = np.where(within, 1 / np.where(within, C.more, 1), 0)
    V = Averaged((inverse - np.diag(more)) / root[:, None] / root[None, :], more)
    return float(W.times(V, sizes).trace(sizes)), V


def _best_mixture(corners: list[Averaged], shares: Floats, W: Averaged, sizes: Floats) -> Floats:
    """Shares of the corners at which tr(W C⁺) is least, about."""
    from scipy.optimize import minimize

    def value(shares: Floats) -> tuple[float, Floats]:
        total, V = _inverse(_mixed(corners, shares), W, sizes)
        if V is None:
            return 1e9, np.zeros(len(shares))
        Z = V.times(W, sizes).times(V, sizes)
        return total, np.array([-Z.times(C, sizes).trace(sizes) for C in corners])

    found = minimize(
        value,
        shares,
        jac=True,
        method="SLSQP",
        bounds=[(0, 1)] * len(corners),
        constraints={"type": "eq", "fun": lambda s: s.sum() - 1, "jac": np.ones_like},
        options={"maxiter": 60, "ftol": 1e-12},
    )
    new = np.maximum(found.x, 0)
    new /= new.sum()
    return new if value(new)[0] <= value(shares)[0] else shares


def _information(layout: _Layout, Z: Averaged) -> list[Any]:
    """For all that each kind of blocks can hold its part of tr(Z C)."""
    found = []
    for one in layout.blocks:
        m = one.held.astype(Z.entries.dtype)
        diagonal = m @ (Z.entries.diagonal() + Z.more)
        lost = ((m @ Z.entries) * m).sum(axis=1) + one.squares.astype(m.dtype) @ Z.more
        # in whole numbers Z is made so that this comes out even
        found.append(diagonal - (lost // one.size if m.dtype == object else lost / one.size))
    return found


def _corner(layout: _Layout, Z: Averaged) -> tuple[Averaged, _Prices, float] | None:
    """The average of plans with the greatest tr(Z C) that the rules leave, prices, and that tr(Z C)."""
    program, p = Program(), len(layout.parts)
    layout.sums.add_rows(program)
    for g in layout.groups:
        for part in range(p):
            program.equal(("plots", g, part), layout.share.get((g, part), 0))
    for number, one in enumerate(layout.blocks):
        program.equal(("blocks", number), one.count)
    columns = []
    for number, (one, gain) in enumerate(zip(layout.blocks, _information(layout, Z), strict=True)):
        entries: dict[Any, Any] = {("blocks", number): 1}
        for part in range(p):
            entries["plots", one.group, part] = one.held[:, part]
        columns.append(slice(program.columns, program.columns + len(one.held)))
        program.add(-gain, entries)
    for kind, count in layout.kinds.items():
        part, least, most, settled, memberships = kind
        program.equal(("kind", kind), count)
        for r in {least, most}:
            entries = {("kind", kind): 1, **layout.sums.entries(memberships, r)}
            if -1 in layout.groups:
                entries["plots", -1, part] = -(r - settled)
            program.add([0.0], entries)
    found = program.solve()
    if found is None:
        return None
    plots = {
        (g, part): Fraction(round(-found.prices["plots", g, part] * FINE), FINE)
        for g in layout.groups
        for part in range(p)
    }
    sums = [Fraction(round(pi * FINE), FINE) for pi in layout.sums.values(found.prices)]
    return _average(layout, found, columns), _Prices(plots, sums), -found.cost


def _average(layout: _Layout, found: Solution, columns: list[slice]) -> Averaged:
    sizes = layout.sizes
    p = len(sizes)
    products, diagonal, same = np.zeros((p, p)), np.zeros(p), np.zeros(p)
    for one, where in zip(layout.blocks, columns, strict=True):
        times, m = found.columns[where], one.held.astype(float)
        products += (m * times[:, None]).T @ m / one.size
        same += times @ one.squares / one.size
        diagonal += times @ m
    between = -products / np.outer(sizes, sizes)
    inner = np.where(sizes > 1, -(np.diag(products) - same) / np.maximum(sizes * (sizes - 1), 1), 0)
    np.fill_diagonal(between, inner)
    return Averaged(between, (diagonal - same) / sizes - inner)


# -- the exact value ----------------------------------------------------------------------------


def _least(layout: _Layout, W: Averaged, V: Averaged, prices: _Prices) -> Fraction:
    """What tr(W C⁺) is not below, exactly."""
    sizes = np.array([len(part) for part in layout.parts], dtype=object)
    Z = V.times(W, sizes).times(V, sizes)
    total = 2 * W.times(V, sizes).trace(sizes) - layout.sums.constant(prices.sums)
    whole, scale = _in_whole_numbers(Z, prices, [one.size for one in layout.blocks])
    for one, gain in zip(layout.blocks, _information(layout, whole), strict=True):
        alpha = np.array([int(prices.plots[one.group, p] * scale) for p in range(len(sizes))], dtype=object)
        total -= one.count * Fraction(max(gain - one.held.astype(object) @ alpha), scale)
    for (g, p), share in layout.share.items():
        total -= prices.plots[g, p] * share
    for (part, least, most, settled, memberships), count in layout.kinds.items():
        each = layout.sums.each(memberships, prices.sums)
        alpha_out = prices.plots.get((-1, part), Fraction(0))
        total -= count * max(alpha_out * (r - settled) - each * r for r in (least, most))
    return Fraction(total)


def _in_whole_numbers(Z: Averaged, prices: _Prices, sizes: list[int]) -> tuple[Averaged, int]:
    """Z times a number that makes it, the prices, and quotients by block sizes whole; and that number."""
    values = [*Z.entries.ravel(), *Z.more, *prices.plots.values()]
    scale = lcm(*(Fraction(x).denominator for x in values)) * lcm(*sizes)

    def whole(values: Any) -> Any:
        flat = [int(x * scale) for x in values.ravel()]
        return np.array(flat, dtype=object).reshape(values.shape)

    return Averaged(whole(Z.entries), whole(Z.more)), scale
