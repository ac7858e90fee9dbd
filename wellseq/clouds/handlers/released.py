"""released: a cloud is let go; how much comes out, and which temperature its slope would show.

The hybrid of release.py, through the rows as shipped.  A cloud whose space charge takes more than a
tenth of its depth has no figures there: that is said in the ledger, and nothing else depends on it.
Units: s, K, V, m.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from wellseq.clouds.figures import Figure, Outside
from wellseq.clouds.rest import reason_plain
from wellseq.model.effects import Released

if TYPE_CHECKING:
    from wellseq.clouds.beings import Being
    from wellseq.clouds.ledger import Ledger

MODEL = "release"
SPACE_CHARGE_SHARE = 0.1


def act(ledger: Ledger, effect: Released) -> set[str]:
    """Let a cloud and all that share its well go."""
    being = ledger.beings.get(effect.cloud)
    if being is None:
        return set()
    start_s = ledger.span.start_s
    ledger.catch_up(being, start_s)
    here = ledger.homes.at(being.name, ledger.block, start_s)
    gone = [being]
    if here is not None:
        gone += [
            one
            for one in ledger.beings.values()
            if one is not being
            and ledger.homes.together(here, ledger.homes.at(one.name, ledger.block, start_s))
        ]
    for one in gone:
        ledger.catch_up(one, start_s)
        _let_go(ledger, one, effect)
    for one in gone:
        del ledger.beings[one.name]
    return {one.name for one in gone}


def _let_go(ledger: Ledger, being: Being, effect: Released) -> None:
    start_s = ledger.span.start_s
    place = ledger.homes.place_m(being.name, ledger.block, start_s)
    settled = ledger.settle(being, start_s)
    if place is None or settled is None:
        ledger.write(being, {}, "none", spread="declared")
        return
    left, taken = settled.figures["depth_left"], settled.figures["space_charge"]
    share = taken.high / (left.value + taken.value)
    if settled.outside or not share <= SPACE_CHARGE_SHARE:
        reasons = settled.outside or (
            Outside(MODEL, "space charge over the depth", share, SPACE_CHARGE_SHARE),
        )
        ledger.write(being, {}, MODEL, reasons)
        return
    found = _answer_of(ledger, being, effect, place)
    figures = {
        "share": Figure(*found["share"]),
        "apparent_temperature": Figure(*found["apparent"]),
    }
    outside = [Outside(*one) for one in found["outside"]]
    ledger.write(being, figures, MODEL, outside)


def _answer_of(ledger: Ledger, being: Being, effect: Released, place_m: float) -> dict[str, Any]:
    from wellseq.clouds.playback import waveforms

    start, end = float(ledger.span.start_s), float(ledger.span.end_s)
    waves = waveforms(ledger.trap, ledger.played, start, end)
    gate = ledger.trap.electrode(effect.through[0]).middle_m
    towards = 1 if gate > place_m else -1
    stack = ledger.trap.electrodes
    exit_m = stack[-1].to_m if towards > 0 else stack[0].from_m
    kelvin = being.figures["temperature"]
    facts: dict[str, Any] = {
        "mass_kg": being.mass_kg,
        "charge_e": being.charge_e,
        "at_m": place_m,
        "towards": towards,
        "exit_m": exit_m,
    }
    question: list[object] = ["release", *facts.values(), kelvin.value, kelvin.low, kelvin.high]
    question += [(waves.times_s - start).round(12).tobytes(), waves.volts.tobytes()]
    answer: dict[str, Any] = ledger.memory.answer(
        question, lambda: _answer(ledger, waves, facts, kelvin, (start, end))
    )
    return answer


def _answer(
    ledger: Ledger, waves: Any, facts: dict[str, Any], kelvin: Figure, window: tuple[float, float]
) -> dict[str, Any]:
    from wellseq.clouds.forces import table_of
    from wellseq.clouds.release import release

    found = release(
        table=table_of(ledger.field),
        waves=waves,
        temperature_K=kelvin,
        start_s=window[0],
        end_s=window[1],
        **facts,
    )
    return {
        "share": _ends(found.share_through),
        "apparent": _ends(found.apparent_K),
        "outside": [reason_plain(one) for one in found.outside],
    }


def _ends(figure: Figure) -> tuple[float, float, float]:
    return figure.value, figure.low, figure.high
