"""The potential of electrodes on the axis of a tube, from sums over its modes and over its waves.

A unit step of the wall of a tube of radius 1 makes on the axis, at a distance z > 0 from it,

    S = 1 − Σ e^{−j_n z} / (j_n J1(j_n)),   J0(j_n) = 0,                 away from the step;
    S = 1/2 + (1/π) ∫ sin(kz)/k dk / I0(k)                               near it,

and S(−z) = 1 − S(z); a straight rise over a width w multiplies a mode by sinh(j_n w/2)/(j_n w/2)
and a wave by sin(kw/2)/(kw/2).  The integral is a sum at midpoints, exponentially exact.  The
gap of width g between thick electrodes acts as a straight rise over 1.1027 g, and as a strip of
area −g²/2π times the slope that all other steps make normal to the wall there, Σ e^{−j_n z} for a
step at distance z: the field leaks into the gap (Schwarz–Christoffel map of a deep slot).
Lengths in m; accuracy 1e-9 V per V for such a wall; tests/reread/test_steps.py.
Source: J. D. Jackson, Classical Electrodynamics, 3rd ed. (Wiley 1999), sec. 3.7–3.8.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

GAP_FACTOR = 1.1027
NEAR = 0.4
"""Closer to a step than this (radii), waves are summed and not modes."""
FAR = 10.5
"""Beyond this (radii) a step is over to 1e-11."""
MODES = 26
WAVE_STEP = 2 * math.pi / 12
WAVES = 71
SMALLEST = 30.0
"""Modes that have fallen by more than exp(−this) are left out."""
NEGLIGIBLE = 1e-12
_GAUSS = (
    (0.0, 128 / 225),
    (0.5384693101056831, 0.47862867049936647),
    (-0.5384693101056831, 0.47862867049936647),
    (0.9061798459386640, 0.23692688505618908),
    (-0.9061798459386640, 0.23692688505618908),
)
"""Places and weights of Gauss and Legendre for five points of −1 … 1."""
Terms = list[tuple[float, float]]


def bessel_j(order: int, x: float) -> float:
    """J0 or J1 by the midpoint rule over a half period of Bessel's integral, exact to rounding."""
    count = 200
    total = 0.0
    for at in range(count):
        angle = math.pi * (at + 0.5) / count
        total += math.cos(order * angle - x * math.sin(angle))
    return total / count


def bessel_i0(x: float) -> float:
    """I0 by its series, all terms positive."""
    term, total, n = 1.0, 1.0, 0
    while term > 1e-17 * total:
        n += 1
        term *= (x / (2 * n)) ** 2
        total += term
    return total


def zeros_of_j0(count: int) -> list[float]:
    """The first zeros of J0: the asymptotic place, then Newton steps with J0' = −J1."""
    found = []
    for n in range(1, count + 1):
        x = (n - 0.25) * math.pi
        x += 1 / (8 * x)
        for _ in range(4):
            x += bessel_j(0, x) / bessel_j(1, x)
        found.append(x)
    return found


@dataclass(frozen=True, slots=True)
class Rise:
    """Where the wall's potential rises, over what width, and the gap there; in radii."""

    place: float
    width: float
    gap: float


