"""Finite fields GF(q) as tables of powers of a primitive element."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from itertools import product


def prime_power(q: int) -> tuple[int, int] | None:
    """(p, a) with q = pᵃ and p prime, or None."""
    if q < 2:
        return None
    p = next((d for d in range(2, int(q**0.5) + 1) if q % d == 0), q)
    a = 0
    while q % p == 0:
        q //= p
        a += 1
    return (p, a) if q == 1 else None


@dataclass(frozen=True, slots=True)
class Field:
    """GF(q); an element is a number below q whose digits to the base p are its coefficients.

    Parameters
    ----------
    p, a : characteristic and degree
    powers : the q − 1 powers of a primitive element, from 1 on
    logarithm : for each element but 0 its exponent; -1 for 0
    """

    p: int
    a: int
    powers: tuple[int, ...]
    logarithm: tuple[int, ...]

    @property
    def q(self) -> int:
        """Number of elements."""
        return len(self.logarithm)

    def plus(self, x: int, y: int) -> int:
        """x + y: digits added without carry."""
        p = self.p
        total, place = 0, 1
        while x or y:
            total += (x + y) % p * place
            x, y, place = x // p, y // p, place * p
        return total

    def times(self, x: int, y: int) -> int:
        """x · y by logarithms."""
        if not (x and y):
            return 0
        return self.powers[(self.logarithm[x] + self.logarithm[y]) % (self.q - 1)]


@cache
def field(q: int) -> Field:
    """The field of q elements, from the first polynomial whose root is primitive.

    Raises
    ------
    ValueError : q is not a prime power
    """
    parts = prime_power(q)
    if parts is None:
        raise ValueError(f"{q} is not a prime power")
    p, a = parts
    for lower in product(range(p), repeat=a):
        powers = _powers(p, lower)
        if len(powers) == q - 1:
            logarithm = [-1] * q
            for exponent, x in enumerate(powers):
                logarithm[x] = exponent
            return Field(p, a, tuple(powers), tuple(logarithm))
    raise ValueError(f"no primitive polynomial for {q}")


def _powers(p: int, lower: tuple[int, ...]) -> list[int]:
    """Powers of a root of xᵃ = Σ lower_i xⁱ until they come back to 1 or die out."""
    element = [1] + [0] * (len(lower) - 1)
    powers: list[int] = []
    seen = set[int]()
    while True:
        number = sum(digit * p**i for i, digit in enumerate(element))
        if number == 0 or number in seen:
            return powers if number == 1 else []
        seen.add(number)
        powers.append(number)
        top = element[-1]
        element = [(below + top * c) % p for below, c in zip([0, *element[:-1]], lower, strict=True)]
