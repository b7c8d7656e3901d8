"""Square and rectangular lattices."""

from __future__ import annotations

from itertools import combinations

import numpy as np
import pytest

from search.designs.lattices import Replicate, lattice, rectangular_lattice, square_lattice


@pytest.mark.parametrize(("s", "r"), [(3, 2), (4, 3), (5, 6), (6, 3), (7, 4), (8, 9), (10, 3), (12, 4)])
def test_square_lattices_reach_their_efficiency(s: int, r: int) -> None:
    """E = (k + 1)/(k + 1 + r/(r − 1)) for t = k² in r replicates (Yates 1936; Cheng & Bailey 1991)."""
    parts = square_lattice(s, r)
    assert parts is not None
    assert _holds_everything(parts, s * s)
    assert _efficiency(parts, s * s, s, r) == pytest.approx((s + 1) / (s + 1 + r / (r - 1)), rel=1e-12)


@pytest.mark.parametrize(("s", "r"), [(4, 3), (5, 5), (6, 2), (9, 4)])
def test_rectangular_lattices_hold_no_pair_twice(s: int, r: int) -> None:
    """Blocks of s − 1, every treatment once a replicate, no two together twice (Harshbarger 1949)."""
    parts = rectangular_lattice(s, r)
    assert parts is not None
    assert _holds_everything(parts, s * (s - 1))
    pairs = [pair for part in parts for block in part for pair in combinations(block, 2)]
    assert {len(block) for part in parts for block in part} == {s - 1}
    assert len(pairs) == len(set(pairs))


def test_more_replicates_than_known_squares_give_none() -> None:
    """Six treatments a side have one Latin square of this kind: three replicates, not four."""
    assert square_lattice(6, 3) is not None
    assert square_lattice(6, 4) is None
    assert square_lattice(1, 1) is None
    assert lattice(30, 5, 2) is not None
    assert lattice(31, 5, 2) is None


def _holds_everything(parts: tuple[Replicate, ...], t: int) -> bool:
    return all(sorted(x for block in part for x in block) == list(range(t)) for part in parts)


def _efficiency(parts: tuple[Replicate, ...], t: int, k: int, r: int) -> float:
    blocks = [block for part in parts for block in part]
    inside = np.zeros((t, len(blocks)))
    for j, block in enumerate(blocks):
        inside[list(block), j] = 1
    factors = np.linalg.eigvalsh(np.eye(t) - inside @ inside.T / (r * k))
    return float((t - 1) / np.sum(1 / np.sort(factors)[1:]))
