"""assumed: a measured value takes the place of a figure, from here on."""

from __future__ import annotations

from typing import TYPE_CHECKING

from wellseq.clouds.beings import KEPT
from wellseq.clouds.figures import Figure
from wellseq.clouds.intervals import power, times
from wellseq.model.effects import Assumed

if TYPE_CHECKING:
    from wellseq.clouds.ledger import Ledger


def act(ledger: Ledger, effect: Assumed) -> set[str]:
    """Put the value in; a density sets the radius, at the cloud's number and length."""
    being = ledger.beings.get(effect.cloud)
    if being is None:
        return set()
    ledger.catch_up(being, ledger.span.start_s)
    value, half = effect.value, effect.half_width
    figure = Figure(value, value - half, value + half)
    if effect.quantity in KEPT:
        ledger.assume(being, effect.quantity, figure)
    elif effect.quantity == "density":
        settled = ledger.settle(being, ledger.span.start_s)
        if settled is not None and settled.figures["density"].known:
            now = settled.figures["density"].value
            narrower = Figure(*(end / now for end in (value, value - half, value + half)))
            radius = being.figures["radius"]
            middle = Figure(*(radius.value,) * 3)
            ledger.assume(being, "radius", times(middle, power(narrower, -0.5)))
    return {effect.cloud}
