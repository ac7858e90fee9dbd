"""The wall of a tube, step by step → the potential inside it, on equally spaced points.

Laplace's equation in a tube of radius a whose wall carries f(z):
 φ(r, z) = (1/2π) ∫ F(k) I0(kr)/I0(ka) e^{ikz} dk,  F the Fourier transform of f;
derivatives multiply the integrand by (ik)^m and are never differenced.  The integral is a sum over
a periodic box (an inverse real FFT), exponentially exact: its images stand 16 a away and weigh
e^{−2.405·16}.  f is a sum of straight rises and of thin strips (a strip of area A is A δ(z − p)).

Shapes: amplitudes (ne, nk), potentials (ne, count).  Units: m, V per V, V/m^n per V.
Accuracy: 1e-12 V/V, tests/fields/test_uniform.py.
Source: J. D. Jackson, Classical Electrodynamics, 3rd ed. (Wiley 1999) sec. 3.7-3.8; Bessel
functions by numpy.i0 (6e-16), which overflows only beyond 713, where the quotient is below e^{−70}.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil

import numpy as np
from numpy.typing import NDArray

from wellseq.fields.hermite import FloatArray

ComplexArray = NDArray[np.complex128]
SLOWEST_MODE = 2.404825557695773
"""First zero of J0: beyond the last rise everything decays as exp(−this · z/a)."""
IMAGE_RADII = 16.0
RADIUS_MAX = 0.9
_BESSEL_MAX = 700.0
_NYQUIST_STEPS = 14


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

    @property
    def stop_m(self) -> float:
        """The last point, m."""
        return self.start_m + self.step_m * (self.count - 1)


@dataclass(frozen=True, slots=True)
class Wall:
    """What the wall of a tube carries, for every electrode at 1 V and all others at 0 V.

    At `centre_m` (n,) the wall potential rises by `rise` (ne, n), straight over `width_m` (n,), and
    a strip of area `strip_m` (ne, n), V·m per V, lies on it.  The rises of an electrode sum to 0.
    """

    radius_m: float
    centre_m: FloatArray
    width_m: FloatArray
    rise: FloatArray
    strip_m: FloatArray


class Box:
    """The periodic box of a tube: wave numbers, and the sums over them."""

    def __init__(
        self, radius_m: float, axis: Axis, span_m: tuple[float, float], r_m: float = 0.0
    ) -> None:
        """For points of `axis` up to a distance `r_m` from it, and rises within `span_m`.

        Raises ValueError when r is beyond 0.9 of the tube's radius.
        """
        if not r_m <= RADIUS_MAX * radius_m * (1 + 1e-12):
            raise ValueError(
                f"r = {r_m:g} m is beyond {RADIUS_MAX:g} of the bore radius {radius_m:g} m"
            )
        self.radius_m, self.axis = radius_m, axis
        self.times = max(1, ceil(axis.step_m * _NYQUIST_STEPS / (radius_m - r_m)))
        self.step_m = axis.step_m / self.times
        reach = max(axis.stop_m - axis.start_m, axis.stop_m - span_m[0], span_m[1] - axis.start_m)
        self.points = _smooth_even(ceil((reach + IMAGE_RADII * radius_m) / self.step_m))
        self.k = 2 * np.pi / (self.points * self.step_m) * np.arange(self.points // 2 + 1)

    def amplitudes(self, wall: Wall) -> ComplexArray:
        """Fourier transform of what the wall carries for every electrode (ne, nk), in m."""
        edge = self._phases(wall.centre_m - self.axis.start_m)
        strip = _product(wall.strip_m, edge) if wall.strip_m.any() else 0.0
        for width_m in np.unique(wall.width_m[wall.width_m > 0]):
            edge[wall.width_m == width_m] *= np.sinc(self.k * (width_m / (2 * np.pi)))
        result = _product(wall.rise, edge)
        result[:, 1:] *= -1j / self.k[1:]
        result[:, 0] = -wall.rise @ wall.centre_m
        result += strip
        return result

    def potential(self, amplitude: ComplexArray, r_m: float, order: int) -> FloatArray:
        """The derivative of this order on the cylinder of radius r: (…, axis.count)."""
        weight = self._bessel_quotient(abs(r_m)) * (1j * self.k) ** order / self.step_m
        line = np.fft.irfft(amplitude * weight, self.points, axis=-1)
        return line[..., : (self.axis.count - 1) * self.times + 1 : self.times]

    def _bessel_quotient(self, r_m: float) -> FloatArray:
        outer = self.k * self.radius_m
        quotient = np.zeros_like(outer)
        near = outer < _BESSEL_MAX
        quotient[near] = np.i0(self.k[near] * r_m) / np.i0(outer[near])
        return quotient

    def _phases(self, place_m: FloatArray) -> ComplexArray:
        """exp(−ik·place) (places, nk): powers of two short tables, ten times fewer exponentials."""
        short = 64
        turn = -1j * self.k[1] * place_m[:, None]
        fine = np.exp(turn * np.arange(short))
        coarse = np.exp(turn * short * np.arange(-(-self.k.size // short)))
        table = coarse[:, :, None] * fine[:, None, :]
        return np.ascontiguousarray(table.reshape(place_m.size, -1)[:, : self.k.size])


def _product(real: FloatArray, table: ComplexArray) -> ComplexArray:
    """A real matrix times a complex one, at the price of a real product."""
    parts = np.ascontiguousarray(table).view(np.float64)
    return np.asarray((real @ parts).view(np.complex128))


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
