"""Second moment by block meets: two blocks share a whole number of treatments.

Statement. For every plan `tr C² ≥ S2`, with
`S2 = Σ_i min_{r,m} [r² + Σ_P m_P (−2r/s_P + Σ_g θ_Pg (ρ_ig − [g_P = g]) − μ_P) + π_i r]`
`+ b + Σ_P μ_P s_P b_P − Σ π most + Σ_{B<B'} min_x [2x²/(s s') − (θ_{P,g(B')} + θ_{P',g(B)}) x]`.

Proof. Let blocks of one size s_P in one replicate g_P (−1 outside all) form the class P, m_iP be the
number of them that hold i, ρ_ig the number of blocks of replicate g that do, and x_BB' the number of
treatments that B and B' share. With `σ_B = Σ_{i∈B} r_i`,
`tr C² = Σ r_i² + Σ_B (1 − 2σ_B/k_B) + Σ_{B≠B'} x_BB'² / (k_B k_B')`.
In every plan `Σ_{B'∈g, B'≠B} x_BB' = Σ_{i∈B} (ρ_ig − [g_B = g])`, `Σ_i m_iP = s_P b_P` and
`Σ_{i∈S} r_i ≤ most` for each sum limit. Taking these into the sum with prices θ, μ of any sign and
π ≥ 0 and then the least of each term alone gives S2. The ranges: r of the replication; m_iP between the
blocks of P that must and that may hold i, with `Σ_{P in g} m_iP = ρ_ig`, which the rules fix in a
replicate; `0 ≤ x ≤ min(s, s')`.

Even meetings. `2 Σ_{i<j} λ_ij² = Σ_B k_B² + 2 Σ_{B<B'} x_BB'² − Σ_i r_i²` in the same way, since N'N has the
eigenvalues of NN': the same program with other costs (`Form`) bounds the sum of squared meetings.

Source. Equal blocks and replications: the dual of the argument by pairs (Paterson 1983; from memory).
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from itertools import combinations_with_replacement
from typing import Any

import numpy as np

from search.efficiency.bounds import evenness, second_moment
from search.efficiency.bounds.lattice import alike
from search.efficiency.bounds.problem import Problem, text
from search.efficiency.bounds.program import Program
from search.efficiency.bounds.second_moment import MOST_COLUMNS, Grid
from search.efficiency.bounds.sums import Sums
from search.efficiency.records import Bound
from search.trial.tables import Ints

NAME = "second moment by block meets"
EVEN = "even meetings by block meets"
SENTENCE = "Two blocks share a whole number of treatments, so blocks cannot overlap perfectly evenly."
applies = second_moment.applies
applies_to_meetings = evenness.applies


@dataclass(frozen=True, slots=True)
class Form:
    """What the sum over plots, blocks and pairs of blocks is made of.

    Parameters
    ----------
    own : weight of r² of each treatment
    loss : over the block size, weight of −r of each of its plots
    meet : weight of x² of each pair of blocks, over both sizes where `shared`
    shared : whether blocks count by their sizes
    """

    own: int
    loss: int
    meet: int
    shared: bool

    def of_plot(self, r: int, size: int) -> Fraction:
        """What a plot of a treatment with r plots costs in a block of that size."""
        return Fraction(-self.loss * r, size)

    def of_meet(self, one: int, other: int) -> Fraction:
        """What x² costs for two blocks of these sizes."""
        return Fraction(self.meet, one * other if self.shared else 1)

    def constant(self, sizes: Ints) -> int:
        """What the blocks cost by themselves."""
        return len(sizes) if self.shared else int((sizes**2).sum())


INFORMATION = Form(own=1, loss=2, meet=2, shared=True)
"""`tr C²`"""
MEETINGS = Form(own=-1, loss=0, meet=2, shared=False)
"""Twice the sum of squared meetings."""


@dataclass(frozen=True, slots=True)
class _Class:
    """Blocks of one size in one replicate."""

    size: int
    group: int
    blocks: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class _Kind:
    """Treatments with the same possibilities.

    Parameters
    ----------
    count : how many there are
    least, most : range of their plots
    share : plots in each replicate
    low, high : for each block class the blocks that must and that may hold them
    memberships : for each type of sum limit in how many of that type they stand
    """

    count: int
    least: int
    most: int
    share: list[int]
    low: list[int]
    high: list[int]
    memberships: list[int]

    def in_group(self, r: int, group: int) -> int:
        """ρ: plots in a replicate, or outside all, of a treatment with r plots."""
        return r - sum(self.share) if group < 0 else self.share[group]


@dataclass(frozen=True, slots=True, eq=False)
class _Layout:
    """Everything that the program chooses from."""

    classes: list[_Class]
    kinds: list[_Kind]
    sums: Sums

    @property
    def groups(self) -> list[int]:
        """The replicates, and −1 where blocks lie outside them."""
        return sorted({c.group for c in self.classes})

    @property
    def block_pairs(self) -> list[tuple[int, int, int, int]]:
        """Two classes, the number of pairs of different blocks from them, and the most such a pair shares."""
        pairs = []
        for p, q in combinations_with_replacement(range(len(self.classes)), 2):
            first, second = self.classes[p], self.classes[q]
            mine, other = len(first.blocks), len(second.blocks)
            count = mine * (mine - 1) // 2 if p == q else mine * other
            if count:
                pairs.append((p, q, count, min(first.size, second.size)))
        return pairs

    @property
    def columns(self) -> int:
        """How many columns the program has."""
        of_treatments = sum(kind.most - kind.least + 1 for kind in self.kinds) * (1 + len(self.classes))
        return of_treatments + sum(most + 1 for *_, most in self.block_pairs)


@dataclass(frozen=True, slots=True)
class _Prices:
    """θ by class and replicate, μ by class, π by type of sum."""

    meets: dict[tuple[int, int], Fraction]
    plots: list[Fraction]
    sums: list[Fraction]


def find(given: Problem) -> Bound | None:
    """The bound, or None where the program is too large or is not solved."""
    found = _solved(given, INFORMATION)
    return None if found is None else second_moment.bound_from(given, NAME, *found)


def find_for_meetings(given: Problem) -> Bound | None:
    """The bound of even meetings, or None where the program is too large, is not solved, or says nothing."""
    found = _solved(given, MEETINGS)
    return None if found is None else evenness.bound_on_meetings(given, EVEN, found[0] / 2, found[1])


def _solved(given: Problem, form: Form) -> tuple[Fraction, dict[str, Any]] | None:
    """A number that the sum of the form is not below in any plan, and the multipliers that show it."""
    layout = _layout(given)
    prices = _prices(given, layout, form) if layout.columns <= MOST_COLUMNS else None
    squares = None if prices is None else _least_squares(given, layout, prices, form)
    if prices is None or squares is None:
        return None
    return squares, _multipliers(layout, prices)


# -- what a treatment and two blocks can have -----------------------------------------------------------


def _layout(given: Problem) -> _Layout:
    members: dict[tuple[int, int], list[int]] = {}
    for block, key in enumerate(zip(given.rules.sizes.tolist(), given.rules.group.tolist(), strict=True)):
        members.setdefault(key, []).append(block)
    classes = [_Class(size, group, tuple(blocks)) for (size, group), blocks in sorted(members.items())]
    sums = Sums.of(given)
    return _Layout(classes, _kinds(given, classes, sums), sums)


def _kinds(given: Problem, classes: list[_Class], sums: Sums) -> list[_Kind]:
    rules, limits = given.rules, given.limits
    within = [list(c.blocks) for c in classes]
    low = np.column_stack([rules.low[:, blocks].sum(axis=1) for blocks in within])
    high = np.column_stack([rules.high[:, blocks].sum(axis=1) for blocks in within])
    labels = alike(np.column_stack([limits.least, limits.most, low, high, sums.memberships, rules.share]))
    _, examples, counts = np.unique(labels, return_index=True, return_counts=True)
    return [
        _Kind(
            count=count,
            least=int(limits.least[i]),
            most=int(limits.most[i]),
            share=rules.share[i].tolist(),
            low=low[i].tolist(),
            high=high[i].tolist(),
            memberships=sums.memberships[i].tolist(),
        )
        for i, count in zip(examples.tolist(), counts.tolist(), strict=True)
    ]


# -- prices ---------------------------------------------------------------------------------------------


def _prices(given: Problem, layout: _Layout, form: Form) -> _Prices | None:
    """From the linear program; given r the cost is linear in m, so m need not be listed."""
    classes = layout.classes
    program = Program()
    layout.sums.add_rows(program)
    for p, c in enumerate(classes):
        program.equal(("plots", p), c.size * len(c.blocks))
        for group in layout.groups:
            program.equal(("meets", p, group), 0)
    for number, kind in enumerate(layout.kinds):
        program.equal(("kind", number), kind.count)
        for r in range(kind.least, kind.most + 1):
            _add_treatments(program, layout, number, r, form)
    for p, q, count, most in layout.block_pairs:
        x = np.arange(most + 1)
        program.equal(("pair", p, q), count)
        entries: dict[Any, Any] = {("pair", p, q): 1}
        if p == q:
            entries["meets", p, classes[p].group] = 2 * x
        else:
            entries["meets", p, classes[q].group] = x
            entries["meets", q, classes[p].group] = x
        program.add(float(form.of_meet(classes[p].size, classes[q].size)) * x**2, entries)
    found = program.prices()
    if found is None:
        return None
    grid = Grid(given.rules.sizes)
    numbers = range(len(classes))
    return _Prices(
        {(p, group): grid.price(found["meets", p, group]) for p in numbers for group in layout.groups},
        [grid.price(found["plots", p]) for p in numbers],
        [grid.price(pi) for pi in layout.sums.values(found)],
    )


def _add_treatments(program: Program, layout: _Layout, number: int, r: int, form: Form) -> None:
    """A column for the treatments of a kind that have r plots, and for their plots in each class."""
    kind, whole = layout.kinds[number], ("with", number, r)
    entries = {("kind", number): 1, **layout.sums.entries(kind.memberships, r)}
    for group in layout.groups:
        program.equal((*whole, "group", group), 0)
        entries[(*whole, "group", group)] = -kind.in_group(r, group)
    for p in range(len(layout.classes)):
        program.at_most((*whole, "low", p), 0)
        program.at_most((*whole, "high", p), 0)
        entries[(*whole, "low", p)] = kind.low[p]
        entries[(*whole, "high", p)] = -kind.high[p]
    program.add([float(form.own * r * r)], entries)
    for p, c in enumerate(layout.classes):
        in_class: dict[Any, Any] = {
            ("plots", p): 1,
            (*whole, "group", c.group): 1,
            (*whole, "low", p): -1,
            (*whole, "high", p): 1,
        }
        for group in layout.groups:
            in_class["meets", p, group] = (group == c.group) - kind.in_group(r, group)
        program.add([float(form.of_plot(r, c.size))], in_class)


# -- the exact value ------------------------------------------------------------------------------------


def _least_squares(given: Problem, layout: _Layout, prices: _Prices, form: Form) -> Fraction | None:
    """S2 at the prices; None where a treatment cannot be placed, so that no plan exists."""
    total = form.constant(given.rules.sizes) - layout.sums.constant(prices.sums)
    for kind in layout.kinds:
        costs = [_least_of_treatment(layout, kind, prices, r, form) for r in range(kind.least, kind.most + 1)]
        possible = [cost for cost in costs if cost is not None]
        if not possible:
            return None
        total += kind.count * min(possible)
    for c, mu in zip(layout.classes, prices.plots, strict=True):
        total += mu * c.size * len(c.blocks)
    for p, q, count, most in layout.block_pairs:
        first, second = layout.classes[p], layout.classes[q]
        price = prices.meets[p, second.group] + prices.meets[q, first.group]
        square = form.of_meet(first.size, second.size)
        total += count * min(square * x * x - price * x for x in range(most + 1))
    return total


def _least_of_treatment(layout: _Layout, kind: _Kind, prices: _Prices, r: int, form: Form) -> Fraction | None:
    """The least cost of a treatment with r plots: in each replicate the cheapest classes first."""
    total = form.own * r * r + r * layout.sums.each(kind.memberships, prices.sums)
    for group in layout.groups:
        inside = [p for p, c in enumerate(layout.classes) if c.group == group]
        left = kind.in_group(r, group) - sum(kind.low[p] for p in inside)
        if left < 0:
            return None
        costs = {
            p: _cost(layout, kind, prices, r, p) + form.of_plot(r, layout.classes[p].size) for p in inside
        }
        total += sum((kind.low[p] * costs[p] for p in inside), Fraction(0))
        for p in sorted(inside, key=costs.__getitem__):
            more = min(left, kind.high[p] - kind.low[p])
            total += more * costs[p]
            left -= more
        if left:
            return None
    return total


def _cost(layout: _Layout, kind: _Kind, prices: _Prices, r: int, p: int) -> Fraction:
    """What the prices make one plot in a block of class p cost a treatment with r plots."""
    own = layout.classes[p]
    cost = -prices.plots[p]
    for group in layout.groups:
        cost += prices.meets[p, group] * (kind.in_group(r, group) - (group == own.group))
    return cost


def _multipliers(layout: _Layout, prices: _Prices) -> dict[str, Any]:
    classes = layout.classes
    return {
        "meets": [
            {"size": classes[p].size, "group": classes[p].group, "with": group, "price": text(theta)}
            for (p, group), theta in prices.meets.items()
            if theta
        ],
        "plots": [
            {"size": c.size, "group": c.group, "price": text(mu)}
            for c, mu in zip(classes, prices.plots, strict=True)
        ],
        "sums": layout.sums.multipliers(prices.sums),
    }
