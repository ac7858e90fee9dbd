"""caught: which share of a bunch stays when the gate shuts then, and when it had better shut.

Test particles are flown through the edges of the rows as shipped (catching.py); the middle of the
bunch passes the middle of the near gate the trap file's `arrival` after the trigger; arrivals are
spread evenly over the declared duration, energies evenly over the declared interval.

Units: s, eV, V, m.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

from wellseq.clouds.beings import Being, being_of
from wellseq.clouds.figures import Figure, Outside
from wellseq.clouds.intervals import hull, plus, times
from wellseq.clouds.rest import reason_plain
from wellseq.model.effects import Caught

if TYPE_CHECKING:
    from wellseq.clouds.ledger import Ledger

MODEL = "catching"
KEYS = ("best_closing", "earliest_closing", "latest_closing")


def act(ledger: Ledger, effect: Caught) -> set[str]:
    """The bunch comes, or adds to what was caught before."""
    declared = ledger.timeline.clouds[effect.cloud]
    before = ledger.beings.get(effect.cloud)
    being = being_of(declared, ledger.block, ledger.span.end_s)
    ledger.beings[effect.cloud] = being
    if before is not None and before.figures["radius"].known:
        being.figures["radius"] = hull([being.figures["radius"], before.figures["radius"]])
        if not being.figures["radius"].known:
            being.lost["radius"] = f"the radius of {being.name} is not declared"
    here = before.figures["number"] if before is not None else Figure(0.0, 0.0, 0.0)
    if not being.figures["number"].known or declared.energy is None or declared.duration is None:
        what = "number" if not being.figures["number"].known else "energy and duration"
        being.figures["number"] = Figure(math.nan, math.nan, math.nan)
        being.lost["number"] = f"the {what} of {being.name} is not declared"
        return {effect.cloud}
    found = _answer_of(ledger, being, effect)
    share = Figure(*found["share"])
    if found["outside"]:
        ledger.lose(being, ["number"], [Outside(*one) for one in found["outside"]])
    elif before is not None and not here.known:
        being.figures["number"] = here
        being.lost["number"] = before.lost.get("number", "")
    else:
        being.figures["number"] = plus(here, times(being.figures["number"], share))
    figures = {"share": share} | {key: Figure(*(found[key],) * 3) for key in KEYS}
    outside = [Outside(*one) for one in found["outside"]]
    ledger.write(being, figures, MODEL, outside, "samples")
    if not outside:
        _judge(ledger, being, effect, found)
    return {effect.cloud}


def _answer_of(ledger: Ledger, being: Being, effect: Caught) -> dict[str, Any]:
    from wellseq.clouds.playback import waveforms

    end_s = float(ledger.span.end_s)
    shapes = ("straight", "pole")
    waves = [waveforms(ledger.trap, ledger.played, 0.0, end_s, shape) for shape in shapes]
    first_s = float(ledger.played.block.first_row_s)
    energy, duration = being.declared.energy, being.declared.duration
    assert energy is not None
    assert duration is not None
    trigger = ledger.trap.trigger(ledger.played.block.trigger)
    facts: dict[str, Any] = {
        "mass_kg": being.mass_kg,
        "charge_e": being.charge_e,
        "near_m": ledger.trap.electrode(effect.near).middle_m,
        "far_m": ledger.trap.electrode(effect.far).middle_m,
        "closing_s": effect.closing_s - first_s,
        "jitter_s": float(ledger.played.block.jitter_s),
    }
    spread = (
        float(energy.value),
        float(energy.half_width),
        float(duration.value + duration.half_width) / 2.0,
        first_s,
        float(trigger.arrival_s) - first_s,
    )
    question = ["catch", *facts.values(), *spread]
    question += [part.tobytes() for one in waves for part in (one.times_s, one.volts)]
    answer: dict[str, Any] = ledger.memory.answer(
        question, lambda: _answer(ledger, waves, facts, spread)
    )
    return answer


def _answer(
    ledger: Ledger, waves: list[Any], facts: dict[str, Any], spread: tuple[float, ...]
) -> dict[str, Any]:
    from wellseq.clouds.catching import Bunch, catch
    from wellseq.clouds.forces import table_of
    from wellseq.clouds.swarm import Spreading

    energy_eV, half_eV, half_s, first_s, arrival_s = spread
    bunch = Bunch(Spreading(energy_eV, half_eV), Spreading(arrival_s, half_s))
    found = catch(
        table=table_of(ledger.field), waves=waves[0], other_edges=waves[1:], bunch=bunch, **facts
    )
    return {
        "share": (found.share.value, found.share.low, found.share.high),
        "early": found.early,
        "late": found.late,
        "energetic": found.energetic,
        "best_closing": found.best_closing_s + first_s,
        "earliest_closing": found.good_from_s + first_s,
        "latest_closing": found.good_to_s + first_s,
        "outside": [reason_plain(one) for one in found.outside],
    }


def _judge(ledger: Ledger, being: Being, effect: Caught, found: dict[str, Any]) -> None:
    jitter_s = float(ledger.played.block.jitter_s)
    low, high = effect.closing_s - jitter_s, effect.closing_s + jitter_s
    name, best = being.name, found["best_closing"]
    hint = f"close {best * 1e9:.0f} ns after the trigger, where most are caught"
    lost = f"{found['late']:.0%} of {name} is out again, {found['early']:.0%} not in yet"
    for check, word, key in (
        ("catch-gate-late", "later", "latest_closing"),
        ("catch-gate-early", "sooner", "earliest_closing"),
    ):
        words = (
            f"{effect.near} is half shut {{value}} after the trigger; most of {name} is caught "
            f"no {word} than {{limit}}: {lost}"
        )
        ledger.measure(check, being, low, high, "s", words, found[key], hint)
    escapes = found["energetic"]
    ledger.measure(
        "catch-energy-escapes",
        being,
        escapes,
        escapes,
        "",
        f"a share of {{value}} of {name} has more energy than the gates hold",
        hint="more volts on the gates, or a slower bunch",
    )
