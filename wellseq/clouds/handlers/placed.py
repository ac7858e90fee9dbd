"""placed: from the end of the step on the cloud is there, with the figures that were declared."""

from __future__ import annotations

from typing import TYPE_CHECKING

from wellseq.clouds.beings import being_of
from wellseq.model.effects import Placed

if TYPE_CHECKING:
    from wellseq.clouds.ledger import Ledger


def act(ledger: Ledger, effect: Placed) -> set[str]:
    """Begin the cloud's ledger."""
    declared = ledger.timeline.clouds[effect.cloud]
    ledger.beings[effect.cloud] = being_of(declared, ledger.block, ledger.span.end_s)
    return {effect.cloud}
