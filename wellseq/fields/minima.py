"""The potential along the axis → its wells: every local minimum of U = sign · φ and its depths.

Extrema are the zeros of U′: intervals where the Bernstein controls of U′ differ in sign are
searched at sixteen points each, so two zeros between neighbouring nodes are found as well; each is
polished by Newton's rule.  Minima are merged across a barrier lower than the *ripple* (flat bottoms
have dimples of no meaning): always the lowest barrier first, the shallower minimum is dropped.
Outside is the grounded tube at 0 V, a neighbour like any other.  *Own* depth reaches to the nearest
remaining neighbour, *trap* depth out to the ends and the outside.

Units: m, V; depths in V per elementary charge; curvature V/m².
Accuracy: tests/fields/test_minima.py.  Source of the merging: H. Edelsbrunner, J. Harer,
Computational Topology (AMS 2010) ch. VII (persistence of minima).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from wellseq.fields.hermite import POWERS, Curve, FloatArray

RIPPLE_V = 1e-3
_POINTS = 16


@dataclass(frozen=True, slots=True)
class Well:
    """A local minimum of U = sign · φ on the axis.

    `depth_V` is the own depth on the lower side, `depth_left_V` and `depth_right_V` on each (to the
    nearest neighbouring minimum); `trap_depth_V` reaches out to the ends, lower side;
    `curvature_V_m2` is U″ ≥ 0, `potential_V` is φ (not U) at the minimum.
    """

    z_m: float
    depth_V: float
    depth_left_V: float
    depth_right_V: float
    trap_depth_V: float
    curvature_V_m2: float
    potential_V: float


@dataclass(frozen=True, slots=True)
class Landscape:
    """Minima (k,) of U from left to right, and the barriers (k + 1,) around them; m and V.

    Barrier i lies left of minimum i.  An outermost barrier without an extremum is the outside (0
    V), placed at the end of the axis.  `low_m`, `high_m` (k,): span of the minima that share one
    floor.
    """

    minimum_m: FloatArray
    minimum_V: FloatArray
    barrier_m: FloatArray
    barrier_V: FloatArray
    low_m: FloatArray
    high_m: FloatArray

    def basin(self, z_m: float) -> int | None:
        """The number of the minimum that z slides down to; None when it slides out of an end."""
        index = int(np.searchsorted(self.barrier_m, z_m, side="right")) - 1
        return index if 0 <= index < self.minimum_m.size else None


def extrema(curve: Curve) -> tuple[FloatArray, FloatArray, FloatArray]:
    """All extrema from left to right: z (m), U (V), and +1 for minima, −1 for maxima; (k,) each.

    The curve remembers them.
    """
    if curve.turns is None:
        curve.turns = _extrema(curve)
    return curve.turns


def _extrema(curve: Curve) -> tuple[FloatArray, FloatArray, FloatArray]:
    nodes = curve.nodes[1]
    slope_low, slope_high = curve.bounds(1)
    mixed = np.flatnonzero((slope_high >= 0) & (slope_low <= 0))
    inner = (mixed[:, None] + np.arange(1, _POINTS) / _POINTS).ravel()
    place = np.concatenate((np.arange(nodes.size), inner))
    value = np.concatenate((nodes, curve.at(curve.start_m + curve.step_m * inner, 1)))
    order = np.argsort(place, kind="stable")
    place, value = place[order], value[order]
    moving = np.flatnonzero(value)
    place, value = place[moving], value[moving]
    turn = np.flatnonzero(np.signbit(value[:-1]) != np.signbit(value[1:]))
    z_m = _polish(curve, place[turn], place[turn + 1])
    return z_m, curve.at(z_m), np.sign(value[turn + 1])


def _polish(curve: Curve, low: FloatArray, high: FloatArray) -> FloatArray:
    """Zeros (m) of U′ between brackets given in steps, by Newton's rule kept inside them."""
    interval = np.floor((low + high) / 2)
    low, high = np.clip(low - interval, 0.0, 1.0), np.clip(high - interval, 0.0, 1.0)
    power = POWERS @ curve.controls(1)[:, interval.astype(np.intp)]
    t = (low + high) / 2
    for _ in range(5):
        slope, bend = power[5], 0.0
        for coefficient in power[4::-1]:
            bend = bend * t + slope
            slope = slope * t + coefficient
        t = np.clip(t - slope / np.where(bend == 0.0, np.inf, bend), low, high)
    return np.asarray(curve.start_m + curve.step_m * (interval + t))


