"""claimed: the author speaks of a figure; it is noted as it stands at this place."""

from __future__ import annotations

from typing import TYPE_CHECKING

from wellseq.clouds.beings import KEPT
from wellseq.clouds.figures import NOT_KNOWN
from wellseq.clouds.forecast import UNITS, Asked
from wellseq.model.effects import Claimed

if TYPE_CHECKING:
    from wellseq.clouds.ledger import Ledger


def act(ledger: Ledger, effect: Claimed) -> set[str]:
    """Note the figure of a claim that the forecast answers."""
    being = ledger.beings.get(effect.cloud)
    if being is None or effect.quantity not in UNITS:
        return set()
    start_s = ledger.span.start_s
    ledger.catch_up(being, start_s)
    if effect.quantity in KEPT:
        figure, cites = being.figures[effect.quantity], being.lost.get(effect.quantity, "")
    else:
        settled = ledger.settle(being, start_s)
        figure = NOT_KNOWN if settled is None else settled.figures[effect.quantity]
        cites = being.cites()
    ledger.asked.append(Asked(being.name, effect.quantity, ledger.span.number, figure, cites))
    return set()
