"""Plans to start a search from: balanced designs and lattices that fit a trial, or nearly do."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import islice

import numpy as np

from search.designs.adapting import adapted
from search.designs.building import directly
from search.designs.conditions import Balanced, conditions, multiples
from search.designs.existence import RESOLVED_UP_TO
from search.designs.labelling import Template, labelled
from search.designs.lattices import lattice
from search.designs.records import Blocks
from search.designs.resolution import resolved
from search.foundation.stopping import Stop
from search.trial.checker import broken_rules
from search.trial.records import Contents, Trial
from search.trial.tables import Tables, tables

EFFORT = 1.0
"""Deterministic work of CP-SAT for one template."""
NEAREST = 3
"""Designs that nearly fit that are handed on."""
MOST_CELLS = 40_000
"""Treatments times blocks beyond which a design is not adapted: the model would be too large."""
FARTHEST = 0.5
"""Largest share of the plots that may differ between the trial and a design that nearly fits."""


@dataclass(frozen=True, slots=True)
class Start:
    """A plan that obeys the trial's rules.

    Parameters
    ----------
    contents : the plan
    where_from : where it came from, in a sentence
    balanced : whether it is a balanced design, which is best for every aim that treats pairs alike
    """

    contents: Contents
    where_from: str
    balanced: bool = False


def starts(trial: Trial, *, effort: float = EFFORT, stop: Stop | None = None) -> Iterator[Start]:
    """Plans to start from, those that fit exactly first; each obeys every rule.

    Parameters
    ----------
    trial : the trial
    effort : deterministic work of CP-SAT for one of them
    stop : ends the solver from outside
    """
    rules = tables(trial)
    if not rules.exact:
        return  # a design has blocks of known sizes
    exact = False
    for template in _fitting(rules):
        contents = labelled(template, rules, effort=effort, stop=stop)
        if contents is not None and not broken_rules(trial, contents):
            exact = True
            yield Start(contents, template.where_from, template.balanced)
    if not exact and rules.t * rules.b <= MOST_CELLS:
        found = (_adapted(trial, rules, near, effort, stop) for near in _near(rules))
        yield from islice((start for start in found if start is not None), NEAREST)


def _fitting(rules: Tables) -> Iterator[Template]:
    """Designs with just the trial's numbers of treatments, blocks and plots."""
    sizes = set(rules.sizes.tolist())
    if len(sizes) > 1:
        return
    k = sizes.pop()
    r, left = divmod(rules.n, rules.t)
    if left or not 1 < k < rules.t:
        return
    yield from _balanced(rules, k)
    yield from _linked(rules, r)
    yield from _lattice(rules, k, r)


def _balanced(rules: Tables, k: int) -> Iterator[Template]:
    sizes = conditions(rules.t, rules.b, k).allowed
    if sizes is None or rules.apart.any():
        return
    if not rules.share.size:
        built = directly(sizes)
        if built is not None:
            yield Template(sizes.t, built.blocks, f"balanced design: {built.how}", balanced=True)
        return
    design = resolved(sizes) if sizes.r <= RESOLVED_UP_TO else None
    if design is not None:
        where_from = f"balanced design in replicates: {design.construction}"
        yield Template(sizes.t, design.blocks, where_from, design.replicates, balanced=True)


def _linked(rules: Tables, r: int) -> Iterator[Template]:
    """The dual of a balanced design: any two blocks share equally many treatments (Youden 1951)."""
    sizes = conditions(rules.b, rules.t, r).allowed if r < rules.b < rules.t else None
    built = directly(sizes) if sizes else None
    if built is None or sizes is None:
        return
    yield Template(
        rules.t, dual(built.blocks, sizes.t), f"linked blocks, the dual of a balanced design: {built.how}"
    )


def _lattice(rules: Tables, k: int, r: int) -> Iterator[Template]:
    found = lattice(rules.t, k, r) if r > 1 else None
    if found is None:
        return
    name, parts = found
    blocks = tuple(block for part in parts for block in part)
    ends = np.cumsum([len(part) for part in parts]).tolist()
    replicates = tuple(tuple(range(end - len(part), end)) for part, end in zip(parts, ends, strict=True))
    yield Template(rules.t, blocks, f"{name} in {r} replicates", replicates)


@dataclass(frozen=True, slots=True)
class _Near:
    """A balanced design, or its dual, with numbers near to the trial's."""

    sizes: Balanced
    dual: bool

    @property
    def shape(self) -> tuple[int, int, int]:
        """Treatments, blocks and plots of a block."""
        sizes = self.sizes
        return (sizes.b, sizes.t, sizes.r) if self.dual else (sizes.t, sizes.b, sizes.k)

    def changes(self, rules: Tables) -> int:
        """Roughly the plots to take out and put in: those of treatments and blocks that only one has."""
        t, b, k = self.shape
        both = min(b, rules.b)
        largest = np.sort(rules.sizes)[::-1]
        plots = np.abs(largest[:both] - k).sum() + largest[both:].sum() + (b - both) * k
        return int(plots + abs(t - rules.t) * b * k // t)

    def blocks(self) -> tuple[Blocks, str] | None:
        """The blocks and how they were built, if that takes no search."""
        built = directly(self.sizes)
        if built is None:
            return None
        return (dual(built.blocks, self.sizes.t) if self.dual else built.blocks), built.how

    def told(self, rules: Tables) -> str:
        """What is taken, and what has to be changed."""
        t, b, k = self.shape
        changes = []
        for what, has, wants in (("treatment", t, rules.t), ("block", b, rules.b)):
            if has != wants:
                many = abs(has - wants)
                changes.append(
                    f"{many} {what}{'s' if many > 1 else ''} {'taken out' if has > wants else 'put in'}"
                )
        kind = "dual of a balanced design" if self.dual else "balanced design"
        done = ", ".join([*changes, "plots moved to fit"])
        return f"{kind}, {t} treatments in {b} blocks of {k} ({done})"


def dual(blocks: Blocks, points: int) -> Blocks:
    """Points become blocks and blocks become points."""
    return tuple(tuple(j for j, block in enumerate(blocks) if x in block) for x in range(points))


def _near(rules: Tables) -> list[_Near]:
    """Balanced sizes near to the trial's, the nearest first; whether they can be built is not looked at."""
    usual = Counter(rules.sizes.tolist()).most_common(1)[0][0]
    found = [_Near(sizes, False) for sizes in _around(rules.t, usual, rules.n)]
    around = _around(rules.b, round(rules.n / rules.t), rules.n)
    found += [_Near(sizes, True) for sizes in around if sizes.b != sizes.t]
    near = [(one.changes(rules), one.shape, one) for one in found]
    near = [item for item in near if item[0] <= FARTHEST * rules.n]
    return [one for _, _, one in sorted(near, key=lambda item: item[:2])]


def _around(t: int, k: int, plots: int) -> Iterator[Balanced]:
    spread = max(2, t // 12)
    for near_t in range(max(3, t - spread), t + spread + 1):
        for near_k in range(max(2, k - 1), min(k + 2, near_t)):
            for sizes in multiples(near_t, near_k):
                if sizes.plots > (1 + FARTHEST) * plots:
                    break
                yield sizes


def _adapted(trial: Trial, rules: Tables, near: _Near, effort: float, stop: Stop | None) -> Start | None:
    built = near.blocks()
    if built is None:
        return None
    blocks, how = built
    contents = adapted(blocks, rules, effort=effort, stop=stop)
    if contents is None or broken_rules(trial, contents):
        return None
    return Start(contents, f"nearest {near.told(rules)}: {how}")
