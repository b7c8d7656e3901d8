"""Random streams: one for each run number, whoever works on it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

WORD = 2**64 - 1
GOLDEN = 0x9E3779B97F4A7C15


def stream(seed: int, run: int) -> NDArray[np.uint64]:
    """The state of xoshiro256** for a run, seeded by splitmix64 (Steele, Lea & Flood 2014).

    Parameters
    ----------
    seed : seed of the search
    run : number of the run

    Returns
    -------
    state : (4,) advanced in place by the kernel
    """
    root = _mixed(_mixed(seed + GOLDEN) + (run + 1) * GOLDEN)
    return np.array([_mixed(root + i * GOLDEN) for i in range(1, 5)], dtype=np.uint64)


def _mixed(x: int) -> int:
    x &= WORD
    x = ((x ^ (x >> 30)) * 0xBF58476D1CE4E5B9) & WORD
    x = ((x ^ (x >> 27)) * 0x94D049BB133111EB) & WORD
    return x ^ (x >> 31)
