"""A cloud in a well → its space charge, length and depth left, from the axis alone.

Two models of a uniform column of N charges, radius rp and length L in a bore of radius Rw, with
W = e N/(4π ε0 L):

A (log):    φ_sc(0) = W (1 + 2 ln(Rw/rp)); L from U_vac(end) − U_min = φ_sc/2 + θ at both ends.
B (Bessel): φ_sc in the middle and at the end of the column by the bore's eigenfunctions
            (bessel.py); L from U_vac(end) − U_min = middle − end + θ.

Depth left = lower vacuum barrier − vacuum bottom − φ_sc(0); below zero the cloud does not fit.
Ions of charge Z count Z² times: energies are eV per particle.

A is pessimistic for clouds shorter than the bore is wide, where B is right, and both are optimistic
by up to 7.3 % of φ_sc for long dense ones, whose ends are round.  So the forecast is A, and its
interval reaches from below the lower to above the higher of both by 8 % of φ_sc, or 1 % of the
vacuum depth if that is more, and a quarter of kT.  Measured against the full solution in
tests/clouds/test_cheap.py and test_equilibrium_wells.py.
Source: J. D. Jackson, Classical Electrodynamics, 3rd ed. (Wiley 1999) sec. 3.7-3.8; fill rule and
interval: derived, by comparison with equilibrium.py.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

from wellseq.clouds.axis import AxisWell
from wellseq.clouds.bessel import bessel_levels
from wellseq.clouds.constants import THERMAL_EV_PER_K
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.clouds.inputs import unusable
from wellseq.clouds.scales import column_potential_V, space_charge_scale_V

LOG_MODEL = "uniform column (log)"
BESSEL_MODEL = "uniform column (Bessel)"
VACUUM_SHARE, SPACE_CHARGE_SHARE, THERMAL_SHARE = 0.01, 0.08, 0.25
CLEAR_SHARE = 0.1
CLEAR_THERMAL = 20.0
LEVEL_FILLED = "level filled"
_BISECTIONS = 48


@dataclass(frozen=True, slots=True)
class Column:
    """What one cheap model says: energies in eV per particle, lengths in m.

    `space_charge_eV` is φ_sc(0) in the middle of the axis.  All but the vacuum depth are NaN when
    the model is outside its validity, and `outside` says why.
    """

    vacuum_depth_eV: float
    depth_eV: float
    space_charge_eV: float
    length_m: float
    left_m: float
    right_m: float
    outside: tuple[Outside, ...] = ()

    @property
    def filling(self) -> float:
        """The share of the vacuum depth that space charge takes."""
        return self.space_charge_eV / self.vacuum_depth_eV


@dataclass(frozen=True, slots=True)
class CheapDepth:
    """The depth left in eV with the interval of the cheap models, and both of them."""

    depth_eV: Figure
    log: Column
    bessel: Column
    outside: tuple[Outside, ...] = ()


def cheap_depth(
    *,
    well: AxisWell,
    charge_e: int,
    number: float,
    temperature_K: float,
    radius_m: float,
    wall_radius_m: float,
) -> CheapDepth:
    """Depth left on the lower side of an empty well (eV) once a cloud is in it.

    Radii in m (the cloud's is √(2⟨r²⟩)), temperature in K.  A few milliseconds.
    """
    columns = [
        model(
            well=well,
            charge_e=charge_e,
            number=number,
            temperature_K=temperature_K,
            radius_m=radius_m,
            wall_radius_m=wall_radius_m,
        )
        for model in (log_column, bessel_column)
    ]
    log, bessel = columns
    outside = (*log.outside, *bessel.outside)
    if outside:
        return CheapDepth(NOT_KNOWN, log, bessel, outside)
    low, high = sorted(item.depth_eV for item in columns)
    charge_eV = max(item.space_charge_eV for item in columns)
    margin = max(VACUUM_SHARE * well.depth_eV, SPACE_CHARGE_SHARE * charge_eV)
    margin += THERMAL_SHARE * THERMAL_EV_PER_K * temperature_K
    return CheapDepth(Figure(log.depth_eV, low - margin, high + margin), log, bessel)


def cheap_is_enough(cheap: CheapDepth, temperature_K: float, demanded_eV: float = 0.0) -> bool:
    """Whether the cheap depth decides: it is surely above every limit that matters.

    The limits are a tenth of the vacuum depth, 20 kT, and what is demanded (eV); temperature in K.
    """
    thermal = CLEAR_THERMAL * THERMAL_EV_PER_K * temperature_K
    limit = max(CLEAR_SHARE * cheap.log.vacuum_depth_eV, thermal, demanded_eV)
    return cheap.depth_eV.known and cheap.depth_eV.low > limit


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
        centre = charge_e**2 * column_potential_V(
            number=number, length_m=length_m, radius_m=radius_m, wall_radius_m=wall_radius_m
        )
        return centre, centre / 2

    refused = _refused(LOG_MODEL, well, number, temperature_K, radius_m, wall_radius_m)
    return _column(LOG_MODEL, well, temperature_K, levels, refused)


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
        scale = charge_e**2 * space_charge_scale_V(number=number, length_m=length_m)
        middle, end = bessel_levels(length_m / wall_radius_m, radius_m / wall_radius_m)
        return scale * middle, scale * (middle - end)

    refused = _refused(BESSEL_MODEL, well, number, temperature_K, radius_m, wall_radius_m)
    return _column(BESSEL_MODEL, well, temperature_K, levels, refused)


def _refused(
    model: str,
    well: AxisWell,
    number: float,
    temperature_K: float,
    radius_m: float,
    wall_radius_m: float,
) -> tuple[Outside, ...]:
    """Why inputs make no cloud in a well; empty when they do."""
    found = list(unusable(model, temperature_K=temperature_K, radius_m=radius_m))
    if not (math.isfinite(number) and number >= 1.0):
        found.append(Outside(model, "number of particles", number, 1.0, "", "at least"))
    if radius_m >= wall_radius_m:
        found.append(Outside(model, "radius", radius_m, wall_radius_m, "m", "below"))
    thermal = THERMAL_EV_PER_K * temperature_K
    if not found and not thermal < well.depth_eV:
        found.append(Outside(model, "thermal energy", thermal, well.depth_eV, "eV", "below"))
    return tuple(found)


def _column(
    model: str,
    well: AxisWell,
    temperature_K: float,
    levels: Callable[[float], tuple[float, float]],
    refused: tuple[Outside, ...],
) -> Column:
    if refused:
        return _nothing(well, refused)
    thermal = THERMAL_EV_PER_K * temperature_K
    ends_m = well.ends_m()

    def lacking_eV(above_eV: float) -> float:
        left, right = ends_m(above_eV)
        return levels(right - left)[1] + thermal - above_eV

    top = well.depth_eV * (1 - 1e-12)
    short = lacking_eV(top)
    if not short <= 0.0:
        reason = Outside(model, LEVEL_FILLED, top + short, well.depth_eV, "eV")
        return _nothing(well, (reason,))
    left, right = ends_m(_filled_to(lacking_eV, thermal, top))
    centre = levels(right - left)[0]
    return Column(well.depth_eV, well.depth_eV - centre, centre, right - left, left, right)


def _filled_to(lacking_eV: Callable[[float], float], low_eV: float, high_eV: float) -> float:
    """The level at which nothing is lacking; what is lacking falls as the level rises."""
    for _ in range(_BISECTIONS):
        middle = (low_eV + high_eV) / 2
        if lacking_eV(middle) > 0.0:
            low_eV = middle
        else:
            high_eV = middle
    return high_eV


def _nothing(well: AxisWell, reasons: tuple[Outside, ...]) -> Column:
    return Column(well.depth_eV, *(math.nan,) * 5, reasons)
