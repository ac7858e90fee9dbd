"""evaporated: the hottest of a cloud leave over a lowered side; how many stay, and how cold.

The written path is the own vacuum depth; the model takes the cloud's changing space charge off.
Where the model is left there is no figure, and `evaporation-too-fast` says by how much: the
quantity over what it must be at least.  Units: V (eV), K, s, m.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

from wellseq.clouds import passing
from wellseq.clouds.figures import Figure, Outside
from wellseq.clouds.rest import reason_plain
from wellseq.model.effects import Evaporated

if TYPE_CHECKING:
    from wellseq.clouds.beings import Being
    from wellseq.clouds.ledger import Ledger
    from wellseq.clouds.rest import Settled

PIECES = 12
"""Straight pieces of an exponential path."""
NOBODY_LEAVES = 20.0
"""A well that stays this many kT deep is followed like any other."""
HINT = "take longer, end higher, or begin with a denser cloud"


def act(ledger: Ledger, effect: Evaporated) -> set[str]:
    """Lower the depth of one cloud; all clouds of its well have to be the same species."""
    being = ledger.beings.get(effect.cloud)
    if being is None:
        return set()
    start_s, end_s = ledger.span.start_s, ledger.span.end_s
    ledger.catch_up(being, start_s)
    being.lowered_V = effect.to_V
    before = ledger.homes.at(being.name, ledger.block, start_s)
    place = ledger.homes.place_m(being.name, ledger.block, start_s)
    company = ledger.neighbours(being)
    for one in company:
        ledger.catch_up(one, start_s)
        one.at_s = end_s
    names = {one.name for one in company}
    if before is None or place is None or not being.complete:
        if not being.complete:
            _unknown(ledger, being)
        return names
    if len(company) > 1:
        reason = Outside("evaporation", "clouds in the well", float(len(company)), 1.0)
        for one in company:
            ledger.lose(one, ["temperature", "number"], [reason])
        return names
    settled = ledger.settle(being, start_s)
    if settled is None or settled.outside:
        ledger.lose(being, ["temperature", "number"], settled.outside if settled else ())
        return names
    if _keeps_all(being, effect, settled):
        for one in company:
            one.at_s = start_s
            ledger.catch_up(one, end_s)
        return names
    found = _answer_of(ledger, being, effect, settled.figures["length"], before.certified_V)
    _take(ledger, being, found)
    passing.grow(ledger, being, ledger.duration)
    return names


def _keeps_all(being: Being, effect: Evaporated, settled: Settled) -> bool:
    """Whether the well stays so deep that nobody leaves: then it is a ramp like any other."""
    warm = settled.figures["depth_left"].low / settled.kT_left.low
    left_V = effect.to_V - settled.figures["space_charge"].high
    return left_V > NOBODY_LEAVES * warm


def _unknown(ledger: Ledger, being: Being) -> None:
    reason = Outside("evaporation", "what is known of the cloud", math.nan, 0.0)
    ledger.lose(being, ["temperature", "number"], [reason])


def _answer_of(
    ledger: Ledger, being: Being, effect: Evaporated, length: Figure, from_V: float
) -> dict[str, Any]:
    charges = abs(being.charge_e)
    seconds = ledger.duration.value
    moving = [
        piece
        for piece in ledger.played.block.pieces
        if piece.number == ledger.span.number and piece.end_s > piece.start_s
    ]
    path = _path(from_V * charges, effect.to_V * charges, seconds, effect.exponentially)
    noise = ledger.trap.bore.noise_heating_K_per_s
    figures = being.figures
    facts = {
        "number": figures["number"],
        "temperature_K": figures["temperature"],
        "radius_m": figures["radius"],
    }
    fixed: dict[str, Any] = {
        "length_m": length.value,
        "magnetic_field_T": passing.field_T(ledger, being),
        "mass_kg": being.mass_kg,
        "path": path,
        "wall_m": ledger.field.radius_m,
        "heating_K_per_s": noise or 0.0,
    }
    question = ["evaporation", *fixed.values(), len(moving) > 0]
    question += [end for one in facts.values() for end in _ends(one)]
    answer: dict[str, Any] = ledger.memory.answer(question, lambda: _answer(facts, fixed))
    return answer


def _answer(facts: dict[str, Figure], fixed: dict[str, Any]) -> dict[str, Any]:
    from wellseq.clouds.evaporation import Evaporating, evaporate_range

    values = {name: figure.value for name, figure in facts.items()}
    found = evaporate_range(Evaporating(**values, **fixed), **facts)
    return {
        "number": _ends(found.number_range),
        "temperature": _ends(found.temperature_range_K),
        "radius": _ends(found.radius_range_m),
        "sure": math.isnan(found.temperature_K),
        "outside": [reason_plain(one) for one in found.outside],
    }


def _take(ledger: Ledger, being: Being, found: dict[str, Any]) -> None:
    if not found["outside"]:
        for quantity in ("number", "temperature", "radius"):
            being.know(quantity, Figure(*found[quantity]))
        words = f"{being.name} evaporates at {{value}} of what the model can follow at least"
        ledger.measure("evaporation-too-fast", being, 1.0, 1.0, "", words)
        return
    reasons = [Outside(*one) for one in found["outside"]]
    short = [_share(one) for one in reasons]
    for reason, share in zip(reasons, short, strict=True):
        words = (
            f"{being.name} evaporates faster than the model can follow: {reason.quantity} is "
            f"{reason.value:.3g}, at {{value}} of what it must be at least"
        )
        ends = (share, share) if found["sure"] else (share, 1.0)
        ledger.measure("evaporation-too-fast", being, *ends, "", words, hint=HINT)
    ledger.lose(being, ["temperature", "number"], reasons, "evaporation-too-fast")


def _share(reason: Outside) -> float:
    """How much of the limit is there: 1 just inside."""
    if not reason.limit > 0.0:
        return 0.0
    share = max(reason.value / reason.limit, 0.0)
    return min(share, 1.0) if reason.side == "at least" else min(1.0 / max(share, 1e-12), 0.999)


def _path(
    from_eV: float, to_eV: float, seconds: float, exponentially: bool
) -> tuple[tuple[float, float], ...]:
    if not exponentially:
        return ((0.0, from_eV), (seconds, to_eV))
    steps = range(PIECES + 1)
    return tuple(
        (seconds * step / PIECES, from_eV * (to_eV / from_eV) ** (step / PIECES)) for step in steps
    )


def _ends(figure: Figure) -> tuple[float, float, float]:
    return figure.value, figure.low, figure.high