def landscape(curve: Curve, ripple_V: float = RIPPLE_V) -> Landscape:
    """The wells of U after merging minima whose separating barrier is below `ripple_V` (V)."""
    z_m, value, kind = extrema(curve)
    ends = (curve.start_m, curve.start_m + curve.step_m * (curve.nodes.shape[1] - 1))
    if kind.size and kind[0] > 0:
        z_m, value = np.append(ends[0], z_m), np.append(max(0.0, curve.nodes[0, 0]), value)
    if kind.size and kind[-1] > 0:
        z_m, value = np.append(z_m, ends[1]), np.append(value, max(0.0, curve.nodes[0, -1]))
    if z_m.size < 3:
        empty = np.empty(0)
        return Landscape(empty, empty, empty, empty, empty, empty)
    kept = _merge(value, ripple_V)
    low, high = _floor(value, kept, ripple_V)
    minimum, barrier = kept[1::2], kept[::2]
    return Landscape(
        z_m[minimum], value[minimum], z_m[barrier], value[barrier], z_m[low], z_m[high]
    )


def _merge(value: FloatArray, ripple_V: float) -> list[int]:
    """Indices kept of a sequence barrier, minimum, barrier, …, barrier."""
    kept = list(range(value.size))
    while len(kept) > 2:
        level = value[kept]
        rise = np.minimum(level[:-1:2], level[2::2]) - level[1::2]
        least = int(rise.argmin())
        if not rise[least] < ripple_V:
            break
        at = 2 * least
        start = at if level[at] <= level[at + 2] else at + 1
        del kept[start : start + 2]
    return kept if len(kept) > 2 else []


def _floor(value: FloatArray, kept: list[int], ripple_V: float) -> tuple[list[int], list[int]]:
    """For each kept minimum the outermost minima reached without rising above it by the ripple."""
    low, high = [], []
    for left, minimum, right in zip(kept[:-2:2], kept[1::2], kept[2::2], strict=True):
        first = last = minimum
        while first - 2 > left and value[first - 1] <= value[minimum] + ripple_V:
            first -= 2
        while last + 2 < right and value[last + 1] <= value[minimum] + ripple_V:
            last += 2
        low.append(first)
        high.append(last)
    return low, high


def wells(
    curve: Curve,
    charge_sign: float,
    between_m: tuple[float, float] | None = None,
    ripple_V: float = RIPPLE_V,
) -> list[Well]:
    """All wells of U (the curve of sign · φ, V) from left to right, inside `between_m` (m)."""
    found = landscape(curve, ripple_V)
    result = []
    bend = curve.at(found.minimum_m, 2)
    for i, (z_m, bottom_V) in enumerate(zip(found.minimum_m, found.minimum_V, strict=True)):
        if between_m is not None and not between_m[0] <= z_m <= between_m[1]:
            continue
        left_V, right_V = found.barrier_V[i] - bottom_V, found.barrier_V[i + 1] - bottom_V
        top_V = min(found.barrier_V[: i + 1].max(), found.barrier_V[i + 1 :].max())
        well = Well(
            z_m=float(z_m),
            depth_V=float(min(left_V, right_V)),
            depth_left_V=float(left_V),
            depth_right_V=float(right_V),
            trap_depth_V=float(top_V - bottom_V),
            curvature_V_m2=max(0.0, float(bend[i])),
            potential_V=float(bottom_V / charge_sign),
        )
        result.append(well)
    return result
