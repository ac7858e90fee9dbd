"""A cloud that no step names → how it follows its moving well, and how it ages.

Moving: eps of the motion (adiabatic.py) is measured for `ramp-not-adiabatic`; temperature and
length follow the conserved action, as far as collisions share the energy.  Switch edges count as
sudden: a sudden change of ln w by s counts as eps = s.  Where the field changes along the axis a
cloud keeps r² B.

Ageing: a species that radiates cools towards its floor (cooling.py), any other only gains what the
trap file states of heating; one that shares its well with a radiating coolant stays between the
two temperatures.  Heating that the trap file does not state is not known: then nothing is said but
that the cloud stays between its floor without heating and its present temperature.  A radius grows
with the `expansion_time` of the trap file at most, and not at all at least.

Units: K, s, m, T, kg, 1/m3.  Intervals at corners.
"""

from __future__ import annotations

import math
from fractions import Fraction
from typing import TYPE_CHECKING, Any

from wellseq.clouds.beings import Being
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.clouds.intervals import hull, plus, times
from wellseq.clouds.moving import Motion, ramped
from wellseq.clouds.radiation import expansion_heating_K_per_s, time_constant_s

if TYPE_CHECKING:
    from wellseq.clouds.ledger import Ledger

SLOW_TIME_CONSTANTS = 1e-3
"""A species whose radiation takes so small a share of its time constant is not cooled by it."""


def follow(ledger: Ledger, being: Being, until_s: Fraction) -> None:
    """Bring a cloud from where its ledger stands to an instant (s) of the block."""
    start_s = being.at_s
    being.at_s = until_s
    if ledger.homes.at(being.name, ledger.block, until_s) is None:
        return
    motion = Motion.between(ledger.volts, start_s, until_s)
    if motion.moves and being.complete:
        ramped(ledger, being, motion)
    length = float(until_s - start_s)
    if length > 0.0:
        _age(ledger, being, Figure(length, length, length), until_s)


def age(ledger: Ledger, being: Being, duration_s: Figure) -> None:
    """Let time pass that has no place in a block: the wait for a trigger, s."""
    _age(ledger, being, duration_s, being.at_s)


def _age(ledger: Ledger, being: Being, duration_s: Figure, at_s: Fraction) -> None:
    grow(ledger, being, duration_s)
    if not being.figures["temperature"].known:
        return
    if radiates(ledger, being, duration_s.high):
        if not being.complete:
            return
        _radiate(ledger, being, duration_s, at_s)
        return
    coolants = [
        one
        for one in ledger.company(being, at_s)
        if one is not being and radiates(ledger, one, duration_s.high)
    ]
    heat = _stated(ledger) or Figure(0.0, 0.0, 0.0)
    warm = plus(being.figures["temperature"], times(heat, duration_s))
    if coolants:
        others = [one.figures["temperature"] for one in coolants]
        warm = Figure(
            warm.value,
            min(warm.low, *(one.low for one in others)),
            max(warm.high, *(one.high for one in others)),
        )
    being.figures["temperature"] = warm


def radiates(ledger: Ledger, being: Being, duration_s: float) -> bool:
    """Whether cyclotron radiation matters to a species within a time in s."""
    tau_s = time_constant_s(
        magnetic_field_T=field_T(ledger, being), mass_kg=being.mass_kg, charge_e=being.charge_e
    )
    return duration_s > SLOW_TIME_CONSTANTS * tau_s


def field_T(ledger: Ledger, being: Being) -> float:
    """The magnetic field at the cloud, T without sign."""
    place = ledger.homes.place_m(being.name, ledger.block, being.at_s)
    return abs(ledger.trap.field.at(0.0 if place is None else place))


def grow(ledger: Ledger, being: Being, duration_s: Figure) -> None:
    """A radius grows by at most e in the measured expansion time."""
    tau_s = ledger.trap.bore.expansion_time_s
    radius = being.figures["radius"]
    if tau_s is None or not radius.known:
        return
    share = math.exp(min(duration_s.high / tau_s, 50.0))
    value = math.exp(min(duration_s.value / tau_s, 50.0))
    being.figures["radius"] = Figure(radius.value * value, radius.low, radius.high * share)


def _stated(ledger: Ledger) -> Figure | None:
    noise = ledger.trap.bore.noise_heating_K_per_s
    return None if noise is None else Figure(noise, 0.0, noise)


def heating_K_per_s(ledger: Ledger, being: Being, length_m: Figure) -> Figure | None:
    """What heats a plasma, K/s: measured noise and its own expansion; None when not both stated."""
    noise, tau_s = _stated(ledger), ledger.trap.bore.expansion_time_s
    if noise is None or tau_s is None:
        return None
    number = being.figures["number"]
    grown = [
        expansion_heating_K_per_s(
            number=count, length_m=length, expansion_time_s=tau_s, charge_e=being.charge_e
        )
        for count, length in (
            (number.value, length_m.value),
            (number.high, length_m.low),
        )
    ]
    return plus(noise, Figure(grown[0], 0.0, grown[1]))


