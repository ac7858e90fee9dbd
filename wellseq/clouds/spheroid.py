"""Aspect ratio of a cold spheroid in a quadratic well → its frequencies: exact answers.

A cold plasma in a harmonic well far from any wall is a uniform spheroid of aspect ratio α = z_p/r_p
(length over diameter).  Its axial frequency obeys w_z² = N_z w_p² with the depolarisation factor

    prolate, e = √(1 − 1/α²):  N_z = (1 − e²)/e³ (artanh e − e)
    oblate,  e = √(1/α² − 1):  N_z = (1 + e²)/e³ (e − arctan e)

and its azimuthally symmetric modes (l, 0) in a strong field, w ≪ Ω_c, obey

    1 − w_p²/w² = (k2/k1) P_l(k1) Q_l′(k2)/(P_l′(k1) Q_l(k2)),
    k2 = α/√(α² − 1),  k1 = α/√(α² − 1 + w_p²/w²).

The equilibrium solver is tested against these; the (2,0) frequency tells temperature and aspect.
Dimensionless throughout.  Accuracy: 1e-10, tests/clouds/test_spheroid.py.
Source (from memory): J. A. Osborn, Phys. Rev. 67, 351 (1945); D. H. E. Dubin, Phys. Rev. Lett. 66,
2076 (1991); J. J. Bollinger et al., Phys. Rev. A 48, 525 (1993).
"""

from __future__ import annotations

from math import atan, atanh, sqrt

_NEAR_SPHERE = 1e-3


def depolarisation(aspect: float) -> float:
    """N_z of a spheroid: 1/3 for a sphere, towards 0 for a needle and 1 for a pancake.

    Raises ValueError for an aspect ratio that is not positive.
    """
    if not aspect > 0.0:
        raise ValueError("the aspect ratio of a spheroid is positive")
    if abs(aspect - 1.0) < _NEAR_SPHERE:
        # Closed forms lose all digits here; series in s = e² (prolate) or −e² (oblate).
        s = 1.0 - 1.0 / aspect**2
        return (1.0 - s) * (1 / 3 + s / 5 + s**2 / 7 + s**3 / 9)
    if aspect > 1.0:
        e = sqrt(1.0 - 1.0 / aspect**2)
        return (1.0 - e**2) / e**3 * (atanh(e) - e)
    e = sqrt(1.0 / aspect**2 - 1.0)
    return (1.0 + e**2) / e**3 * (e - atan(e))


def aspect_of(ratio: float) -> float:
    """The aspect ratio α at which w_z²/w_p² has this value, 0 < ratio < 1.

    Raises ValueError outside that range: no spheroid rests there.
    """
    if not 0.0 < ratio < 1.0:
        raise ValueError("w_z²/w_p² of a spheroid is between 0 and 1")
    low, high = 1.0, 1.0
    while depolarisation(low) < ratio:
        low /= 2.0
    while depolarisation(high) > ratio:
        high *= 2.0
    for _ in range(200):
        middle = sqrt(low * high)
        low, high = (middle, high) if depolarisation(middle) > ratio else (low, middle)
        if high <= low * (1 + 1e-15):
            break
    return sqrt(low * high)


def axial_mode(order: int, aspect: float) -> float:
    """w²/w_p² of the highest (order, 0) mode of a prolate spheroid, order 1 or 2, strong field.

    Raises ValueError for another order or an aspect ratio of at most 1.
    """
    if order not in (1, 2) or not aspect > 1.0:
        raise ValueError("modes (1, 0) and (2, 0) of a prolate spheroid only")
    k2 = aspect / sqrt(aspect**2 - 1.0)
    outside = _second_slope(order, k2) / _second(order, k2)

    def lack(square: float) -> float:
        k1 = aspect / sqrt(aspect**2 - 1.0 + 1.0 / square)
        inside = _first(order, k1) / _first_slope(order, k1)
        return 1.0 - 1.0 / square - k2 / k1 * inside * outside

    # k1 > 1 above k1's singular square, and modes lie below w_p.
    low, high = _lowest_square(order, aspect), 1.0
    for _ in range(100):
        middle = (low + high) / 2
        low, high = (middle, high) if lack(middle) < 0.0 else (low, middle)
    return (low + high) / 2


def _lowest_square(order: int, aspect: float) -> float:
    """Below this the interior field of the mode has another node: the next mode down."""
    node = {1: 0.0, 2: sqrt(1 / 3)}[order]
    if node == 0.0:
        return 1e-12
    # k1 = node at this square.
    return 1.0 / ((aspect / node) ** 2 - aspect**2 + 1.0)


def _first(order: int, x: float) -> float:
    return x if order == 1 else (3 * x * x - 1) / 2


def _first_slope(order: int, x: float) -> float:
    return 1.0 if order == 1 else 3 * x


def _second(order: int, x: float) -> float:
    """Legendre function Q_l of an argument above 1."""
    half_log = atanh(1.0 / x)
    return x * half_log - 1.0 if order == 1 else _first(2, x) * half_log - 1.5 * x


def _second_slope(order: int, x: float) -> float:
    half_log, fall = atanh(1.0 / x), -1.0 / (x * x - 1.0)
    if order == 1:
        return half_log + x * fall
    return 3 * x * half_log + _first(2, x) * fall - 1.5
