"""rotated: a strong drive brings a plasma to its own rotation; density, radius, heat, and the lock.

The drive acts on all charges of the well; the plasma is the most numerous cloud.  Measured are: the
drive's volts against what the trap file says has held a plasma (`drive-too-weak`), how far below
the plasma's rotation the drive begins, where it would brake (`drive-slips`), and the heat that
compression frees over what radiation removes during the step (`compression-overheats`).  Formulas:
the strong drive of rotating_wall.py.

Units: Hz, V, m, K, s, eV.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from wellseq.clouds import passing, scales
from wellseq.clouds.columns import trough
from wellseq.clouds.constants import COULOMB_VM, THERMAL_EV_PER_K
from wellseq.clouds.figures import Figure, Outside
from wellseq.clouds.intervals import power, times
from wellseq.clouds.radiation import time_constant_s
from wellseq.clouds.rotating_wall import DEBYE_SHARE_MAX, DENSITY_SHARE, MODEL
from wellseq.model.effects import Rotated

if TYPE_CHECKING:
    from wellseq.clouds.beings import Being
    from wellseq.clouds.ledger import Ledger
    from wellseq.clouds.rest import Settled

ROUNDS = 12


def act(ledger: Ledger, effect: Rotated) -> set[str]:
    """Turn the plasma of a well."""
    being = ledger.beings.get(effect.cloud)
    if being is None:
        return set()
    start_s = ledger.span.start_s
    ledger.catch_up(being, start_s)
    company = ledger.company(being, start_s)
    for one in company:
        ledger.catch_up(one, start_s)
    plasma = max(company, key=lambda one: _count(one))
    everybody = ledger.neighbours(plasma)
    settled = ledger.settle(plasma, start_s)
    _judge_lock(ledger, plasma, effect)
    if settled is not None and not settled.outside:
        _turn(ledger, plasma, effect, settled)
    for one in everybody:
        if one is not plasma:
            ledger.catch_up(one, ledger.span.end_s)
            reason = Outside(MODEL, "clouds in the well", float(len(everybody)), 1.0)
            if one.figures["radius"].known:
                ledger.lose(one, ["radius"], [reason])
    plasma.at_s = ledger.span.end_s
    return {one.name for one in everybody}


def _count(being: Being) -> float:
    number = being.figures["number"].value
    return 0.0 if math.isnan(number) else number


def _judge_lock(ledger: Ledger, plasma: Being, effect: Rotated) -> None:
    ring = ledger.trap.electrode(effect.ring)
    least, highest = ring.drive_least_V, ring.drive_highest_Hz
    words = f"the drive on {effect.ring} has {{value}}"
    hint = "more volts, or a lower frequency; what has held a plasma is measured on the ring"
    if least is None or highest is None:
        words = (
            f"whether {effect.amplitude_V:g} V on {effect.ring} hold {plasma.name} is not known: "
            "the trap file states no drive_least and drive_highest there"
        )
        ledger.measure("drive-too-weak", plasma, math.nan, math.nan, "V", words, hint=hint)
        return
    if effect.to_Hz > highest or effect.from_Hz > highest:
        words = (
            f"no drive on {effect.ring} has held a plasma above {highest:g} Hz, and this one goes "
            f"to {max(effect.to_Hz, effect.from_Hz):g} Hz"
        )
        ledger.measure("drive-too-weak", plasma, math.nan, math.nan, "V", words, hint=hint)
        return
    words += f", and {least:g} V have held a plasma"
    volts = effect.amplitude_V
    ledger.measure("drive-too-weak", plasma, volts, volts, "V", words, least, hint)


def _turn(ledger: Ledger, plasma: Being, effect: Rotated, before: Settled) -> None:
    density, radius = before.figures["density"], plasma.figures["radius"]
    debye = scales.debye_length_m(
        density_per_m3=density.value,
        temperature_K=plasma.figures["temperature"].value,
        charge_e=plasma.charge_e,
    )
    share = debye / radius.value
    if effect.backwards or not share < DEBYE_SHARE_MAX:
        quantity = "Debye length over the radius"
        reason = Outside(MODEL, quantity, share, DEBYE_SHARE_MAX, "", "below")
        if effect.backwards:
            reason = Outside(MODEL, "sense of the drive", -1.0, 0.0, "", "above")
        ledger.lose(plasma, ["radius"], [reason])
        _pass(ledger, plasma)
        return
    begins, ends = (
        _density(ledger, plasma, hertz / effect.order) for hertz in (effect.from_Hz, effect.to_Hz)
    )
    turn = before.figures["rotation"]
    start_Hz = effect.from_Hz / effect.order
    ledger.measure(
        "drive-slips",
        plasma,
        (turn.low - start_Hz) / start_Hz,
        (turn.high - start_Hz) / start_Hz,
        "",
        f"the drive begins at {start_Hz:g} Hz, below the rotation of {plasma.name} by {{value}}",
        hint="begin at the plasma's rotation or above it",
    )
    heat_eV = _heat_eV(plasma, before, begins)
    _judge_heat(ledger, plasma, before, heat_eV)
    after = _radius(ledger, plasma, ends)
    if after is None:
        reason = Outside(MODEL, "room for the plasma", 0.0, 0.0, "m", "above")
        ledger.lose(plasma, ["radius"], [reason])
    else:
        plasma.know("radius", after)
    warm = plasma.figures["temperature"]
    heated = heat_eV / (1.5 * THERMAL_EV_PER_K)
    plasma.figures["temperature"] = Figure(warm.value, warm.low, warm.high + heated)
    _pass(ledger, plasma)
    if after is not None:
        vector = ledger.volts.at(ledger.span.end_s).tobytes()
        plasma.locked = (ends, vector, plasma.figures["number"], plasma.figures["radius"])


def _pass(ledger: Ledger, plasma: Being) -> None:
    """The time of the step goes by; the drive keeps the radius from growing."""
    held = plasma.figures["radius"]
    ledger.catch_up(plasma, ledger.span.end_s)
    plasma.figures["radius"] = held


def _density(ledger: Ledger, plasma: Being, rotation_Hz: float) -> Figure:
    value = scales.density_of_rotation_per_m3(
        rotation_rad_per_s=2.0 * math.pi * rotation_Hz,
        magnetic_field_T=passing.field_T(ledger, plasma),
        mass_kg=plasma.mass_kg,
        charge_e=plasma.charge_e,
    )
    return Figure(value, value * (1.0 - DENSITY_SHARE), value * (1.0 + DENSITY_SHARE))


def _heat_eV(plasma: Being, before: Settled, density: Figure) -> float:
    """(W/2)(x - 1 - ln x), x = (r1/rp)^2 = n/n1, eV per particle, at the upper end; 0 if wider."""
    length = before.figures["length"]
    scale = abs(plasma.charge_e) ** 2 * COULOMB_VM * plasma.figures["number"].high / length.low
    ratio = density.high / before.figures["density"].value
    if not ratio > 1.0:
        return 0.0
    return 0.5 * scale * (ratio - 1.0 - math.log(ratio))


def _judge_heat(ledger: Ledger, plasma: Being, before: Settled, heat_eV: float) -> None:
    tau_s = time_constant_s(
        magnetic_field_T=passing.field_T(ledger, plasma),
        mass_kg=plasma.mass_kg,
        charge_e=plasma.charge_e,
    )
    factor = ledger.trap.margins.depth_over_temperature
    hottest_eV = abs(plasma.charge_e) * before.figures["depth_left"].low / factor
    share = heat_eV / (1.5 * hottest_eV * ledger.duration.value / tau_s)
    ledger.measure(
        "compression-overheats",
        plasma,
        0.0,
        share,
        "",
        f"compression frees {{value}} times the heat that {plasma.name} can radiate in this step "
        "while its well still holds it",
        hint="begin the drive at the plasma's own rotation and raise it slowly",
    )


def _radius(ledger: Ledger, plasma: Being, density: Figure) -> Figure | None:
    """rp = sqrt(N/(pi n L)), with the log column's L worked out again for each rp."""
    start_s = ledger.span.start_s
    place = ledger.homes.place_m(plasma.name, ledger.block, start_s)
    sign = 1 if plasma.charge_e > 0 else -1
    if place is None:
        return None
    well = trough(ledger.field, sign, ledger.volts.at(start_s), place)
    radius = plasma.figures["radius"]
    for _ in range(ROUNDS):
        if well is None:
            return None
        plasma.figures["radius"], kept = radius, plasma.figures["radius"]
        found = ledger.bench.column(well, [plasma])
        plasma.figures["radius"] = kept
        if found.outside:
            return None
        area = times(plasma.figures["number"], power(times(density, found.length_m), -1.0))
        square = Figure(*(end / math.pi for end in (area.value, area.low, area.high)))
        radius = power(square, 0.5)
    return radius
