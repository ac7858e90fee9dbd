"""A cloud in a well → its space charge, length and depth left, from the axis alone.

Two models of a uniform column of N charges, radius rp and length L in a bore of radius Rw, with
W = e N/(4π ε0 L):

A (log):    φ_sc(0) = W (1 + 2 ln(Rw/rp)); L from U_vac(end) − U_min = φ_sc/2 + θ at both ends.
B (Bessel): k_n = j_n/Rw, c_n = 2 rho rp J1(k_n rp)/(Rw j_n J1(j_n)²), rho = e N/(π rp² L);
            middle Σ c_n/(ε0 k_n²)(1 − exp(−k_n L/2)), end Σ c_n/(2 ε0 k_n²)(1 − exp(−k_n L));
            L from U_vac(end) − U_min = middle − end + θ.

Depth left = lower vacuum barrier − vacuum bottom − φ_sc(0).  The sums without their exponentials
are the logarithms of A exactly, so only fast falling terms are added up.  Ions of charge Z count Z²
times: energies are eV per particle.

Accuracy: A within 1 % of the vacuum depth up to 80 % filling and 4 % beyond, against the full
solution; that is the interval.  Measured in tests/clouds/test_cheap.py.
Source: J. D. Jackson, Classical Electrodynamics, 3rd ed. (Wiley 1999) sec. 3.7-3.8; fill rule and
interval: derived, by comparison with equilibrium.py.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache

import numpy as np

from wellseq.clouds.axis import AxisWell
from wellseq.clouds.constants import COULOMB_VM, THERMAL_EV_PER_K
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside, around
from wellseq.fields.hermite import FloatArray

LOG_MODEL = "uniform column (log)"
BESSEL_MODEL = "uniform column (Bessel)"
INTERVAL_SHARE = 0.01
INTERVAL_SHARE_FULL = 0.04
FILLING_FULL = 0.8
CLEAR_SHARE = 0.1
CLEAR_THERMAL = 20.0
_TERMS = 300
_BISECTIONS = 60


@dataclass(frozen=True, slots=True)
class Column:
    """What a cheap model says: energies in eV per particle, length in m.

    `depth_eV` is the depth left on the lower side with the model's interval, `space_charge_eV` the
    energy φ_sc(0) in the middle of the axis, `filling` the share of the vacuum depth it takes.
    All are NaN when the model is outside its validity, and `outside` says why.
    """

    model: str
    vacuum_depth_eV: float
    depth_eV: Figure
    space_charge_eV: float
    length_m: float
    left_m: float
    right_m: float
    filling: float
    outside: tuple[Outside, ...] = ()


def log_column(
    *,
    well: AxisWell,
    charge_e: int,
    number: float,
    temperature_K: float,
    radius_m: float,
    wall_radius_m: float,
) -> Column:
    """Model A.  `well` is the empty one on the axis (eV), radii in m, temperature in K."""

    def levels(length_m: float) -> tuple[float, float]:
        centre = _scale_eV(charge_e, number, length_m) * _logarithm(radius_m, wall_radius_m)
        return centre, centre / 2

    return _column(LOG_MODEL, well, number, temperature_K, radius_m, wall_radius_m, levels)


def bessel_column(
    *,
    well: AxisWell,
    charge_e: int,
    number: float,
    temperature_K: float,
    radius_m: float,
    wall_radius_m: float,
) -> Column:
    """Model B.  `well` is the empty one on the axis (eV), radii in m, temperature in K."""

    def levels(length_m: float) -> tuple[float, float]:
        middle, end = bessel_energies_eV(
            charge_e=charge_e,
            number=number,
            length_m=length_m,
            radius_m=radius_m,
            wall_radius_m=wall_radius_m,
        )
        return middle, middle - end

    return _column(BESSEL_MODEL, well, number, temperature_K, radius_m, wall_radius_m, levels)


def bessel_energies_eV(
    *, charge_e: int, number: float, length_m: float, radius_m: float, wall_radius_m: float
) -> tuple[float, float]:
    """Own energy, eV per particle, in the middle and at the end of a uniform column (m)."""
    zeros, slopes = _bessel_terms()
    rate = zeros * (length_m / wall_radius_m)
    scale = _scale_eV(charge_e, number, length_m)
    # c_n/(eps0 k_n²) = 8 W (Rw/rp) J1(j rp/Rw)/(j³ J1(j)²).
    ratio = radius_m / wall_radius_m
    weight = 8.0 * scale / ratio * _j1(zeros * ratio) / (zeros**3 * slopes**2)
    whole = scale * _logarithm(radius_m, wall_radius_m)
    middle = whole - float((weight * np.exp(-rate / 2)).sum())
    end = (whole - float((weight * np.exp(-rate)).sum())) / 2
    return middle, end


def cheap_is_enough(column: Column, temperature_K: float, demanded_eV: float = 0.0) -> bool:
    """Whether the cheap depth decides: it is surely above every limit that matters.

    The limits are a tenth of the vacuum depth, 20 kT, and what is demanded (eV); temperature in K.
    """
    if column.outside or not column.depth_eV.known:
        return False
    thermal = CLEAR_THERMAL * THERMAL_EV_PER_K * temperature_K
    limit = max(CLEAR_SHARE * column.vacuum_depth_eV, thermal, demanded_eV)
    return column.depth_eV.low > limit


def refusals(
    model: str, number: float, temperature_K: float, radius_m: float, wall_radius_m: float
) -> tuple[Outside, ...]:
    """Why inputs make no cloud: number, temperature (K) or radius (m); empty when they do."""
    found = []
    if not (math.isfinite(number) and number >= 1.0):
        found.append(Outside(model, "number of particles", number, 1.0, "", "at least"))
    if not (math.isfinite(temperature_K) and temperature_K > 0.0):
        found.append(Outside(model, "temperature", temperature_K, 0.0, "K", "above"))
    if not (math.isfinite(radius_m) and radius_m > 0.0):
        found.append(Outside(model, "cloud radius", radius_m, 0.0, "m", "above"))
    elif not radius_m < wall_radius_m:
        found.append(Outside(model, "cloud radius", radius_m, wall_radius_m, "m", "below"))
    return tuple(found)


def _column(
    model: str,
    well: AxisWell,
    number: float,
    temperature_K: float,
    radius_m: float,
    wall_radius_m: float,
    levels: Callable[[float], tuple[float, float]],
) -> Column:
    refused = refusals(model, number, temperature_K, radius_m, wall_radius_m)
    if refused:
        return _nothing(model, well, refused)
    thermal = THERMAL_EV_PER_K * temperature_K
    if not thermal < well.depth_eV:
        reason = Outside(model, "thermal energy", thermal, max(well.depth_eV, 0.0), "eV", "below")
        return _nothing(model, well, (reason,))

    def lacking(above_eV: float) -> float:
        left, right = well.ends_m(above_eV)
        return levels(right - left)[1] + thermal - above_eV

    above = _filled_to(lacking, thermal, well.depth_eV)
    if above is None:
        left, right = well.ends_m(well.depth_eV)
        needed = levels(right - left)[1] + thermal
        reason = Outside(model, "level filled", needed, well.depth_eV, "eV")
        return _nothing(model, well, (reason,))
    left, right = well.ends_m(above)
    centre = levels(right - left)[0]
    depth = well.depth_eV - centre
    filling = centre / well.depth_eV
    share = INTERVAL_SHARE if filling <= FILLING_FULL else INTERVAL_SHARE_FULL
    return Column(
        model,
        well.depth_eV,
        around(depth, share * well.depth_eV),
        centre,
        right - left,
        left,
        right,
        filling,
    )


def _filled_to(
    lacking: Callable[[float], float], lowest_eV: float, highest_eV: float
) -> float | None:
    """The level at which nothing is lacking; it falls with the level.  None when beyond the top."""
    low, high = lowest_eV, highest_eV * (1 - 1e-12)
    if not lacking(high) <= 0.0:
        return None
    for _ in range(_BISECTIONS):
        middle = (low + high) / 2
        if lacking(middle) > 0.0:
            low = middle
        else:
            high = middle
    return high


def _nothing(model: str, well: AxisWell, reasons: tuple[Outside, ...]) -> Column:
    nan = math.nan
    return Column(model, well.depth_eV, NOT_KNOWN, nan, nan, nan, nan, nan, reasons)


def _scale_eV(charge_e: int, number: float, length_m: float) -> float:
    return charge_e**2 * COULOMB_VM * number / length_m


def _logarithm(radius_m: float, wall_radius_m: float) -> float:
    return 1.0 + 2.0 * math.log(wall_radius_m / radius_m)


@cache
def _bessel_terms() -> tuple[FloatArray, FloatArray]:
    from scipy.special import j1, jn_zeros

    zeros = jn_zeros(0, _TERMS)
    return np.asarray(zeros), np.asarray(j1(zeros))


def _j1(values: FloatArray) -> FloatArray:
    from scipy.special import j1

    return np.asarray(j1(values))
