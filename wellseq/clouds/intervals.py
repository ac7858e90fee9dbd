"""Arithmetic of figures that are above zero: products, powers and spans of intervals.

Sound for independent errors: the ends of the answer are met at ends of the inputs.  Units are the
caller's.
"""

from __future__ import annotations

from collections.abc import Iterable

from wellseq.clouds.figures import NOT_KNOWN, Figure


def times(*factors: Figure) -> Figure:
    """The product of figures that are not negative; any units."""
    value = low = high = 1.0
    for one in factors:
        value, low, high = value * one.value, low * one.low, high * one.high
    return Figure(value, low, high)


def plus(*terms: Figure) -> Figure:
    """The sum of figures of one unit."""
    return Figure(
        sum(one.value for one in terms),
        sum(one.low for one in terms),
        sum(one.high for one in terms),
    )


def power(base: Figure, exponent: float) -> Figure:
    """A figure above zero to a power; any unit."""
    ends = (base.low**exponent, base.high**exponent)
    return Figure(base.value**exponent, min(ends), max(ends))


def hull(figures: Iterable[Figure]) -> Figure:
    """The least interval around all figures of one unit, with the value of the first."""
    every = tuple(figures)
    if not every or not all(one.known for one in every):
        return NOT_KNOWN
    return Figure(every[0].value, min(one.low for one in every), max(one.high for one in every))


def widened(figure: Figure, share: float) -> Figure:
    """A figure whose interval reaches further by a share (0 to 1) of its ends."""
    return Figure(figure.value, figure.low * (1.0 - share), figure.high * (1.0 + share))
