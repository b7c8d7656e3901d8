"""Symmetric designs, as many blocks as treatments: what order k − λ they may have.

Schützenberger 1949 (A non-existence theorem for an infinite family of symmetrical block designs, Annals
of Eugenics 14, 286–287) for an even number of treatments; Bruck & Ryser 1949 (Canadian Journal of
Mathematics 1, 88–93) and Chowla & Ryser 1950 (the same journal 2, 93–99) for an odd one.
"""

from __future__ import annotations

from math import isqrt

from search.designs.conditions import Balanced


def schuetzenberger(sizes: Balanced) -> str:
    """For even t the determinant of NN' is a square only if k − λ is."""
    order = sizes.k - sizes.meetings
    if sizes.b != sizes.t or sizes.t % 2 or isqrt(order) ** 2 == order:
        return ""
    return (
        f"with as many blocks as treatments, an even number, k − λ = {order} must be a square "
        "(Schützenberger 1949)"
    )


def bruck_ryser_chowla(sizes: Balanced) -> str:
    """For odd t, z² = (k − λ)x² + (−1)^((t−1)/2) λ y² must have a solution in whole numbers, not all 0.

    Whether it has one is decided place by place with Hilbert symbols (Hasse and Minkowski).
    """
    if sizes.b != sizes.t or sizes.t % 2 == 0:
        return ""
    order, sign = sizes.k - sizes.meetings, -1 if sizes.t % 4 == 3 else 1
    second = sign * sizes.meetings
    place = unsolvable_at(order, second)
    if not place:
        return ""
    return (
        f"z² = {order}x² {'+' if sign > 0 else '−'} {sizes.meetings}y² has no whole solution but 0: modulo "
        f"powers of {place} there is none (Bruck, Ryser and Chowla 1949–50)"
    )


def unsolvable_at(a: int, b: int) -> int:
    """A prime at which z² = ax² + by² has no solution but 0, or 0 where it has one in whole numbers.

    Parameters
    ----------
    a, b : not 0; a positive, so that the equation can always be solved in real numbers
    """
    primes = [p for p in range(2, max(a, abs(b)) + 1) if (2 * a * b) % p == 0 and _is_prime(p)]
    return next((p for p in primes if hilbert(a, b, p) < 0), 0)


def hilbert(a: int, b: int, p: int) -> int:
    """The Hilbert symbol (a, b) at a prime p: 1 where z² = ax² + by² has a p-adic solution but 0, else -1.

    Source: Serre, A Course in Arithmetic (1973), chapter III, theorem 1.
    """
    alpha, u = _split(a, p)
    beta, v = _split(b, p)
    if p == 2:
        exponent = _half(u) * _half(v) + alpha * _eighth(v) + beta * _eighth(u)
        return -1 if exponent % 2 else 1
    symbol = -1 if alpha * beta * _half(p) % 2 else 1
    if beta % 2:
        symbol *= _legendre(u, p)
    if alpha % 2:
        symbol *= _legendre(v, p)
    return symbol


def _split(a: int, p: int) -> tuple[int, int]:
    exponent = 0
    while a % p == 0:
        a, exponent = a // p, exponent + 1
    return exponent, a


def _half(u: int) -> int:
    return (u - 1) // 2 % 2


def _eighth(u: int) -> int:
    return (u * u - 1) // 8 % 2


def _legendre(u: int, p: int) -> int:
    return 1 if pow(u, (p - 1) // 2, p) == 1 else -1


def _is_prime(p: int) -> bool:
    return all(p % d for d in range(2, isqrt(p) + 1))
