"""Numbers known exactly, or enclosed between two rationals."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from search.foundation.exact import power_root_above

ROOT_SCALE = 10**20
"""Roots of exact numbers are enclosed to one part in this."""


@dataclass(frozen=True, slots=True)
class Interval:
    """All that is known of a number: it is not below `low` and not above `high`."""

    low: Fraction
    high: Fraction

    @classmethod
    def exactly(cls, x: Fraction | int) -> Interval:
        """A number that is known."""
        return cls(Fraction(x), Fraction(x))

    def times(self, x: Fraction) -> Interval:
        """The number times x ≥ 0."""
        return Interval(self.low * x, self.high * x)

    def under(self, x: Fraction) -> Interval:
        """x ≥ 0 divided by the number, which must be above 0."""
        return Interval(x / self.high, x / self.low)

    def less_than_one_by(self) -> Interval:
        """1 minus the number."""
        return Interval(1 - self.high, 1 - self.low)

    def root(self, power: int) -> Interval:
        """The root of a number ≥ 0, to 20 digits."""
        above = power_root_above(self.high, power, ROOT_SCALE)
        if above**power == self.low:
            return Interval.exactly(above)
        below = power_root_above(self.low, power, ROOT_SCALE) - Fraction(1, ROOT_SCALE)
        return Interval(max(Fraction(0), below), above)

    def near(self, claimed: Fraction, tolerance: Fraction) -> bool:
        """Whether a claimed number may differ from this one by no more than the tolerance."""
        return self.low - tolerance <= claimed <= self.high + tolerance

    def agrees(self, claimed: Fraction, relative: Fraction) -> bool:
        """Whether a claimed number may differ from this one by no more than a part of its size."""
        return self.near(claimed, relative * max(abs(self.low), abs(self.high)))
