"""Plans that are known beforehand, and trials drawn around a plan so that they are never impossible."""

from __future__ import annotations

import random
from dataclasses import replace
from fractions import Fraction
from itertools import combinations

import numpy as np
from hypothesis import strategies as st

from search.efficiency.evaluator import objective
from search.trial.checker import broken_rules
from search.trial.records import (
    Aim,
    AimKind,
    Block,
    Contents,
    Contrast,
    Meeting,
    Replicate,
    Rules,
    Treatment,
    Trial,
)
from search.trial.tables import contents_of, incidence

ALL_PAIRS = Aim()
OVERALL = Aim(AimKind.OVERALL)
AGAINST_CONTROL = Aim(AimKind.AGAINST_CONTROL)

FANO: Contents = ((0, 1, 3), (1, 2, 4), (2, 3, 5), (3, 4, 6), (0, 4, 5), (1, 5, 6), (0, 2, 6))
"""The lines of the projective plane of order 2: the balanced (7, 7, 3)."""


def equal_trial(t: int, b: int, k: int, aim: Aim = ALL_PAIRS, controls: int = 0) -> Trial:
    """Equal blocks, equal replication."""
    r = b * k // t
    return Trial(
        "equal",
        tuple(Treatment(f"T{i}", r, r, control=i < controls) for i in range(t)),
        tuple(Block(f"block {j}", k) for j in range(b)),
        aim=aim,
    )


def trial_of(contents: Contents, t: int, **more: object) -> Trial:
    """The trial that pins the block sizes and replications of a plan."""
    plots = incidence(contents, t).sum(axis=1).tolist()
    trial = Trial(
        "of a plan",
        tuple(Treatment(f"T{i}", r, r) for i, r in enumerate(plots)),
        tuple(Block(f"block {j}", len(block)) for j, block in enumerate(contents)),
    )
    return replace(trial, **more)  # type: ignore[arg-type]


def square_lattice(k: int, replicates: int) -> tuple[Trial, Contents]:
    """A square lattice for t = k², k prime: the parallel lines of some slopes of the affine plane."""
    lines = [[tuple(range(x * k, x * k + k)) for x in range(k)]]
    for slope in range(replicates - 1):
        lines.append([tuple(sorted(x * k + (slope * x + c) % k for x in range(k))) for c in range(k)])
    contents = tuple(block for parallel in lines for block in parallel)
    rules = Rules(
        replicates=tuple(
            Replicate(f"replicate {g}", tuple(range(g * k, g * k + k))) for g in range(replicates)
        )
    )
    return trial_of(contents, k * k, rules=rules), contents


def dual(contents: Contents, t: int) -> Contents:
    """Blocks and treatments exchanged."""
    return contents_of(incidence(contents, t).T)


def affine_plane(k: int) -> Contents:
    """The balanced plan of k² treatments in blocks of k, k prime."""
    return square_lattice(k, k + 1)[1]


@st.composite
def planted(draw: st.DrawFn, most_treatments: int = 8) -> tuple[Trial, Contents]:
    """A trial with rules of every kind, and a plan that obeys them, around which it was drawn."""
    rng = random.Random(draw(st.integers(0, 2**32)))
    t = draw(st.integers(3, most_treatments))
    resolvable = draw(st.booleans())
    twice = not resolvable and draw(st.integers(0, 3)) == 0
    contents, replicates = _blocks(rng, t, resolvable, twice)
    missing = set(range(t)) - {i for block in contents for i in block}
    if missing:
        contents = (*contents, tuple(sorted(missing)))
    rules = _rules(rng, t, contents, replicates, twice, draw(st.integers(0, 3)))
    loose = draw(st.integers(0, 2))
    plots = incidence(contents, t).sum(axis=1).tolist()
    trial = Trial(
        "planted",
        tuple(
            Treatment(
                f"T{i}", max(1, r - rng.randint(0, loose)), r + rng.randint(0, loose), control=i < 1 + t % 2
            )
            for i, r in enumerate(plots)
        ),
        tuple(Block(f"block {j}", len(block)) for j, block in enumerate(contents)),
        rules=rules,
        aim=_aim(rng, t, draw(st.sampled_from([*AimKind, AimKind.ALL_PAIRS, AimKind.OVERALL]))),
    )
    assert not broken_rules(trial, contents)
    return trial, contents


