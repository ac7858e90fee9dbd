"""kicked: the light cloud leaves through a gate opened for a moment; what the heavy one keeps.

Test particles are flown through the rows as shipped (kick.py).  What the heavy ones gain along the
axis becomes temperature: two thirds of it where collisions share it out, at most twice the gain
where they do not.  Where the light cloud's space charge takes more than a tenth of the depth the
flight, which knows none, has no figure.  Units: s, K, eV, V, m.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from wellseq.clouds.constants import THERMAL_EV_PER_K
from wellseq.clouds.figures import Figure, Outside
from wellseq.clouds.intervals import times
from wellseq.clouds.rest import reason_plain
from wellseq.model.effects import Kicked

if TYPE_CHECKING:
    from wellseq.clouds.beings import Being
    from wellseq.clouds.ledger import Ledger

MODEL = "kick"
SPACE_CHARGE_SHARE = 0.1


def act(ledger: Ledger, effect: Kicked) -> set[str]:
    """The light cloud goes; the heavy one stays with what it keeps."""
    light, heavy = ledger.beings.get(effect.light), ledger.beings.get(effect.keeping)
    for one in (light, heavy):
        if one is not None:
            ledger.catch_up(one, ledger.span.start_s)
            one.at_s = ledger.span.end_s
    if light is not None and heavy is not None:
        _kick(ledger, effect, light, heavy)
    if light is not None:
        ledger.beings.pop(light.name, None)
    return {effect.light, effect.keeping}


def _kick(ledger: Ledger, effect: Kicked, light: Being, heavy: Being) -> None:
    start_s = ledger.span.start_s
    place = ledger.homes.place_m(heavy.name, ledger.block, start_s)
    settled = ledger.settle(light, start_s)
    lost = ["number", "temperature"]
    if not heavy.complete or not light.complete or settled is None or place is None:
        ledger.write(light, {}, "none", spread="declared")
        ledger.lose(heavy, lost, [Outside(MODEL, "what is known of the clouds", 0.0, 0.0)])
        return
    left, taken = settled.figures["depth_left"], settled.figures["space_charge"]
    share = taken.high / (left.value + taken.value)
    if settled.outside or not share <= SPACE_CHARGE_SHARE:
        reasons = settled.outside or (
            Outside(MODEL, "space charge over the depth", share, SPACE_CHARGE_SHARE),
        )
        ledger.write(light, {}, MODEL, reasons)
        ledger.lose(heavy, lost, reasons)
        return
    found = _answer_of(ledger, effect, light, heavy, place)
    reasons = tuple(Outside(*one) for one in found["outside"])
    ledger.write(light, {"share": Figure(*found["light"])}, MODEL, reasons, "samples")
    if reasons:
        ledger.lose(heavy, lost, reasons)
        return
    kept, gain = Figure(*found["heavy"]), Figure(*found["gain"])
    heavy.figures["number"] = times(heavy.figures["number"], kept)
    warm = heavy.figures["temperature"]
    heavy.figures["temperature"] = Figure(
        warm.value + 2.0 / 3.0 * max(gain.value, 0.0) / THERMAL_EV_PER_K,
        warm.low,
        warm.high + 2.0 * max(gain.high, 0.0) / THERMAL_EV_PER_K,
    )
    ledger.write(heavy, {"share": kept, "energy_gained": gain}, MODEL, (), "samples")


def _answer_of(
    ledger: Ledger, effect: Kicked, light: Being, heavy: Being, place_m: float
) -> dict[str, Any]:
    from wellseq.clouds.playback import waveforms

    start, end = float(ledger.span.start_s), float(ledger.span.end_s)
    shapes = ("straight", "pole")
    waves = [waveforms(ledger.trap, ledger.played, start, end, shape) for shape in shapes]
    gates = [ledger.trap.electrode(name).middle_m for name in effect.through]
    stack = ledger.trap.electrodes
    right = gates[0] > place_m
    facts = {
        "at_m": place_m,
        "gate_m": max(gates) if right else min(gates),
        "exit_m": stack[-1].to_m if right else stack[0].from_m,
    }
    pair = [(one.mass_kg, one.charge_e, one.figures["temperature"]) for one in (light, heavy)]
    question: list[object] = ["kick", *facts.values()]
    question += [part for one in pair for part in (one[0], one[1], *_ends(one[2]))]
    question += [
        part
        for one in waves
        for part in ((one.times_s - start).round(12).tobytes(), one.volts.tobytes())
    ]
    answer: dict[str, Any] = ledger.memory.answer(
        question, lambda: _answer(ledger, waves, facts, pair, (start, end))
    )
    return answer


def _answer(
    ledger: Ledger,
    waves: list[Any],
    facts: dict[str, float],
    pair: list[tuple[float, float, Figure]],
    window: tuple[float, float],
) -> dict[str, Any]:
    from wellseq.clouds.forces import table_of
    from wellseq.clouds.kick import Dweller, kick

    light, heavy = (Dweller(*one) for one in pair)
    found = kick(
        table=table_of(ledger.field),
        waves=waves[0],
        other_edges=waves[1:],
        light=light,
        heavy=heavy,
        start_s=window[0],
        end_s=window[1],
        **facts,
    )
    return {
        "light": _ends(found.light.kept),
        "heavy": _ends(found.heavy.kept),
        "gain": _ends(found.heavy.gain_eV),
        "outside": [reason_plain(one) for one in found.outside],
    }


def _ends(figure: Figure) -> tuple[float, float, float]:
    return figure.value, figure.low, figure.high
