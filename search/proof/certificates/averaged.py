"""Kind "averaged information": a tangent that treats alike what the aim treats alike."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from math import lcm

from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim, claim_of_variance
from search.proof.certificates.multipliers import known, rows_of, sum_prices, symmetric_matrix, treatments_of
from search.proof.parts import Part, ratio
from search.proof.records import Refuted
from search.trial.records import AimKind

AIMS = (AimKind.AGAINST_CONTROL, AimKind.CONTRASTS)
MOST_HELD = 60_000
"""Ways to fill the blocks of a trial, all kinds of blocks together."""

Comparison = tuple[Fraction, dict[int, Fraction]]
"""Its weight and its coefficients by treatment."""


def derive(case: Case, multipliers: Part) -> Claim:
    """tr(WC⁺) ≥ 2 tr(WV) − tr(VWVC) for any symmetric V, as tr W(C^+½ − VC^½)(C^+½ − VC^½)' ≥ 0.

    With V alike on each part, tr(ZC), Z = VWV, is in each block at most a function of the plots of each part
    there: Z has no entry but those of its parts, and Σ n² is least where plots are spread evenly.
    Prices on the plots of a part in each replicate let every block take the greatest of it by itself.
    """
    known(multipliers, ("parts", "entries", "more", "plots", "sums"))
    parts, comparisons = _parts(case, multipliers), list(_comparisons(case))
    V = _Alike.of(multipliers, parts)
    images = [(weight, _image(V, parts, g)) for weight, g in comparisons]
    own = sum(
        (w * c * y[i] for (w, g), (_, y) in zip(comparisons, images, strict=True) for i, c in g.items()),
        Fraction(0),
    )
    Z = _square(parts, images)
    return claim_of_variance(case, 2 * own - _greatest(case, multipliers, parts, Z))


def _parts(case: Case, multipliers: Part) -> list[list[int]]:
    """Treatments that the aim treats alike, in the order in which the certificate names them."""
    found: dict[object, list[int]] = {}
    for i in range(case.trial.t):
        if case.aim is AimKind.AGAINST_CONTROL:
            key: object = i in case.trial.controls
        else:
            contrasts = case.trial.aim.contrasts
            key = tuple(sum((c for j, c in one.of if j == i), Fraction(0)) for one in contrasts)
        found.setdefault(key, []).append(i)
    named = [sorted(treatments_of(row, case)) for row in rows_of(multipliers, "parts")]
    if sorted(named) != sorted(found.values()):
        raise Refuted(f"{multipliers.at('parts')} must be the treatments that the aim treats alike")
    return named


def _comparisons(case: Case) -> Iterator[Comparison]:
    """W as a sum of weight·gg'."""
    trial = case.trial
    if case.aim is AimKind.AGAINST_CONTROL:
        weight = Fraction(1, len(trial.controls) * (trial.t - 1))
        for control in trial.controls:
            for j in range(trial.t):
                if j != control:
                    yield weight, {control: Fraction(1), j: Fraction(-1)}
        return
    total = Fraction(sum(one.weight for one in trial.aim.contrasts))
    for one in trial.aim.contrasts:
        g: dict[int, Fraction] = {}
        for i, c in one.of:
            g[i] = g.get(i, Fraction(0)) + c
        yield one.weight / total, g


@dataclass(frozen=True, slots=True)
class _Alike:
    """A symmetric matrix: an entry for every two parts, and what the diagonal of each part has besides."""

    entries: list[list[Fraction]]
    more: list[Fraction]

    @classmethod
    def of(cls, multipliers: Part, parts: list[list[int]]) -> _Alike:
        entries = symmetric_matrix(multipliers, "entries", len(parts))
        more = [ratio(multipliers.at("more"), x) for x in multipliers.items("more")]
        if len(more) != len(parts):
            raise Refuted(f"{multipliers.at('more')} must have a number for each of {len(parts)} parts")
        return cls(entries, more)


def _image(V: _Alike, parts: list[list[int]], g: dict[int, Fraction]) -> list[Fraction]:
    """V g, treatment by treatment."""
    sums = [sum((g.get(i, Fraction(0)) for i in part), Fraction(0)) for part in parts]
    image = [Fraction(0)] * sum(map(len, parts))
    for row, more, part in zip(V.entries, V.more, parts, strict=True):
        common = sum((entry * s for entry, s in zip(row, sums, strict=True)), Fraction(0))
        for i in part:
            image[i] = common + more * g.get(i, Fraction(0))
    return image