def _radiate(ledger: Ledger, being: Being, duration_s: Figure, at_s: Fraction) -> None:
    found = radiated(ledger, being, duration_s, at_s, None)
    if found is None:
        return
    if found["unsettled"]:
        # No equilibrium, so no collision rate: the row says why.  Nothing heats it meanwhile.
        warm, bore_K = being.figures["temperature"], ledger.trap.bore.temperature_K
        coldest = warm.low if bore_K is None else min(warm.low, bore_K)
        being.figures["temperature"] = Figure(warm.value, coldest, warm.high)
        return
    if found["outside"]:
        ledger.lose(being, ["temperature"], [Outside(*one) for one in found["outside"]])
        return
    temperature = Figure(*found["temperature"])
    # Whatever else is in the well and hotter gives its heat to the cloud at most once.
    extra = sum(
        one.figures["number"].high / being.figures["number"].low * one.figures["temperature"].high
        for one in ledger.company(being, at_s)
        if one is not being and one.figures["temperature"].high > temperature.high
    )
    being.figures["temperature"] = Figure(
        temperature.value, temperature.low, temperature.high + extra
    )


def radiated(
    ledger: Ledger, being: Being, duration_s: Figure, at_s: Fraction, goal_K: float | None
) -> dict[str, Any] | None:
    """Radiative cooling over a time in s, as a plain answer; None when the cloud is nowhere.

    Keys: temperature, floor, goal_s (ends of figures), stalls_K, outside, unsettled (no density).
    Where heating is not
    stated the upper end of the temperature is the present one, and a goal may never be reached.
    """
    settled = ledger.settle(being, at_s)
    bore_K = ledger.trap.bore.temperature_K
    if settled is None:
        return None
    density, length = settled.figures["density"], settled.figures["length"]
    if settled.outside or not density.known or bore_K is None:
        missing = settled.outside or (
            Outside("radiative cooling", "temperature of the bore", math.nan, 0.0, "K", "above"),
        )
        return _unanswered(missing)
    heating = heating_K_per_s(ledger, being, length)
    start = being.figures["temperature"]
    facts = {
        "start_K": start,
        "bore_K": Figure(bore_K, bore_K, bore_K),
        "density_per_m3": density,
        "heating_K_per_s": heating or Figure(0.0, 0.0, 0.0),
    }
    fixed: dict[str, Any] = {
        "magnetic_field_T": field_T(ledger, being),
        "mass_kg": being.mass_kg,
        "charge_e": abs(being.charge_e),
        "goal_K": goal_K,
    }
    question = ["cool", *fixed.values(), *_ends(duration_s)]
    question += [end for figure in facts.values() for end in _ends(figure)]
    found: dict[str, Any] = ledger.memory.answer(
        question, lambda: _cooled(facts, fixed, duration_s)
    )
    if heating is None and not found["outside"]:
        value, low, _ = found["temperature"]
        found = {
            **found,
            "temperature": (value, low, max(start.high, value)),
            "floor": (found["floor"][0], found["floor"][1], math.inf),
            "goal_s": (found["goal_s"][0], found["goal_s"][1], math.inf),
        }
    return found


def _cooled(facts: dict[str, Figure], fixed: dict[str, Any], duration_s: Figure) -> dict[str, Any]:
    from wellseq.clouds.cooling import cool_range

    every = [
        cool_range(duration_s=length, **facts, **fixed)
        for length in dict.fromkeys((duration_s.value, duration_s.low, duration_s.high))
    ]
    best = every[0]
    spans = NOT_KNOWN if best.outside else hull([one.temperature_K for one in every])
    return {
        "temperature": _ends(spans),
        "floor": _ends(best.floor_K),
        "goal_s": _ends(best.both_s),
        "stalls_K": best.best.stalls_K,
        "outside": [
            [one.model, one.quantity, one.value, one.limit, one.unit, one.side]
            for one in best.outside
        ],
        "unsettled": False,
    }


def _unanswered(reasons: tuple[Outside, ...]) -> dict[str, Any]:
    blank = (math.nan,) * 3
    plain = [[one.model, one.quantity, one.value, one.limit, one.unit, one.side] for one in reasons]
    return {
        "temperature": blank,
        "floor": blank,
        "goal_s": blank,
        "stalls_K": math.nan,
        "outside": plain,
        "unsettled": True,
    }


def _ends(figure: Figure) -> tuple[float, float, float]:
    return figure.value, figure.low, figure.high