def _blocks(
    rng: random.Random, t: int, resolvable: bool, twice: bool
) -> tuple[Contents, tuple[Replicate, ...]]:
    blocks: list[tuple[int, ...]] = []
    replicates = []
    for g in range(rng.randint(1, 3) if resolvable else 0):
        order = rng.sample(range(t), t)
        cuts = sorted(rng.sample(range(2, t - 1), rng.randint(0, min(2, t - 3)))) if t > 3 else []
        parts = [tuple(sorted(order[a:z])) for a, z in zip([0, *cuts], [*cuts, t], strict=True)]
        replicates.append(Replicate(f"R{g}", tuple(range(len(blocks), len(blocks) + len(parts)))))
        blocks.extend(parts)
    for _ in range(rng.randint(0, 2) if resolvable else rng.randint(2, 7)):
        size = rng.randint(2, min(t, 5))
        chosen = rng.choices(range(t), k=size) if twice else rng.sample(range(t), size)
        if twice and size == t:
            chosen = rng.sample(range(t), t)
        blocks.append(tuple(sorted(chosen)))
    return tuple(blocks), tuple(replicates)


def _rules(
    rng: random.Random,
    t: int,
    contents: Contents,
    replicates: tuple[Replicate, ...],
    twice: bool,
    strictness: int,
) -> Rules:
    present = incidence(contents, t) > 0
    shared = present.astype(int) @ present.T.astype(int)
    pairs = list(combinations(range(t), 2))
    never = [pair for pair in pairs if shared[pair] == 0]
    often = [pair for pair in pairs if shared[pair] > 0]
    absent = [(int(i), int(j)) for i, j in zip(*np.nonzero(~present), strict=True)]
    there = [(int(i), int(j)) for i, j in zip(*np.nonzero(present), strict=True)]

    def some(things: list[tuple[int, int]]) -> tuple[tuple[int, int], ...]:
        return tuple(rng.sample(things, min(len(things), rng.randint(0, strictness))))

    at_most = Meeting(int(np.triu(shared, 1).max()))
    return Rules(
        never_share_block=some(never),
        meet_at_least=tuple(Meeting(int(shared[pair]), pair) for pair in some(often)),
        meet_at_most=(at_most,) if rng.randint(0, 3) < strictness else (),
        keep_out=some(absent),
        must_hold=some(there),
        replicates=replicates,
        twice_in_block=twice,
    )


def _aim(rng: random.Random, t: int, kind: AimKind) -> Aim:
    if kind is not AimKind.CONTRASTS:
        return Aim(kind)
    contrasts = []
    for number in range(rng.randint(1, 3)):
        i, j, k = rng.sample(range(t), 3)
        of = ((i, Fraction(2)), (j, Fraction(-1)), (k, Fraction(-1))) if rng.random() < 0.5 else None
        of = of or ((i, Fraction(1)), (j, Fraction(-1)))
        contrasts.append(Contrast(f"c{number}", Fraction(rng.randint(1, 4)), of))
    return Aim(kind, tuple(contrasts))


def improved(trial: Trial, contents: Contents, seed: int, tries: int = 60) -> Contents:
    """A better legal plan, by random exchanges and replacements that are kept when they help."""
    rng = random.Random(seed)
    best, value = contents, objective(contents, trial)
    for _ in range(tries):
        candidate = _changed(rng, best, trial.t)
        if broken_rules(trial, candidate):
            continue
        other = objective(candidate, trial)
        if other < value:
            best, value = candidate, other
    return best


def _changed(rng: random.Random, contents: Contents, t: int) -> Contents:
    blocks = [list(block) for block in contents]
    a, c = rng.randrange(len(blocks)), rng.randrange(len(blocks))
    p, q = rng.randrange(len(blocks[a])), rng.randrange(len(blocks[c]))
    if a == c or rng.random() < 0.3:
        blocks[a][p] = rng.randrange(t)
    else:
        blocks[a][p], blocks[c][q] = blocks[c][q], blocks[a][p]
    return tuple(tuple(sorted(block)) for block in blocks)
