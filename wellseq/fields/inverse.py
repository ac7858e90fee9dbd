"""A wished-for path of the own depth on one side → voltages of the moving electrodes, or why none.

The electrodes named move together by the same shift x (V).  D(x), the own vacuum depth towards
them, is followed along the branch that begins at x = 0, in the direction in which it falls; it is
convex as long as one pair of regions serves, so Newton's rule comes from one side and never
overshoots.  Breakpoints are joined by straight lines in time.  Between two of them D lies below its
chord, and the certificate bounds how far: a breakpoint is added until D follows the wish within
1 mV or 1 % (the larger) at every instant, proved and not sampled.

Shapes: vector (ne,), moving (k,).  Units: V, m, fractions of the duration.
Accuracy: tests/fields/test_inverse.py.  Source: certificate.py, following.py.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import exp, isfinite, log, sqrt
from typing import TYPE_CHECKING, Literal

import numpy as np

from wellseq.fields.certificate import depth_oracle
from wellseq.fields.convex import Line, least
from wellseq.fields.following import locate, prove
from wellseq.fields.hermite import FloatArray
from wellseq.fields.minima import RIPPLE_V, extrema, landscape

if TYPE_CHECKING:
    from wellseq.fields.field import Field

Side = Literal["left", "right"]
Reason = Literal[
    "the next electrode has become the barrier",
    "no voltage within the range",
    "the depth does not fall",
    "the depth is already less",
    "no well holds the cloud",
]
TOLERANCE_V = 1e-3
TOLERANCE_SHARE = 0.01
_GOAL = 0.8
_SOLVED_V = 1e-7
_FRACTION_MIN = 1e-6
_TRIALS_MAX = 100


@dataclass(frozen=True, slots=True)
class Path:
    """Straight pieces of the moving electrodes' voltages.

    At `fractions` (n,) of the duration they stand at `volts` (n, k), with the own depth `depths_V`
    (n,); `worst_error_V` bounds |depth − wish| over all instants.
    """

    fractions: FloatArray
    volts: FloatArray
    depths_V: FloatArray
    worst_error_V: float


@dataclass(frozen=True, slots=True)
class Impossible:
    """Why no path exists: the least depth reached on the branch, and the voltages there (V)."""

    reason: Reason
    reached_V: float
    at_volts: tuple[float, ...]


@dataclass(frozen=True, slots=True)
class _View:
    """The well at one shift: its place and depth, and how the depth changes with the shift."""

    shift_V: float
    z_m: float
    depth_V: float
    slope: float
    barrier_m: float


@dataclass(frozen=True, slots=True)
class _Wish:
    """The depth wished for at a fraction of the duration: straight, or by equal ratios."""

    start_V: float
    end_V: float
    equal_ratios: bool

    def at(self, fraction: float) -> float:
        if self.equal_ratios:
            return self.start_V * exp(fraction * log(self.end_V / self.start_V))
        return self.start_V + fraction * (self.end_V - self.start_V)

    def sag_V(self, low: float, high: float) -> float:
        """How far the wish lies below its chord between two fractions, at most (V)."""
        if not self.equal_ratios:
            return 0.0
        first, last = self.at(low), self.at(high)
        ratio = last / first
        if abs(ratio - 1.0) < 1e-9:
            return 0.0
        slope = (ratio - 1.0) / log(ratio)
        return first * (1.0 + (ratio - 1.0) * log(slope) / log(ratio) - slope)


def evaporation_path(
    field: Field,
    sign: float,
    vector: FloatArray,
    moving: Sequence[int],
    z_m: float,
    to_V: float,
    ranges_V: Sequence[tuple[float, float]],
    equal_ratios: bool = False,
) -> Path | Impossible:
    """Voltages that take the own depth towards the moving electrodes from what it is to `to_V` (V).

    `vector` (ne,) V holds at the start, the cloud is at `z_m`; `moving` are indices of electrodes,
    `ranges_V` the least and greatest voltage of each.  The side is that of the moving electrodes.
    Raises ValueError when nothing moves, or a range or `to_V` is not a finite voltage.
    """
    if not moving or len(ranges_V) != len(moving):
        raise ValueError("evaporation needs electrodes that move, and a range for each")
    if not isfinite(to_V) or not np.isfinite(vector).all() or np.isnan(ranges_V).any():
        raise ValueError("evaporation needs finite voltages")
    ripple_V = min(RIPPLE_V, abs(to_V) / 10)
    found = locate(field, sign, vector, z_m, ripple_V)
    place_m = found.z_m if found else z_m
    branch = _Branch(field, sign, vector, tuple(moving), place_m, ranges_V, ripple_V)
    here = branch.look(0.0, place_m)
    if here is None:
        return branch.refusal("no well holds the cloud", None)
    if to_V >= here.depth_V:
        return branch.refusal("the depth is already less", here)
    if to_V <= 0.0 or abs(here.slope) < 1e-9:
        return branch.refusal("the depth does not fall", here)
    branch.head(here)
    return _march(branch, here, _Wish(here.depth_V, to_V, equal_ratios))


def _march(branch: _Branch, here: _View, wish: _Wish) -> Path | Impossible:
    """Breakpoints from 0 to 1, each as far from the last as the tolerance allows."""
    fractions, views, worst_V, stride = [0.0], [here], 0.0, 1.0
    while fractions[-1] < 1.0:
        fraction = min(1.0, fractions[-1] + stride)
        target_V = wish.at(fraction)
        view = branch.solve(target_V, views[-1])
        if isinstance(view, Impossible):
            return view
        goal_V = _GOAL * max(TOLERANCE_V, TOLERANCE_SHARE * target_V)
        error_V = branch.error_V(views[-1], view, wish.sag_V(fractions[-1], fraction))
        if error_V is not None and error_V <= goal_V:
            worst_V = max(worst_V, error_V)
            fractions.append(fraction)
            views.append(view)
            stride = (fraction - fractions[-2]) * _growth(goal_V, error_V, 3.0)
            continue
        stride = (fraction - fractions[-1]) * (
            0.5 if error_V is None else _growth(goal_V, error_V, 0.7)
        )
        if stride < _FRACTION_MIN:
            return branch.refusal(branch.blame(views[-1]), views[-1])
    shifts = np.array([view.shift_V for view in views])
    return Path(
        np.array(fractions),
        branch.vector[list(branch.moving)] + shifts[:, None],
        np.array([view.depth_V for view in views]),
        worst_V,
    )


def _growth(goal_V: float, error_V: float, most: float) -> float:
    """The factor for the next stride: errors grow as the square of the stride."""
    return most if error_V <= 0.0 else min(most, max(0.1, 0.9 * sqrt(goal_V / error_V)))


class _Branch:
    """The own depth on one side as a function of the shift."""

    def __init__(
        self,
        field: Field,
        sign: float,
        vector: FloatArray,
        moving: tuple[int, ...],
        z_m: float,
        ranges_V: Sequence[tuple[float, float]],
        ripple_V: float,
    ) -> None:
        self.field, self.sign, self.vector, self.moving = field, sign, vector, moving
        self.ripple_V = ripple_V
        self.low_V = max(low - vector[e] for (low, _), e in zip(ranges_V, moving, strict=True))
        self.high_V = min(high - vector[e] for (_, high), e in zip(ranges_V, moving, strict=True))
        spans = [field.span_m(field.electrodes[e]) for e in moving]
        middle_m = (min(s[0] for s in spans) + max(s[1] for s in spans)) / 2
        self.side: Side = "right" if middle_m >= z_m else "left"
        self.direction = 0.0
        self.limit_V = 0.0

    def head(self, here: _View) -> None:
        """Settle in which direction the depth falls, and how far (V) the range lets it go."""
        self.direction = -1.0 if here.slope > 0 else 1.0
        self.limit_V = max(0.0, self.high_V if self.direction > 0 else -self.low_V)

    def at(self, shift_V: float) -> FloatArray:
        """All voltages (ne,) at a shift."""
        result = self.vector.copy()
        result[list(self.moving)] += shift_V
        return result

    def look(self, shift_V: float, z_m: float) -> _View | None:
        """The well that z slides down to, at a shift; None when there is none."""
        curve = self.field.curve(self.sign * self.at(shift_V))
        found = landscape(curve, self.ripple_V)
        index = found.basin(z_m)
        if index is None:
            return None
        barrier = index + (self.side == "right")
        top_m, bottom_m = found.barrier_m[barrier], found.minimum_m[index]
        share = self._share(float(top_m)) - self._share(float(bottom_m))
        depth_V = found.barrier_V[barrier] - found.minimum_V[index]
        return _View(shift_V, float(bottom_m), float(depth_V), self.sign * share, float(top_m))

    def _share(self, z_m: float) -> float:
        unit = np.zeros(len(self.vector))
        unit[list(self.moving)] = 1.0
        return float(self.field.at(unit, z_m))

    def solve(self, target_V: float, here: _View) -> _View | Impossible:
        """The first shift beyond `here` on the branch at which the depth is the target."""
        good, beyond = here, None
        for _ in range(_TRIALS_MAX):
            if abs(good.depth_V - target_V) <= _SOLVED_V:
                return good
            reach = abs(good.shift_V) + (good.depth_V - target_V) / abs(good.slope)
            if beyond is not None and not reach < beyond:
                reach = (abs(good.shift_V) + beyond) / 2
            reach = min(reach, self.limit_V)
            if reach <= abs(good.shift_V) * (1 + 1e-14):
                break
            view = self.look(self.direction * reach, good.z_m)
            if view is None or not self._falls(view, good) or view.depth_V < target_V - _SOLVED_V:
                beyond = reach
                continue
            good = view
        return self.refusal(self.blame(good), good)

    def _falls(self, view: _View, good: _View) -> bool:
        return view.slope * self.direction < 0.0 and view.depth_V < good.depth_V

    def blame(self, view: _View) -> Reason:
        """Why the depth does not fall any further from here."""
        if self._owner(view.barrier_m) not in self.moving:
            return "the next electrode has become the barrier"
        if abs(view.shift_V) >= self.limit_V * (1 - 1e-12):
            return "no voltage within the range"
        return "the depth does not fall"

    def _owner(self, z_m: float) -> int | None:
        """The electrode whose wall (to the middle of the gaps) is at z; None beyond the stack."""
        spans = [self.field.span_m(name) for name in self.field.electrodes]
        if not spans[0][0] <= z_m <= spans[-1][1]:
            return None
        middles = [(a[1] + b[0]) / 2 for a, b in pairwise(spans)]
        return int(np.searchsorted(middles, z_m))

    def refusal(self, reason: Reason, view: _View | None) -> Impossible:
        """The answer that no path exists."""
        reached_V = view.depth_V if view else 0.0
        volts = self.at(view.shift_V if view else 0.0)[list(self.moving)]
        return Impossible(reason, reached_V, tuple(float(v) for v in volts))

    def error_V(self, here: _View, view: _View, sag_V: float) -> float | None:
        """Bound of |depth − wish| on the straight piece between two views; None when not proved."""
        start, end = self.at(here.shift_V), self.at(view.shift_V)
        still = np.zeros_like(start)
        proven = prove(self.field, self.sign, start, end, here.z_m, still, self.ripple_V)
        if proven is None:
            return None
        closed = proven.right_closed if self.side == "right" else proven.left_closed
        inside = self.field.z_m[proven.core[0]] <= view.z_m <= self.field.z_m[proven.core[1]]
        if not (closed and inside):
            return None
        region = proven.right if self.side == "right" else proven.left
        vectors = self.sign * np.vstack((start, end - start))
        oracle = depth_oracle(self.field, vectors, proven.core, region)
        chord = np.array([here.depth_V, view.depth_V - here.depth_V])

        def below_chord(progress: FloatArray) -> Line:
            line = oracle(progress)
            return Line(line.weights - chord, line.barrier_z_m, line.well_z_m)

        error_V = 2 * self.field.error_V_per_V * float(np.abs(vectors).sum())
        dip_V = -least(below_chord, 1, 1e-6).lower_V
        return max(dip_V, sag_V) + error_V + _SOLVED_V


def way_out(field: Field, sign: float, vector: FloatArray, z_m: float, side: Side) -> float:
    """The highest rise of U (V) still to come beyond the top of the own barrier, going outward.

    0 when U falls all the way to the grounded tube outside.  NaN when no well holds z (m).
    """
    curve = field.curve(sign * vector)
    found = landscape(curve)
    index = found.basin(z_m)
    if index is None:
        return float("nan")
    top_m = found.barrier_m[index + (side == "right")]
    place_m, level_V, _ = extrema(curve)
    beyond = place_m > top_m if side == "right" else place_m < top_m
    level_V = level_V[beyond] if side == "right" else level_V[beyond][::-1]
    level_V = np.append(level_V, 0.0)
    rise_V = float(np.max(level_V - np.minimum.accumulate(level_V)))
    dust_V = 2 * field.error_V_per_V * float(np.abs(vector).sum())
    return rise_V if rise_V > dust_V else 0.0
