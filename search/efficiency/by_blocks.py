"""Variances of a large plan by way of its blocks, where they are fewer than the treatments.

With `L = K − N' R⁻¹ N`, b by b, `R⁻¹ + R⁻¹ N L⁺ N' R⁻¹` is a generalised inverse of `C = R − N K⁻¹ N'`, and
centred it is C⁺. Both information matrices are what elimination leaves of one graph Laplacian, whose
cofactors count its spanning trees, so that `pdet C = (t/b) pdet L Π r / Π k`.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from search.efficiency.one_thread import one_thread

Matrix = NDArray[np.float64]


def inverse_and_log(counts: NDArray[np.int64]) -> tuple[Matrix, float]:
    """C⁺ of a connected plan, and the logarithm of the product of the nonzero eigenvalues of C.

    Parameters
    ----------
    counts : (t, b) plots of each treatment in each block
    """
    t, b = counts.shape
    held = counts.astype(np.float64)
    plots, sizes = held.sum(axis=1), held.sum(axis=0)
    with one_thread():
        scaled = held / plots[:, None]
        information = np.diag(sizes) - held.T @ scaled + 1 / b
        inverse = (scaled @ np.linalg.inv(information)) @ scaled.T
        logarithm = float(np.linalg.slogdet(information)[1])
    inverse[np.diag_indices(t)] += 1 / plots
    middle = inverse.mean(axis=0)
    inverse -= middle
    inverse -= (middle - middle.mean())[:, None]
    logarithm += float(np.log(plots).sum() - np.log(sizes).sum() + np.log(t / b))
    return inverse, logarithm
