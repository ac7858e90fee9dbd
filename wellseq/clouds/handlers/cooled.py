"""cooled: a cloud loses its heat to radiation or to a coolant; when it is as cold as was claimed.

Claims (`until`) are measured as: the floor against the goal (`never-that-cold`), the time at which
the goal is reached against the step (`cooling-too-short`), the goal over the temperature below
which collisions are slower than radiation (`parallel-cooling-stalls`).  Units: K, s, V, 1/m3.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from fractions import Fraction
from typing import TYPE_CHECKING, Any

from wellseq.clouds import passing
from wellseq.clouds.figures import Figure, Outside
from wellseq.clouds.rest import reason_plain
from wellseq.model.effects import Cooled

if TYPE_CHECKING:
    from wellseq.clouds.beings import Being
    from wellseq.clouds.ledger import Ledger

SYMPATHETIC = "sympathetic cooling"
HINT = "a longer step, a stronger field or a colder start; or say what was measured with `assume`"


def act(ledger: Ledger, effect: Cooled) -> set[str]:
    """Cool one cloud, and warm its coolant."""
    being = ledger.beings.get(effect.cloud)
    if being is None:
        return set()
    ledger.catch_up(being, ledger.span.start_s)
    coolant = ledger.beings.get(effect.coolant)
    if coolant is not None:
        ledger.catch_up(coolant, ledger.span.start_s)
    start_s = ledger.span.start_s
    acted = [one for one in (being, coolant) if one is not None]
    if coolant is None:
        _alone(ledger, being, effect, start_s)
    else:
        _together(ledger, being, coolant, effect, start_s)
    for one in acted:
        one.at_s = ledger.span.end_s
        passing.grow(ledger, one, ledger.duration)
    return {one.name for one in acted}


def _alone(ledger: Ledger, being: Being, effect: Cooled, start_s: Fraction) -> None:
    if not being.complete:
        _unknown(ledger, being, effect, "radiative cooling")
        return
    found = passing.radiated(ledger, being, ledger.duration, start_s, effect.until_K)
    if found is None:
        return
    if found["outside"]:
        reasons = [Outside(*one) for one in found["outside"]]
        ledger.lose(being, ["temperature"], reasons, told_by(reasons))
        _claim_unknown(ledger, being, effect)
        return
    being.figures["temperature"] = Figure(*found["temperature"])
    if effect.until_K is not None:
        _judge(ledger, being, effect.until_K, found)


def _unknown(ledger: Ledger, being: Being, effect: Cooled, model: str) -> None:
    """A cloud without a temperature is cooled: there is no figure, and that is said here."""
    if not being.figures["temperature"].known:
        energy = being.declared.energy
        mean = float(energy.value) if energy is not None else math.nan
        reason = Outside(model, "mean energy of a bunch without a temperature", mean, 0.0, "eV")
        ledger.lose(being, ["temperature"], [reason])
    _claim_unknown(ledger, being, effect)


def _claim_unknown(ledger: Ledger, being: Being, effect: Cooled) -> None:
    if effect.until_K is not None:
        words = f"when {being.name} is at {effect.until_K:g} K is not known: {being.cites()}"
        ledger.measure("cooling-too-short", being, math.nan, math.nan, "s", words, hint=HINT)


def _together(
    ledger: Ledger, being: Being, coolant: Being, effect: Cooled, start_s: Fraction
) -> None:
    light = ledger.settle(coolant, start_s)
    if light is not None and light.outside:
        for one in (being, coolant):
            ledger.lose(one, ["temperature"], light.outside, told_by(light.outside))
        _claim_unknown(ledger, being, effect)
        return
    if not being.complete or not coolant.complete or light is None:
        if not coolant.complete and being.complete:
            reason = Outside(SYMPATHETIC, f"what is known of {coolant.name}", math.nan, 0.0)
            ledger.lose(being, ["temperature"], [reason])
            _claim_unknown(ledger, being, effect)
            return
        _unknown(ledger, being, effect, SYMPATHETIC)
        return
    bore_K = ledger.trap.bore.temperature_K
    if bore_K is None:
        reason = Outside(SYMPATHETIC, "temperature of the bore", math.nan, 0.0, "K", "above")
        ledger.lose(being, ["temperature"], [reason])
        _claim_unknown(ledger, being, effect)
        return
    length = light.figures["length"]
    heating = passing.heating_K_per_s(ledger, coolant, length)
    facts = {
        "heavy_number": being.figures["number"],
        "heavy_K": being.figures["temperature"],
        "coolant_number": coolant.figures["number"],
        "coolant_density_per_m3": light.figures["density"],
        "coolant_K": coolant.figures["temperature"],
        "bore_K": Figure(bore_K, bore_K, bore_K),
        "coolant_depth_eV": light.figures["depth_left"],
        "rotation_rad_per_s": _angular(light.figures["rotation"], coolant.figures["radius"]),
        "heating_K_per_s": heating or Figure(0.0, 0.0, 0.0),
    }
    fixed = {
        "heavy_mass_kg": being.mass_kg,
        "coolant_mass_kg": coolant.mass_kg,
        "heavy_charge_e": being.charge_e,
        "coolant_charge_e": coolant.charge_e,
        "magnetic_field_T": passing.field_T(ledger, coolant),
        "radius_m": coolant.figures["radius"].value,
    }
    seconds = ledger.duration.value
    goals = () if effect.until_K is None else (effect.until_K,)
    question = ["sympathetic", *fixed.values(), seconds, *goals]
    question += [end for one in facts.values() for end in (one.value, one.low, one.high)]
    found = ledger.memory.answer(question, lambda: _answer(facts, fixed, seconds, goals))
    _take(ledger, being, coolant, effect, found, heating is not None)


def _take(
    ledger: Ledger,
    being: Being,
    coolant: Being,
    effect: Cooled,
    found: dict[str, Any],
    stated: bool,
) -> None:
    if found["outside"]:
        reasons = [Outside(*one) for one in found["outside"]]
        ledger.lose(being, ["temperature"], reasons)
        # The heavy cloud has heated the coolant by an unknown amount; radiation has not stopped.
        ledger.lose(coolant, ["temperature"], reasons)
        _claim_unknown(ledger, being, effect)
        return
    for one, key in ((being, "heavy_K"), (coolant, "coolant_K")):
        value, low, high = found[key]
        ceiling = high if stated else max(high, one.figures["temperature"].high)
        one.figures["temperature"] = Figure(value, low, ceiling)
    if effect.until_K is not None:
        goal = [*found["goals_s"][0]]
        floor = found["floor"]
        if not stated:
            goal[2], floor = math.inf, (floor[0], floor[1], math.inf)
        told = {"goal_s": goal, "floor": floor, "stalls_K": 0.0}
        _judge(ledger, being, effect.until_K, told)


def _answer(
    facts: dict[str, Figure], fixed: dict[str, float], seconds: float, goals: tuple[float, ...]
) -> dict[str, Any]:
    from wellseq.clouds.sympathetic import Mixture, cool_with_range

    mixture = Mixture(**fixed, **{name: figure.value for name, figure in facts.items()})
    found = cool_with_range(mixture, duration_s=seconds, goals_K=goals, **facts)
    return {
        "heavy_K": _ends(found.heavy_K),
        "coolant_K": _ends(found.coolant_K),
        "goals_s": [_ends(one) for one in found.goals_s],
        "floor": (found.best.floor_K,) * 3,
        "outside": [reason_plain(one) for one in found.outside],
    }


def _judge(ledger: Ledger, being: Being, until_K: float, found: dict[str, Any]) -> None:
    _, low, high = found["floor"]
    name = being.name
    ledger.measure(
        "never-that-cold",
        being,
        low,
        high,
        "K",
        f"{name} never gets colder than {{value}}, and {{limit}} is claimed",
        until_K,
        "a colder bore, less heating or slower expansion; or a warmer claim",
    )
    if low >= until_K:
        return
    _, first, last = found["goal_s"]
    ledger.measure(
        "cooling-too-short",
        being,
        first,
        last,
        "s",
        f"{name} is at {until_K:g} K after {{value}}, and the step lasts {{limit}}",
        ledger.duration.value,
        HINT,
    )
    stalls = found["stalls_K"]
    if stalls is not None and math.isfinite(stalls) and stalls > 0.0:
        ratio = until_K / stalls
        ledger.measure(
            "parallel-cooling-stalls",
            being,
            ratio,
            ratio,
            "",
            f"{until_K:g} K is {{value}} times the temperature below which collisions of {name} "
            "are slower than its radiation",
            hint="a denser cloud or a weaker field; the parallel temperature stays behind",
        )


def told_by(reasons: Sequence[Outside]) -> str:
    """The check that reports an equilibrium that is not there; empty for other reasons."""
    from wellseq.clouds.at_rest import FINDINGS

    names = {FINDINGS.get(reason.quantity, "") for reason in reasons}
    return names.pop() if len(names) == 1 else ""


def _angular(rotation_Hz: Figure, radius_m: Figure) -> Figure:
    """Rotation in rad/s for the best radius, so that w r spans what it can: w goes as 1/r^2."""
    turn, middle = 2.0 * math.pi, radius_m.value
    return Figure(
        rotation_Hz.value * turn,
        rotation_Hz.low * turn * radius_m.high / middle,
        rotation_Hz.high * turn * radius_m.low / middle,
    )


def _ends(figure: Figure) -> tuple[float, float, float]:
    return figure.value, figure.low, figure.high