def _square(parts: list[list[int]], images: list[tuple[Fraction, list[Fraction]]]) -> _Alike:
    """Σ weight·yy', which is alike on each part."""

    def entry(i: int, j: int) -> Fraction:
        return sum((w * y[i] * y[j] for w, y in images if y[i] and y[j]), Fraction(0))

    firsts, lasts = [part[0] for part in parts], [part[-1] for part in parts]
    entries = [[entry(i, j) for j in lasts] for i in firsts]
    # where a part has one member only, all of its diagonal counts as what it has besides
    for at, part in enumerate(parts):
        if len(part) == 1:
            entries[at][at] = Fraction(0)
    return _Alike(entries, [entry(i, i) - entries[at][at] for at, i in enumerate(firsts)])


def _greatest(case: Case, multipliers: Part, parts: list[list[int]], Z: _Alike) -> Fraction:
    """What tr(ZC) does not pass in any plan."""
    rules = case.rules
    groups = sorted({int(g) for g in rules.group})
    plots = _plot_prices(multipliers, groups, len(parts))
    each, total = sum_prices(multipliers, case)
    alike = Counter(
        (
            int(rules.sizes[j]),
            int(rules.group[j]),
            tuple(int(rules.low[part, j].sum()) for part in parts),
            tuple(int(rules.high[part, j].sum()) for part in parts),
        )
        for j in range(rules.b)
    )
    alone = [part[0] if len(part) == 1 else None for part in parts]
    apart = {
        (p, q)
        for p, i in enumerate(alone)
        for q, j in enumerate(alone)
        if i is not None and j is not None and p < q and rules.apart[i, j]
    }
    room = MOST_HELD
    for (size, group, low, high), count in alike.items():
        held = _held(size, low, high, apart, room)
        room -= len(held)
        total += count * _best_filling(Z, plots[group], parts, size, held)
    settled = [int(x) for x in rules.share.sum(axis=1)] if rules.share.shape[1] else [0] * case.trial.t
    for p, part in enumerate(parts):
        for group in groups:
            if group >= 0:
                total += plots[group][p] * int(rules.share[part, group].sum())
        price = plots[-1][p] if -1 in plots else Fraction(0)
        for i in part:
            ends = max(1, case.least[i]), case.most[i]
            if ends[0] > ends[1]:
                raise Refuted("the rules leave a treatment no number of plots")
            total += max(price * (r - settled[i]) - each[i] * r for r in ends)
    return total


def _plot_prices(multipliers: Part, groups: list[int], number: int) -> dict[int, list[Fraction]]:
    """A price for each part in each replicate, -1 for blocks outside all."""
    prices = {}
    for given in rows_of(multipliers, "plots"):
        row = [ratio(given.at("prices"), x) for x in given.items("prices")]
        if len(row) != number:
            raise Refuted(f"{given.at('prices')} must have a price for each of {number} parts")
        prices[given.whole("group")] = row
    if sorted(prices) != groups:
        raise Refuted(f"{multipliers.at('plots')} must have prices for each replicate of the trial")
    return prices


def _held(
    size: int, low: tuple[int, ...], high: tuple[int, ...], apart: set[tuple[int, int]], room: int
) -> list[tuple[int, ...]]:
    """All numbers of plots by part that a block can have."""
    found: list[tuple[int, ...]] = [()]
    for p, (least, most) in enumerate(zip(low, high, strict=True)):
        after, before = sum(low[p + 1 :]), sum(high[p + 1 :])
        grown = []
        for vector in found:
            left = size - sum(vector)
            for m in range(max(least, left - before), min(most, left - after) + 1):
                if not (m and any(vector[o] for o in range(p) if (o, p) in apart)):
                    grown.append((*vector, m))
        found = grown
        if len(found) > room:
            raise Refuted("the trial has too many ways to fill a block for its certificate to be checked")
    if not found:
        raise Refuted("the rules leave a block nothing to hold")
    return found


def _best_filling(
    Z: _Alike, prices: list[Fraction], parts: list[list[int]], size: int, held: list[tuple[int, ...]]
) -> Fraction:
    """The most of tr(ZC) less prices that one block can have: Σ z_ii n_i − n'Zn/size."""
    values = [*(x for row in Z.entries for x in row), *Z.more, *prices]
    scale = lcm(*(x.denominator for x in values))
    entries = [[int(x * scale) for x in row] for row in Z.entries]
    more, alpha = [int(x * scale) for x in Z.more], [int(x * scale) for x in prices]
    best = None
    for vector in held:
        value = 0
        inside = [(p, m) for p, m in enumerate(vector) if m]
        for p, m in inside:
            members = len(parts[p])
            # Σ n² over members is least where n differs by one at most
            n, over = divmod(m, members)
            squares = members * n * n + over * (2 * n + 1)
            value += size * m * (entries[p][p] + more[p] - alpha[p]) - more[p] * squares
            value -= m * sum(entries[p][q] * other for q, other in inside)
        best = value if best is None else max(best, value)
    assert best is not None
    return Fraction(best, scale * size)
