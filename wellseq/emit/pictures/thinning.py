"""Many points of a curve → few, none of its extremes lost.

The course along the axis is cut into buckets of equal width; of every bucket the first, the last,
the least and the greatest point stay, in their order.  So every point that is left is one of the
curve's own, and within any bucket both curves reach equally far up and down.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Whole = npt.NDArray[np.intp]


def keep(place: Floats, value: Floats, low: float, high: float, buckets: int) -> Whole:
    """Indices, rising, of the points to keep of a curve, both (n,), `place` never falling.

    `buckets` of equal width lie between `low` and `high`; at most four points of each are kept.
    Points that are not finite in value neither count as extremes nor are they lost.
    Raises ValueError for lengths that differ or no bucket.
    """
    if place.shape != value.shape or place.ndim != 1:
        raise ValueError("a curve has one value for each place")
    if buckets < 1:
        raise ValueError("a curve needs at least one bucket")
    if len(place) <= 4 * buckets:
        return np.arange(len(place))
    width = (high - low) / buckets or 1.0
    bucket = np.clip(np.floor((place - low) / width), 0, buckets - 1).astype(np.intp)
    bucket = np.maximum.accumulate(bucket)
    starts = np.flatnonzero(np.diff(bucket, prepend=-1))
    ends = np.append(starts[1:], len(place)) - 1
    odd = ~np.isfinite(value)
    lowest = _first_at(np.where(odd, np.inf, value), starts, ends, np.minimum)
    highest = _first_at(np.where(odd, -np.inf, value), starts, ends, np.maximum)
    # Where something unknown begins and ends must stay visible.
    change = np.flatnonzero(np.diff(odd.astype(np.int8)))
    return np.unique(np.concatenate((starts, ends, lowest, highest, change, change + 1)))


def _first_at(value: Floats, starts: Whole, ends: Whole, pick: np.ufunc) -> Whole:
    """The first index of each bucket at which its extreme is reached."""
    extreme = np.repeat(pick.reduceat(value, starts), ends - starts + 1)
    at = np.where(value == extreme, np.arange(len(value)), len(value))
    return np.asarray(np.minimum.reduceat(at, starts))
