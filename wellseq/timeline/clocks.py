"""Arithmetic on clocks: exact times on common grids.

All times and clocks are exact seconds.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from fractions import Fraction
from functools import reduce


def finest(clocks: Iterable[Fraction]) -> Fraction:
    """The greatest time (s) of which every clock is a whole multiple; 1 s when there are none."""
    return reduce(_divisor, clocks, Fraction(0)) or Fraction(1)


def coarsest(clocks: Iterable[Fraction]) -> Fraction:
    """The least time (s) that is a whole multiple of every clock; 1 s when there are none."""
    return reduce(_multiple, clocks, Fraction(0)) or Fraction(1)


def _divisor(one: Fraction, other: Fraction) -> Fraction:
    top = math.gcd(one.numerator * other.denominator, other.numerator * one.denominator)
    return Fraction(top, one.denominator * other.denominator)


def _multiple(one: Fraction, other: Fraction) -> Fraction:
    if not one or not other:
        return one + other
    return one * other / _divisor(one, other)


def nearest_multiple(time_s: Fraction, clock_s: Fraction) -> Fraction:
    """The multiple of a clock nearest to a time; halves go up."""
    return math.floor(time_s / clock_s + Fraction(1, 2)) * clock_s


def next_multiple(time_s: Fraction, clock_s: Fraction) -> Fraction:
    """The first multiple of a clock that is not before a time."""
    return math.ceil(time_s / clock_s) * clock_s
