"""Whole-number vectors: which are alike, and all of them within ranges."""

from __future__ import annotations

import numpy as np

from search.trial.tables import Ints


def alike(vectors: Ints) -> Ints:
    """A label for each vector, the same for equal ones, from 0 on.

    Parameters
    ----------
    vectors : (..., k), an entry in the last axis

    Returns
    -------
    labels : (...), in the order of the vectors
    """
    labels = np.zeros(vectors.shape[:-1], dtype=np.int64)
    for k in range(vectors.shape[-1]):
        # entry by entry, since sorting numbers is much quicker than sorting rows
        _, entry = np.unique(vectors[..., k], return_inverse=True)
        mixed = labels * (int(entry.max()) + 1) + entry.reshape(labels.shape)
        _, merged = np.unique(mixed, return_inverse=True)
        labels = merged.reshape(labels.shape)
    return labels


def lattice(low: Ints, high: Ints, least: int, most: int, cap: int) -> Ints | None:
    """All integer vectors `low ≤ a ≤ high` with `least ≤ Σ a ≤ most`, one a row.

    Parameters
    ----------
    low, high : (k,) range of each entry
    least, most : range of the sum
    cap : more rows than this are not listed

    Returns
    -------
    vectors : (number, k), or None beyond the cap
    """
    vectors = np.zeros((1, 0), dtype=np.int64)
    for k in range(len(low)):
        values = np.arange(low[k], high[k] + 1)
        sums = vectors.sum(axis=1)[:, None] + values
        # a part is kept only if it can be completed, so the number of parts never shrinks again
        fits = (sums + low[k + 1 :].sum() <= most) & (sums + high[k + 1 :].sum() >= least)
        part, value = np.nonzero(fits)
        if len(part) > cap:
            return None
        vectors = np.column_stack([vectors[part], values[value]])
    return vectors
