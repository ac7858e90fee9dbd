"""The gaps of a tube's wall → what a real slot does there, to leading orders, and what is left.

A slot of width g between thick electrodes acts on the inside as
 1. a straight rise of width 1.1027 g (second moment of the mouth field of a deep slot; 1.1027 =
    √12/π from the conformal map of the slot), and
 2. a strip of area −g²/2π · ∂φ/∂r, where ∂φ/∂r is the slope that everything else makes normal to
    the wall at the gap: the field leaks into the slot (same map).
∂φ/∂r on the wall at a distance z > 0 inside a unit rise is Σ exp(−j_n z/a)/a, j_n the zeros of J0.
What is left, from finite elements of real slots (tests/fields/test_elements.py), V per V on the
axis: 2e-3 (g/a)³ of a gap's own rise, and of its leak the share 0.2 (g/d)² + 0.05 g/a, d the
distance to the next rise.  It falls away along the axis like the slowest mode of the tube.

Shapes: sources (m,), gaps (n,), slopes (n, m), amplitudes (ne, n).  Units: m, V per V.
Source: derived, by the Schwarz-Christoffel map of a deep slot in a half-plane.
"""

from __future__ import annotations

import numpy as np

from wellseq.fields.hermite import FloatArray
from wellseq.fields.tube import SLOWEST_MODE, Wall

GAP_FACTOR = 1.1027
LEAK_AREA = 1.0 / (2 * np.pi)
STEP_SLOPE = 0.66312
"""sup of the slope of the unit step on the axis, in 1/a: 1/π ∫ dk/I0(k)."""
OWN_SHARE = 2e-3
LEAK_NEAR = 0.2
LEAK_CURVED = 0.05
_TAIL_RADII = 0.8
_SECOND_MODE = 5.520078110286311
_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(4)


def wall_slope(
    at_m: FloatArray, source_m: FloatArray, width_m: FloatArray, radius_m: float
) -> FloatArray:
    """∂φ/∂r (n, m), 1/m, on the wall at each place by a unit rise at each source; 0 at its own."""
    offset = (at_m[:, None] - source_m[None, :]) / radius_m
    own = np.abs(offset) < 1e-9
    distance = np.where(own, 1.0, np.abs(offset))
    # A rise that is wider than twice its distance is no longer a gap; gap_left() tells of it.
    half = np.minimum(width_m[None, :] / (2 * radius_m), 0.9 * distance)
    slope = np.zeros_like(distance)
    for node, weight in zip(_NODES, _WEIGHTS, strict=True):
        slope += weight / 2 * _wall_sum(distance + node * half)
    return np.where(own, 0.0, np.sign(offset) * slope / radius_m)


def _wall_sum(z: FloatArray) -> FloatArray:
    """Σ exp(−j_n z), z in radii: j_n ≈ (n − 1/4)π summed in closed form, the first two mended."""
    close = np.exp(-0.75 * np.pi * z) / -np.expm1(-np.pi * z)
    first = np.exp(-SLOWEST_MODE * z) - np.exp(-0.75 * np.pi * z)
    second = np.exp(-_SECOND_MODE * z) - np.exp(-1.75 * np.pi * z)
    return np.asarray(close + first + second)


def leak(rise: FloatArray, slope: FloatArray, width_m: FloatArray) -> FloatArray:
    """Areas (ne, n), V·m per V, of the strips at gaps of effective width (n,) m.

    `rise` (ne, m) of the sources, `slope` (n, m) as of `wall_slope`.
    """
    return np.asarray(-(rise @ slope.T) * LEAK_AREA * (width_m / GAP_FACTOR) ** 2)


def gap_left(wall: Wall, source_m: FloatArray, source_rise: FloatArray) -> FloatArray:
    """Estimate (ne, n), V per V on the axis, of what both rules leave out at every gap of a wall.

    `source_m` (m,), `source_rise` (ne, m): all rises that the gaps see, mirror images included.
    """
    a = wall.radius_m
    gap = wall.width_m / (GAP_FACTOR * a)
    slope = np.abs(wall_slope(wall.centre_m, source_m, np.zeros(source_m.size), a)) * a
    offset = np.abs(wall.centre_m[:, None] - source_m[None, :]) / a
    nearest = np.where(offset < 1e-9, np.inf, offset).min(axis=1, initial=np.inf)
    share = LEAK_NEAR * (gap / np.maximum(nearest, 1e-9)) ** 2 + LEAK_CURVED * gap
    leaked = STEP_SLOPE * LEAK_AREA * gap**2 * share
    return np.asarray(
        OWN_SHARE * gap**3 * np.abs(wall.rise) + leaked * (np.abs(source_rise) @ slope.T)
    )


def reach_of(distance_m: FloatArray, radius_m: float) -> FloatArray:
    """How much (0 … 1) of a gap's error is left on the axis at a distance (m) from it."""
    beyond = np.maximum(0.0, np.abs(distance_m) / radius_m - _TAIL_RADII)
    return np.asarray(np.exp(-SLOWEST_MODE * beyond))