class Steps:
    """The unit step and its slope on the axis of a tube of radius 1, and its slope on the wall."""

    def __init__(self) -> None:
        self.zeros = zeros_of_j0(MODES)
        # Mode: (j, 1/(j J1(j))); wave: (k, 1/(pi k I0(k)) times the step of k).
        self._modes = [(j, 1 / (j * bessel_j(1, j))) for j in self.zeros]
        centres = [WAVE_STEP * (n + 0.5) for n in range(WAVES)]
        self._waves = [(k, WAVE_STEP / (math.pi * k * bessel_i0(k))) for k in centres]
        self._widened: dict[float, tuple[Terms, Terms]] = {}

    def level(self, z: float, width: float) -> float:
        """The potential at a distance z from the middle of a straight rise, per V; in radii."""
        far = abs(z)
        if far - width / 2 > FAR:
            return 1.0 if z > 0 else 0.0
        modes, waves = self._widened.get(width) or self._widen(width)
        if far - width / 2 < NEAR:
            return 0.5 + sum([weight * math.sin(k * z) for k, weight in waves])
        short = _falling(modes, far - width / 2)
        return 1.0 - short if z > 0 else short

    def slope(self, z: float) -> float:
        """How fast the unit step rises along the axis, per radius."""
        far = abs(z)
        if far > FAR:
            return 0.0
        if far < NEAR:
            return sum([k * weight * math.cos(k * z) for k, weight in self._waves])
        return sum([j * weight * math.exp(-j * far) for j, weight in self._modes])

    def outward(self, z: float, width: float) -> float:
        """The slope normal to the wall at a distance z from the middle of a rise, per radius."""
        far = abs(z)
        half = min(width / 2, 0.9 * far)
        total = sum([weight / 2 * self._wall(far + at * half) for at, weight in _GAUSS])
        return math.copysign(total, z)

    def _wall(self, z: float) -> float:
        """Σ e^{−j_n z}: the first zeros, then j_n ≈ (n − 1/4)π, a geometric series."""
        rest = math.exp(-(MODES + 0.75) * math.pi * z) / -math.expm1(-math.pi * z)
        return rest + sum([math.exp(-j * z) for j in self.zeros])

    def _widen(self, width: float) -> tuple[Terms, Terms]:
        """The weights of modes, from the near end of the rise, and of waves for this width."""
        half = width / 2
        modes, waves = self._modes, self._waves
        if width:
            modes = [(j, weight * -math.expm1(-j * width) / (j * width)) for j, weight in modes]
            waves = [(k, weight * math.sin(k * half) / (k * half)) for k, weight in waves]
        self._widened[width] = modes, waves
        return modes, waves


def _falling(modes: Terms, far: float) -> float:
    total = 0.0
    for j, weight in modes:
        if j * far > SMALLEST:
            break
        total += weight * math.exp(-j * far)
    return total


class Tube:
    """Electrodes in order along the axis of a tube that goes on at both ends, grounded.

    `spans_m` are (from, to) of each electrode in m; lengths inside are in units of the radius.
    """

    def __init__(self, spans_m: Sequence[tuple[float, float]], radius_m: float) -> None:
        self.radius_m = radius_m
        self.steps = Steps()
        inner = [
            Rise((one[1] + other[0]) / 2, GAP_FACTOR * (other[0] - one[1]), other[0] - one[1])
            for one, other in pairwise(spans_m)
        ]
        ends = [Rise(spans_m[0][0], 0.0, 0.0), Rise(spans_m[-1][1], 0.0, 0.0)]
        self.rises = [
            Rise(one.place / radius_m, one.width / radius_m, one.gap / radius_m)
            for one in (ends[0], *inner, ends[1])
        ]
        self.leaks = [self._leak(gap) for gap in self.rises]
        self._known: dict[float, tuple[float, ...]] = {}

    def potentials(self, z_m: float, keep: bool = True) -> tuple[float, ...]:
        """The potential at a place (m) of every electrode at 1 V, in V per V; may be kept."""
        known = self._known.get(z_m)
        if known is not None:
            return known
        z = z_m / self.radius_m
        levels = [self.steps.level(z - rise.place, rise.width) for rise in self.rises]
        found = [one - other for one, other in pairwise(levels)]
        for rise, leaks in zip(self.rises, self.leaks, strict=True):
            if not leaks:
                continue
            slope = self.steps.slope(z - rise.place)
            if slope > NEGLIGIBLE:
                for electrode, area in leaks:
                    found[electrode] += area * slope
        if keep:
            self._known[z_m] = tuple(found)
        return tuple(found)

    def _leak(self, gap: Rise) -> list[tuple[int, float]]:
        """(electrode, area of its strip in radii times V per V) at a gap, negligible ones out."""
        if not gap.gap:
            return []
        slopes = [
            0.0 if rise is gap else self.steps.outward(gap.place - rise.place, rise.width)
            for rise in self.rises
        ]
        areas = [-(one - other) * gap.gap**2 / (2 * math.pi) for one, other in pairwise(slopes)]
        return [(at, area) for at, area in enumerate(areas) if abs(area) > NEGLIGIBLE]
