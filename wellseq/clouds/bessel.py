"""Length and radius of a uniform column in a bore → its potential in the middle and at the end.

With k_n = j_n/Rw and c_n = 2 rho rp J1(k_n rp)/(Rw j_n J1(j_n)²), rho = e N/(π rp² L), it is on the
axis Σ c_n/(ε0 k_n²)(1 − exp(−k_n L/2)) in the middle of the column and
Σ c_n/(2 ε0 k_n²)(1 − exp(−k_n L)) at its end.  In units of W = e N/(4π ε0 L)

    c_n/(ε0 k_n²) = 8 W (Rw/rp) J1(j_n rp/Rw)/(j_n³ J1(j_n)²),   Σ of them = W (1 + 2 ln(Rw/rp))

exactly, so only the fast falling terms with exponentials are added up.  Bessel functions come from
J_m(x) = (1/π) ∫ cos(m t − x sin t) dt over 0 … π by the midpoint rule, exact to rounding once there
are more points than x: importing a library for them takes longer than all the rest.

Shapes: scalars; terms (200,).  Dimensionless.
Accuracy: 1e-12 for J, tests/clouds/test_bessel.py.
Source: J. D. Jackson, Classical Electrodynamics, 3rd ed. (Wiley 1999) sec. 3.7-3.8; Handbook of
Mathematical Functions (1964) 9.1.21, 9.5.12.
"""

from __future__ import annotations

from functools import lru_cache
from math import log, pi

import numpy as np

from wellseq.fields.hermite import FloatArray

_TERMS = 200


def bessel_levels(length: float, radius: float) -> tuple[float, float]:
    """Potential in units of W in the middle and at the end; length and radius over Rw."""
    zeros, weight = _weights(radius)
    whole = 1.0 + 2.0 * log(1.0 / radius)
    fall = np.exp(-zeros * (length / 2))
    return whole - float(weight @ fall), (whole - float(weight @ fall**2)) / 2


def bessel(order: int, x: FloatArray) -> FloatArray:
    """J_order of x (k,) from 0 to 1000, order 0 or 1."""
    points = int(np.max(x, initial=0.0)) + 40
    turn = (np.arange(points) + 0.5) * (pi / points)
    return np.asarray(np.cos(order * turn - x[:, None] * np.sin(turn)).mean(axis=1))


@lru_cache(maxsize=1)
def zeros_of_j0() -> FloatArray:
    """The first 200 zeros j_n of J0."""
    far = 8 * (np.arange(1, _TERMS + 1) - 0.25) * pi
    zeros = far / 8 + 1 / far - 124 / (3 * far**3) + 120928 / (15 * far**5)
    for _ in range(2):
        zeros = zeros + bessel(0, zeros) / bessel(1, zeros)
    return np.asarray(zeros)


@lru_cache(maxsize=64)
def _weights(radius: float) -> tuple[FloatArray, FloatArray]:
    zeros = zeros_of_j0()
    slopes = _slopes()
    return zeros, 8.0 / radius * bessel(1, zeros * radius) / (zeros**3 * slopes**2)


@lru_cache(maxsize=1)
def _slopes() -> FloatArray:
    return bessel(1, zeros_of_j0())
