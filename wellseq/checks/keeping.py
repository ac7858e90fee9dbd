"""Which readings are worth keeping: what does not pass, and per group the pass of least margin.

A night of ten thousand steps measures a million numbers.  A report needs each step that is not
clearly right, and the one that came closest wherever all is well.
"""

from __future__ import annotations

from collections.abc import Hashable, Iterable, Iterator

import numpy as np
import numpy.typing as npt

from wellseq.base.finding import Limit, Reading, Verdict

Floats = npt.NDArray[np.float64]

FIGURES = 12
"""Significant figures of a quotient or sum that is judged, and of its limit: a ramp written exactly
at a slew must not fail by the dust of a division."""


def figures(values: npt.ArrayLike) -> Floats:
    """Values rounded to FIGURES significant figures; NaN, infinity and what is tiny stay."""
    array = np.asarray(values, dtype=float)
    sound = (np.abs(array) > 1e-200) & (np.abs(array) < 1e200)
    size = np.floor(np.log10(np.abs(np.where(sound, array, 1.0))))
    scale = 10.0 ** np.abs(FIGURES - 1 - size)
    up = FIGURES - 1 - size >= 0
    scaled = np.where(up, array * scale, array / scale)
    rounded = np.rint(scaled)
    return np.where(sound, np.where(up, rounded / scale, rounded * scale), array)


def telling(
    limit: Limit,
    low: npt.ArrayLike,
    high: npt.ArrayLike,
    groups: npt.ArrayLike,
    steps: npt.ArrayLike,
    bounds: npt.ArrayLike | None = None,
) -> list[int]:
    """Indices, rising, of the measurements worth a reading.

    `low` and `high` (n,) are the ends of the intervals measured, in the unit of `limit`; `bounds`
    (n,) replaces the limit's value where it differs from one measurement to the next; `groups` and
    `steps` (n,) are whole numbers.  Kept are, of what `Limit.judge_between` fails, and of what it
    finds unsure, the worst per group and step; of what passes, the least margin per group.  The
    first of equals is kept.
    """
    sign = 1.0 if limit.side == "at most" else -1.0
    ends = np.asarray(low, dtype=float), np.asarray(high, dtype=float)
    best, worst = (sign * end for end in (ends if sign > 0 else ends[::-1]))
    bound = sign * np.broadcast_to(
        np.asarray(limit.value if bounds is None else bounds, dtype=float), worst.shape
    )
    known = ~np.isnan(worst) & ~np.isnan(best) & np.isfinite(bound)
    passing = known & np.isfinite(worst) & (worst <= bound)
    failing = known & np.isfinite(best) & (best > bound) & ~passing
    margins = np.where(known, bound, -np.inf) - np.where(known, worst, 0.0)
    group, step = np.asarray(groups, dtype=np.int64), np.asarray(steps, dtype=np.int64)
    kept: list[int] = []
    for chosen, keys in (
        (passing, (group,)),
        (failing, (group, step)),
        (~passing & ~failing, (group, step)),
    ):
        kept.extend(_least_of_each(np.flatnonzero(chosen), margins, keys))
    return sorted(kept)


def _least_of_each(
    chosen: npt.NDArray[np.intp], margins: Floats, keys: tuple[npt.NDArray[np.int64], ...]
) -> list[int]:
    """Of the chosen indices, the one of least margin for each combination of keys."""
    if not len(chosen):
        return []
    mine = [key[chosen] for key in keys]
    order = np.lexsort((chosen, margins[chosen], *mine))
    new = np.zeros(len(order), dtype=bool)
    new[0] = True
    for key in mine:
        new[1:] |= key[order][1:] != key[order][:-1]
    return [int(index) for index in chosen[order][new]]


def numbered(keys: Iterable[Hashable]) -> list[int]:
    """The same whole number for the same key, counted from 0 as they come: groups for `telling`."""
    numbers: dict[Hashable, int] = {}
    return [numbers.setdefault(key, len(numbers)) for key in keys]


def worst(readings: Iterable[Reading]) -> Iterator[Reading]:
    """The readings that do not pass, as they come, then the least pass per subject and block."""
    least: dict[tuple[str, str], tuple[float, Reading]] = {}
    for reading in readings:
        verdict, margin = _judged(reading)
        if verdict is not Verdict.PASS:
            yield reading
            continue
        key = (reading.subject, reading.block)
        if key not in least or margin < least[key][0]:
            least[key] = (margin, reading)
    yield from (reading for _, reading in least.values())


def _judged(reading: Reading) -> tuple[Verdict, float]:
    limit = reading.limit
    if reading.between is None:
        verdict = limit.judge(reading.value, reading.uncertainty)
        return verdict, limit.margin(reading.value, reading.uncertainty)
    low, high = reading.between
    return limit.judge_between(low, high), limit.margin(high if limit.side == "at most" else low)
