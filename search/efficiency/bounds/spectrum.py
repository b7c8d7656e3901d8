"""The best eigenvalues that a trace and a second moment leave.

Among m positive numbers with a given sum S1 and sum of squares S2 or more, none above a cap, the least
`Σ 1/x` and the greatest `Π x` both stand where one is large and all others are equal and small: the
equal-variable theorem (Cirtoaje 2007), for functions whose derivative is concave, as that of 1/x
and that of −log x are. If the large one would pass the cap, then some stand at the cap: of any three
numbers below it the lower two are equal, or moving along the circle on which sum and squares stay
fixed would still help; so with none at the cap the numbers would be those that pass it. One stands at
the cap, and the rest is the same question again.
"""

from __future__ import annotations

from fractions import Fraction

from search.foundation.exact import root_above, root_below

Spectrum = list[tuple[Fraction, int]]
"""Eigenvalues, and how often each stands."""


def even_spectrum(m: int, trace: Fraction) -> Spectrum:
    """All eigenvalues equal: the best that a trace alone leaves."""
    return [(trace / m, m)]


def extreme_spectrum(
    m: int, trace: Fraction, squares: Fraction, cap: int, known: tuple[int, int] = (0, 0)
) -> Spectrum:
    """The eigenvalues with the least `Σ 1/x` and the greatest `Π x`, each rounded up by a hair.

    Parameters
    ----------
    m : number of eigenvalues
    trace : their sum
    squares : a number that their sum of squares is not below
    cap : a number that none of them is above
    known : (q, r) where q of them are known to equal r

    Returns
    -------
    spectrum : where the numbers clash, or prove that no plan is connected, the even one, which is
        always valid
    """
    q, r = known
    if q > 0 and m > q and trace > q * r:
        rest = m - q, trace - q * r, squares - q * r * r
        return [(Fraction(r), q), *_free(*rest, cap)]
    return _free(m, trace, squares, cap)


def _free(m: int, trace: Fraction, squares: Fraction, cap: int) -> Spectrum:
    even = even_spectrum(m, trace)
    at_cap = 0
    while m > 1 and trace > 0:
        mean = trace / m
        spread = squares - trace * mean
        if spread <= 0 or cap < mean:
            break
        # exact on purpose: a rounded root could put one at the cap that belongs below it
        if spread * (m - 1) / m > (cap - mean) ** 2:
            at_cap, m = at_cap + 1, m - 1
            trace, squares = trace - cap, squares - cap * cap
            continue
        large = mean + root_above(spread * (m - 1) / m)
        small = mean - root_below(spread / (m * (m - 1)))
        return [(Fraction(cap), at_cap), (large, 1), (small, m - 1)] if small > 0 else even
    return [(Fraction(cap), at_cap), *even_spectrum(m, trace)] if trace > 0 else even
