"""A stack of electrodes in one bore → the potential of each at 1 V, on and off the axis.

Laplace's equation in a tube of radius a whose wall carries f_e(z): 1 on electrode e, 0 on all
others and on the grounded tube that goes on beyond the stack, straight in between across a gap.
Fourier
transform along z:  phi_e(r, z) = (1/2π) ∫ F_e(k) I0(kr)/I0(ka) e^{ikz} dk,  F_e the transform of
f_e; derivatives multiply it by (ik)^m and are never differenced.  The integral is a sum over a
periodic box (an inverse real FFT), exponentially exact: its images stand 16 a away and weigh
e^{−2.405·16}. A real gap of width g acts on the axis as a straight one of 1.1027 g (second moment
of the mouth field of a deep slot); the rule is good to about 2e-6 V/V at g = 0.1 a and 1.5e-5 at
0.2 a.

Shapes: unit potentials (radii, orders, electrodes, nz).  Units: m, V per V, V/m^n per V.
Accuracy: 1e-12 V/V, tests/fields/test_uniform.py; gaps against finite elements of real slots,
tests/fields/test_elements.py.
Source: J. D. Jackson, Classical Electrodynamics, 3rd ed. (Wiley 1999) sec. 3.7-3.8; Bessel
functions by numpy.i0 (6e-16), which overflows only beyond 713, where the quotient is below e^{−70}.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from math import ceil
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from wellseq.fields.hermite import QUINTIC_ERROR, FloatArray

ComplexArray = NDArray[np.complex128]
METHOD = "uniform bore, Fourier box, 1"
GAP_FACTOR = 1.1027
SLOWEST_MODE = 2.404825557695773
"""First zero of J0: beyond the stack everything decays as exp(−this · z/a)."""
REACH_RADII = 8.0
IMAGE_RADII = 16.0
STEPS_PER_RADIUS = 22
NODES_MAX = 40_000
RADIUS_MAX = 0.9
STEP_SLOPE = 0.66312
"""sup of the slope of the unit step on the axis, in 1/a: 1/π ∫ dk/I0(k)."""
STEP_SUPREMA = (189.9, 1461.4, 9657.0)
"""sup over z of the 6th, 7th and 8th derivative of the unit step on the axis, in a^−n (tested)."""
_ROUNDING = 1e-13
_BESSEL_MAX = 700.0
_NYQUIST_STEPS = 14


class Electrode(Protocol):
    """What this floor needs of an electrode: name, span along the axis and inner radius, in m."""

    @property
    def name(self) -> str:
        """Its name in the trap file."""

    @property
    def from_m(self) -> float:
        """Where it begins along the axis, m."""

    @property
    def to_m(self) -> float:
        """Where it ends along the axis, m."""

    @property
    def radius_m(self) -> float:
        """Inner radius, m."""


@dataclass(frozen=True, slots=True)
class Stack:
    """The wall of a uniform bore: where the wall potential changes, and over what width.

    `centre_m`, `width_m` (ne + 1,): edge j lies between electrode j − 1 and j; edge 0 and the last
    one are where the grounded tube goes on (width 0).  Lengths in m.
    """

    centre_m: FloatArray
    width_m: FloatArray
    radius_m: float


@dataclass(frozen=True, slots=True)
class Axis:
    """Equally spaced points: `count` of them from `start_m` in steps of `step_m` (m)."""

    start_m: float
    step_m: float
    count: int

    @property
    def z_m(self) -> FloatArray:
        """The points (count,), in m."""
        return np.asarray(self.start_m + self.step_m * np.arange(self.count))


def stack_of(electrodes: Sequence[Electrode]) -> Stack:
    """The edges of electrodes given in order along the axis.

    Raises ValueError for no electrode, unequal radii, or spans that are empty, overlap or are not
    finite.
    """
    if not electrodes:
        raise ValueError("a stack needs at least one electrode")
    radius = float(electrodes[0].radius_m)
    start = np.array([e.from_m for e in electrodes], dtype=float)
    stop = np.array([e.to_m for e in electrodes], dtype=float)
    if not (np.isfinite(start).all() and np.isfinite(stop).all() and 0 < radius < np.inf):
        raise ValueError("lengths of electrodes must be finite and the radius positive")
    if any(float(e.radius_m) != radius for e in electrodes):
        raise ValueError("electrodes of unequal radius: only a uniform bore can be solved here")
    gap = start[1:] - stop[:-1]
    if (stop <= start).any() or (gap < 0).any():
        raise ValueError("electrodes must be longer than nothing and must not overlap")
    centre = np.concatenate((start[:1], (start[1:] + stop[:-1]) / 2, stop[-1:]))
    return Stack(centre, np.concatenate(([0.0], GAP_FACTOR * gap, [0.0])), radius)


def axis_of(stack: Stack) -> Axis:
    """The nodes of the field: the stack and 8 radii beyond it, in steps of at most a/22.

    Raises ValueError when the stack is so long for its bore that there would be over 40,000 nodes.
    """
    reach = REACH_RADII * stack.radius_m
    start, stop = float(stack.centre_m[0] - reach), float(stack.centre_m[-1] + reach)
    steps = (stop - start) * STEPS_PER_RADIUS / stack.radius_m
    if steps > NODES_MAX:
        raise ValueError(
            f"a stack of {stop - start - 2 * reach:g} m in a bore of radius {stack.radius_m:g} m "
            "is too long for its bore"
        )
    count = ceil(steps)
    return Axis(start, (stop - start) / count, count + 1)


def interpolation_error(stack: Stack, axis: Axis, order: int = 0) -> float:
    """Greatest error of the quintic between nodes, V/m^order per V on one electrode (order 0-2).

    Two edges at most, each h⁶/46080 · sup|S⁽⁶⁺ᵒʳᵈᵉʳ⁾|, S the unit step; a gap only smooths S.
    """
    step = axis.step_m / stack.radius_m
    bound = 2.0 * STEP_SUPREMA[order] * QUINTIC_ERROR * step**6 + _ROUNDING * 30.0**order
    return float(bound / stack.radius_m**order)


def gap_error(stack: Stack) -> FloatArray:
    """Estimate (ne,) of what the gap rule leaves out on the axis, V per V on each electrode.

    A field E that stands normal on the wall at a gap (from all other edges) leaks into the slot and
    acts like a strip of area E g²/2π on the wall; the rule is exact only where E = 0, at a gap far
    from any other edge.  E of a unit step at distance z is Σ exp(−j_n z/a)/a, j_n ≈ (n − 1/4) π.
    Next order: 1e-3 (g/a)³, from finite elements of one gap.
    """
    a = stack.radius_m
    place, gap = stack.centre_m / a, stack.width_m / (GAP_FACTOR * a)
    offset = place[:, None] - place[None, :]
    distance = np.where(offset == 0.0, np.inf, np.abs(offset))
    normal = np.exp(-0.75 * np.pi * distance) / -np.expm1(-np.pi * distance) * np.sign(offset)
    leak = gap**2 / (2 * np.pi) * STEP_SLOPE
    own = 1e-3 * (gap[:-1] ** 3 + gap[1:] ** 3)
    return np.asarray(leak @ np.abs(normal[:, :-1] - normal[:, 1:]) + own)


def unit_potentials(
    stack: Stack, axis: Axis, radii_m: Iterable[float] = (0.0,), orders: Iterable[int] = (0,)
) -> FloatArray:
    """Derivatives along z of every electrode's potential at 1 V, in V/m^order per V.

    Returns (radii, orders, electrodes, axis.count).  Raises ValueError beyond 0.9 of the bore
    radius.
    """
    radii, powers = tuple(radii_m), tuple(orders)
    box = _Box(stack, axis, max(map(abs, radii), default=0.0))
    wall = box.wall_amplitudes()
    result = np.empty((len(radii), len(powers), wall.shape[0], axis.count))
    for i, radius_m in enumerate(radii):
        for j, order in enumerate(powers):
            result[i, j] = box.potential(wall, radius_m, order)
    return result


def potential_nodes(stack: Stack, vector: FloatArray, radius_m: float) -> tuple[FloatArray, Axis]:
    """Potential of electrodes at `vector` (ne,) volts on a cylinder of radius r, orders 0 … 4.

    Returns (5, nz) in V/m^order and the nodes, spaced by the distance to the wall / 16 at most.
    Raises ValueError beyond 0.9 of the bore radius.
    """
    base = axis_of(stack)
    times = ceil(base.step_m * 16 / max(stack.radius_m - abs(radius_m), 0.1 * stack.radius_m))
    axis = Axis(base.start_m, base.step_m / times, (base.count - 1) * times + 1)
    box = _Box(stack, axis, abs(radius_m))
    wall = vector @ box.wall_amplitudes()
    return np.stack([box.potential(wall, radius_m, order) for order in range(5)]), axis


class _Box:
    """The periodic box: wave numbers, and the sums over them."""

    def __init__(self, stack: Stack, axis: Axis, radius_m: float) -> None:
        a = stack.radius_m
        if not radius_m <= RADIUS_MAX * a * (1 + 1e-12):
            raise ValueError(
                f"r = {radius_m:g} m is beyond {RADIUS_MAX:g} of the bore radius {a:g} m"
            )
        self.stack, self.axis = stack, axis
        self.times = max(1, ceil(axis.step_m * _NYQUIST_STEPS / (a - radius_m)))
        self.step_m = axis.step_m / self.times
        stop_m = axis.start_m + axis.step_m * (axis.count - 1)
        reach = max(
            stop_m - axis.start_m,
            stop_m - stack.centre_m[0],
            stack.centre_m[-1] - axis.start_m,
        )
        self.points = _smooth_even(ceil((reach + IMAGE_RADII * a) / self.step_m))
        self.k = 2 * np.pi / (self.points * self.step_m) * np.arange(self.points // 2 + 1)

    def wall_amplitudes(self) -> ComplexArray:
        """Fourier transform of every electrode's wall potential (ne, nk), in m."""
        stack = self.stack
        edge = self._phases(stack.centre_m - self.axis.start_m)
        for width_m in np.unique(stack.width_m[stack.width_m > 0]):
            edge[stack.width_m == width_m] *= np.sinc(self.k * (width_m / (2 * np.pi)))
        wall = edge[:-1] - edge[1:]
        wall[:, 1:] *= -1j / self.k[1:]
        wall[:, 0] = np.diff(stack.centre_m)
        return wall

    def potential(self, wall: ComplexArray, radius_m: float, order: int) -> FloatArray:
        """The derivative of this order on the cylinder of radius r: (…, axis.count)."""
        weight = self._bessel_quotient(abs(radius_m)) * (1j * self.k) ** order / self.step_m
        line = np.fft.irfft(wall * weight, self.points, axis=-1)
        return line[..., : (self.axis.count - 1) * self.times + 1 : self.times]

    def _bessel_quotient(self, radius_m: float) -> FloatArray:
        outer = self.k * self.stack.radius_m
        quotient = np.zeros_like(outer)
        near = outer < _BESSEL_MAX
        quotient[near] = np.i0(self.k[near] * radius_m) / np.i0(outer[near])
        return quotient

    def _phases(self, place_m: FloatArray) -> ComplexArray:
        """exp(−ik·place) (places, nk): powers of two short tables, ten times fewer exponentials."""
        short = 64
        turn = -1j * self.k[1] * place_m[:, None]
        fine = np.exp(turn * np.arange(short))
        coarse = np.exp(turn * short * np.arange(-(-self.k.size // short)))
        table = coarse[:, :, None] * fine[:, None, :]
        return np.asarray(table.reshape(place_m.size, -1)[:, : self.k.size])


def _smooth_even(count: int) -> int:
    """The least even number ≥ count whose only prime factors are 2, 3 and 5: fast for the FFT."""
    count += count % 2
    while True:
        rest = count
        for prime in (2, 3, 5):
            while rest % prime == 0:
                rest //= prime
        if rest == 1:
            return count
        count += 2
