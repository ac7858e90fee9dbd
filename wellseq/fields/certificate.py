"""Voltages that move, and regions of the axis → the least depth, with a certificate.

U(z, p) = U0(z) + Σ p_k D_k(z), every progress p_k anywhere in [0, 1] (n = 1: one ramp; n > 1:
several that move independently; n = 0: nothing moves).  For fixed closed regions W (the well) and
L or R (a barrier), D(p) = max_L U − min_W U is the largest of the affine functions
U(b, p) − U(w, p): it is convex, and each of them bounds it from below for every p (convex.py).
Points b and w lie anywhere on the axis: candidates are all intervals whose Bernstein bound beats
the best node, polished on the quintic.  A region that is too small costs depth, except that W must
not reach into another, deeper basin (following.py proves regions).

Shapes: base (ne,), moves (n, ne), regions are inclusive node indices.  Units: V, m.
Accuracy: upper − lower ≤ tolerance; the interpolation's own error is taken off the lower bound and
added to the upper.  Tests: tests/fields/test_certificate.py.
Source: maximum of affine functions: R. T. Rockafellar, Convex Analysis (Princeton 1970) sec. 5.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from wellseq.fields.convex import TOLERANCE_V, Line, Oracle, SideBound, least
from wellseq.fields.hermite import POWERS, FloatArray, bernstein, controls

if TYPE_CHECKING:
    from wellseq.fields.field import Field

__all__ = ["Certificate", "Region", "SideBound", "certify", "depth_oracle", "extent", "oscillation"]

Region = tuple[int, int]
_DUST_V = 1e-9
_GRID = np.linspace(0.0, 1.0, 9)
_GRID_WEIGHTS = bernstein(_GRID, 5).T.copy()


@dataclass(frozen=True, slots=True)
class Certificate:
    """Both sides of a well; a side that was not asked for is None."""

    left: SideBound | None
    right: SideBound | None

    @property
    def least(self) -> SideBound | None:
        """The side with the smaller lower bound; a bound that is not a number comes first."""
        sides = [side for side in (self.left, self.right) if side is not None]
        return min(
            sides, key=lambda side: (side.lower_V == side.lower_V, side.lower_V), default=None
        )


class _Region:
    """The greatest value of sense · U over a region, as an affine function of the progress."""

    def __init__(self, nodes: FloatArray, first: int, z_m: float, step_m: float, sense: int):
        # nodes (3, n + 1, m): φ, φ′, φ″ of base and moves; a region of one node has no interval.
        self.nodes = sense * nodes[0]
        self.controls = sense * np.moveaxis(controls(nodes, step_m), 0, 1)
        self.flat = np.ascontiguousarray(self.controls).reshape(nodes.shape[1], -1)
        self.start_m = z_m + first * step_m
        self.step_m = step_m

    def peak(self, weights: FloatArray) -> tuple[FloatArray, float]:
        """The line (n + 1,) of the highest point at `weights` = (1, p), and its z (m)."""
        value = weights @ self.nodes
        node = int(value.argmax())
        best, place, line = float(value[node]), float(node), self.nodes[:, node]
        if value.size == 1:
            return line, self.start_m
        control = (weights @ self.flat).reshape(6, -1)
        bound = control.max(axis=0)
        # The most promising interval first: its top usually beats the bounds of all others.
        i = int(bound.argmax())
        while bound[i] > best + _DUST_V:
            fraction, top = _top(control[:, i])
            if top > best:
                best, place = top, i + fraction
                line = self.controls[:, :, i] @ np.array(_weights(fraction))
            bound[i] = -np.inf
            i = int(bound.argmax())
        return line, self.start_m + place * self.step_m


def _weights(t: float) -> tuple[float, ...]:
    """The six Bernstein polynomials of degree 5 at one fraction."""
    u = 1.0 - t
    uu, tt = u * u, t * t
    return (
        uu * uu * u,
        5 * uu * uu * t,
        10 * uu * u * tt,
        10 * uu * tt * t,
        5 * u * tt * tt,
        tt * tt * t,
    )


def _top(control: FloatArray) -> tuple[float, float]:
    """Place (0 … 1) and value of the greatest value of a quintic on its interval."""
    grid = _GRID_WEIGHTS @ control
    at = int(grid.argmax())
    c0, c1, c2, c3, c4, c5 = (POWERS @ control).tolist()
    low, high = max(0.0, (at - 1) / 8), min(1.0, (at + 1) / 8)
    t = at / 8
    for _ in range(6):
        slope = c1 + t * (2 * c2 + t * (3 * c3 + t * (4 * c4 + t * 5 * c5)))
        bend = 2 * c2 + t * (6 * c3 + t * (12 * c4 + t * 20 * c5))
        if bend >= 0.0:
            break
        last, t = t, min(high, max(low, t - slope / bend))
        if abs(t - last) < 1e-9:
            break
    value = c0 + t * (c1 + t * (c2 + t * (c3 + t * (c4 + t * c5))))
    return (t, value) if value >= grid[at] else (at / 8, float(grid[at]))


def depth_oracle(
    field: Field, vectors: FloatArray, well: Region | float, barrier: Region
) -> Oracle:
    """The supporting line of D(p) at any p, for `vectors` (n + 1, ne): base, then moves, of U (V).

    `well` is a region, or a fixed level of U in V in place of the bottom.
    """
    return _above(_floor(field, vectors, well), _region(field, vectors, barrier, 1))


def _above(floor: _Region | float, top: _Region) -> Oracle:
    def above(progress: FloatArray) -> Line:
        weights = np.concatenate(((1.0,), progress))
        line, barrier_m = top.peak(weights)
        if isinstance(floor, float):
            lowered = line.copy()
            lowered[0] -= floor
            return Line(lowered, barrier_m, float("nan"))
        bottom, well_m = floor.peak(weights)
        return Line(line + bottom, barrier_m, well_m)

    return above


def _floor(field: Field, vectors: FloatArray, well: Region | float) -> _Region | float:
    return well if isinstance(well, float) else _region(field, vectors, well, -1)


def _region(field: Field, vectors: FloatArray, region: Region, sense: int) -> _Region:
    first, last = region
    if not 0 <= first <= last < field.z_m.size:
        raise ValueError(f"no region of the axis: nodes {first} to {last}")
    nodes = np.matmul(vectors, field.phi[:3, :, first : last + 1])
    return _Region(nodes, first, float(field.z_m[0]), field.step_m, sense)


def certify(
    field: Field,
    sign: float,
    base: FloatArray,
    moves: FloatArray,
    well: Region,
    left: Region | None,
    right: Region | None,
    tolerance_V: float = TOLERANCE_V,
    bottom: float | None = None,
) -> Certificate:
    """The least depth on each side over all progresses in [0, 1]^n.

    `base` (ne,) and `moves` (n, ne) in V; regions are inclusive node indices; `bottom` (V of U =
    sign·φ) replaces the bottom of the well.  Voltages that are not finite give bounds that are not
    numbers.  Raises ValueError for a region that is none.  Source: the head of this file.
    """
    moves = np.asarray(moves, dtype=float).reshape(-1, base.size)
    kept = np.flatnonzero(np.any(moves != 0.0, axis=1))
    vectors = sign * np.vstack((base[None, :], moves[kept]))
    slack_V = 2.0 * field.error_V_per_V * float(np.abs(vectors).sum())
    known = np.isfinite(vectors).all() and (bottom is None or np.isfinite(bottom))
    floor = _floor(field, vectors, well if bottom is None else float(bottom)) if known else 0.0

    def bound(barrier: Region | None) -> SideBound | None:
        if barrier is None:
            return None
        if not known:
            nan = float("nan")
            return SideBound(nan, nan, (nan,) * len(moves), nan, nan)
        oracle = _above(floor, _region(field, vectors, barrier, 1))
        found = least(oracle, kept.size, tolerance_V)
        progress = np.zeros(len(moves))
        progress[kept] = found.progress
        return SideBound(
            found.lower_V - slack_V,
            found.upper_V + slack_V + 2 * _DUST_V,
            tuple(progress.tolist()),
            found.barrier_z_m,
            found.well_z_m,
        )

    return Certificate(bound(left), bound(right))


def oscillation(
    field: Field, well: Region | None, left: Region | None, right: Region | None
) -> FloatArray:
    """osc_e = max |φ_e(b) − φ_e(w)| (ne,), V per V, b in the barrier regions, w in the well.

    Without a well (a level counted from ground) it is max |φ_e(b)|.  Bounded by Bernstein controls,
    so never too small; the sum of deviation times oscillation is what comes off a depth.
    """
    nothing = np.zeros(len(field.electrodes))
    inner_low, inner_high = (nothing, nothing) if well is None else extent(field, well)
    result = nothing
    for region in (left, right):
        if region is not None:
            low, high = extent(field, region)
            result = np.maximum(result, np.maximum(high - inner_low, inner_high - low))
    return result


def extent(field: Field, region: Region) -> tuple[FloatArray, FloatArray]:
    """Bounds (ne,), (ne,) of the least and greatest value of each unit potential over a region."""
    first, last = region
    nodes = field.phi[:3, :, first : last + 1]
    if first == last:
        return nodes[0, :, 0], nodes[0, :, 0]
    control = controls(nodes, field.step_m)
    return control.min(axis=(0, 2)), control.max(axis=(0, 2))
