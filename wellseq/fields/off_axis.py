"""A solved bore → the potential off the axis, to 0.9 of the local radius.

Away from the steps: the wall part by the Fourier box on the cylinder of radius r, the openings by
their modes, as many as the distance to the step asks for.  Closer to a step than a fiftieth of the
distance to its edge the potential is a polynomial through ten places on both sides of the plane; it
is analytic there.  Where the cylinder meets the annular face, the other side is the odd image.

Shapes: places (n,), voltages (ne,).  Units: m, V.
Accuracy: 1e-6 V/V, tests/fields/test_off_axis.py.  Source: stepped.py, opening.py.
"""

from __future__ import annotations

from math import ceil

import numpy as np

from wellseq.fields.bore import Section
from wellseq.fields.hermite import Curve, FloatArray
from wellseq.fields.stepped import Matching
from wellseq.fields.tube import RADIUS_MAX, SLOWEST_MODE, Axis, Box

_NEAR_SHARE = 0.02
_NEAR_LEAST = 1e-3
_PLACES = np.array([-5.0, -4.0, -3.0, -2.0, -1.0, 1.0, 2.0, 3.0, 4.0, 5.0])
_TAIL_RADII = 8.0


def potential_at(solved: Matching, vector: FloatArray, z_m: FloatArray, r_m: float) -> FloatArray:
    """Potential in V (n,) at places (n,) along the axis and a distance r from it, electrodes at
    `vector` (ne,) V.

    Raises ValueError when r is beyond 0.9 of the bore's radius at one of the places.
    """
    radius_m = solved.bore.radius_at(z_m)
    beyond = r_m > RADIUS_MAX * radius_m * (1 + 1e-12)
    if beyond.any():
        raise ValueError(
            f"r = {r_m:g} m is beyond {RADIUS_MAX:g} of the bore radius "
            f"{float(radius_m[beyond].min()):g} m at z = {float(z_m[beyond][0]):g} m"
        )
    return _potential(solved, vector, z_m, abs(r_m))


def _potential(solved: Matching, vector: FloatArray, z_m: FloatArray, r_m: float) -> FloatArray:
    result = np.empty(z_m.size)
    left = np.ones(z_m.size, dtype=bool)
    for number, step in enumerate(solved.bore.steps):
        near_m = step.radius_m * max(_NEAR_LEAST, _NEAR_SHARE * abs(1 - r_m / step.radius_m))
        close = left & (np.abs(z_m - step.z_m) < near_m)
        if close.any():
            result[close] = _across(solved, vector, number, z_m[close], r_m, near_m)
            left &= ~close
    planes = np.array([step.z_m for step in solved.bore.steps])
    where = np.searchsorted(planes, z_m)
    for number in range(len(solved.bore.sections)):
        mine = left & (where == number)
        if mine.any():
            result[mine] = _inside(solved, vector, number, z_m[mine], r_m)
    return result


def _across(
    solved: Matching, vector: FloatArray, number: int, z_m: FloatArray, r_m: float, near_m: float
) -> FloatArray:
    """Close to a step: the polynomial through places on both sides of its plane."""
    step = solved.bore.steps[number]
    offset = _PLACES * near_m
    values = np.empty(offset.size)
    level = float(vector[step.face])
    after = solved.bore.sections[number + 1].radius_m > step.radius_m
    for side, beside in ((-1.0, number), (1.0, number + 1)):
        here = np.sign(offset) == side
        if r_m < step.radius_m or (side > 0) == after:
            values[here] = _inside(solved, vector, beside, step.z_m + offset[here], r_m)
    if r_m >= step.radius_m:
        known = (offset > 0) == after
        values[~known] = 2 * level - values[known][::-1]
    return _lagrange(offset / near_m, values, (z_m - step.z_m) / near_m)


def _lagrange(places: FloatArray, values: FloatArray, at: FloatArray) -> FloatArray:
    """The polynomial through (places, values) at `at`, none of which is one of the places."""
    apart = places[:, None] - places[None, :]
    np.fill_diagonal(apart, 1.0)
    weight = 1.0 / apart.prod(axis=1)
    share = weight / (at[:, None] - places)
    return np.asarray(share @ values / share.sum(axis=1))


def _inside(
    solved: Matching, vector: FloatArray, number: int, z_m: FloatArray, r_m: float
) -> FloatArray:
    """In one section, not close to its steps: wall part and openings."""
    section = solved.bore.sections[number]
    result = _wall_part(solved, vector, number, z_m, r_m)
    for opening, trace, _ in solved.openings_of(number):
        u = opening.turn * (z_m - opening.plane.z_m) / section.radius_m
        amplitude = trace @ vector
        for few in _by_distance(u):
            result[few] += amplitude @ opening.off_axis(u[few], r_m)
    return result


def _by_distance(u: FloatArray) -> list[FloatArray]:
    """Numbers of the places grouped by powers of two of their distance."""
    group = np.clip(np.floor(np.log2(u)), -30, -1)
    return [np.flatnonzero(group == value) for value in np.unique(group)]


def _wall_part(
    solved: Matching, vector: FloatArray, number: int, z_m: FloatArray, r_m: float
) -> FloatArray:
    section = solved.bore.sections[number]
    axis = _nodes(section, solved.bore.span_of(section), z_m, r_m)
    wall = solved.wall(number, (axis.start_m, axis.stop_m))
    span_m = float(wall.centre_m.min()), float(wall.centre_m.max())
    box = Box(section.radius_m, axis, span_m, r_m)
    amplitude = vector @ box.amplitudes(wall)
    nodes = np.stack([box.potential(amplitude, r_m, order) for order in range(5)])
    decay_per_m = SLOWEST_MODE / section.radius_m
    return Curve(nodes, axis.start_m, axis.step_m, (decay_per_m, decay_per_m)).exact(z_m)


def _nodes(section: Section, span_m: tuple[float, float], z_m: FloatArray, r_m: float) -> Axis:
    """Nodes around the places asked for, spaced by the distance to the wall / 16 at most."""
    tail_m = _TAIL_RADII * section.radius_m
    low = max(float(z_m.min()), span_m[0] - tail_m)
    high = min(float(z_m.max()), span_m[1] + tail_m)
    low, high = min(low, high), max(low, high)
    distance_m = max(section.radius_m - r_m, 0.1 * section.radius_m)
    count = max(2, ceil((high - low) * 16 / min(distance_m, section.radius_m)) + 1)
    step_m = (high - low) / (count - 1) or distance_m / 16
    return Axis(low, step_m, count)
