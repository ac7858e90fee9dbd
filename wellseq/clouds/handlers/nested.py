"""nested: two clouds of opposite sign side by side; how much each well keeps beside the other.

Each cloud is at rest in its own well; the other one lowers the barrier between them by its own
potential.  That is taken as twice what the log column gives at the other cloud's centre, which
covers the solved examples of two species (58 mV where the column says 32 mV).  Depth left over kT.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from wellseq.clouds import passing
from wellseq.clouds.figures import Figure
from wellseq.clouds.rest import kT_left
from wellseq.model.effects import Nested

if TYPE_CHECKING:
    from wellseq.clouds.beings import Being
    from wellseq.clouds.ledger import Ledger

OTHER_FACTOR = 2.0


def act(ledger: Ledger, effect: Nested) -> set[str]:
    """Follow both wells, and measure what they keep once they stand beside one another."""
    pair = [ledger.beings.get(name) for name in (effect.cloud, effect.host)]
    acted = set()
    for being in pair:
        if being is not None:
            passing.follow(ledger, being, ledger.span.end_s)
            acted.add(being.name)
    for being, other in (pair, pair[::-1]):
        if being is not None and other is not None:
            _measure(ledger, being, other)
    return acted


def _measure(ledger: Ledger, being: Being, other: Being) -> None:
    mine = ledger.settle(being, ledger.span.end_s)
    theirs = ledger.settle(other, ledger.span.end_s)
    words = f"beside {other.name} the well of {being.name} keeps {{value}}"
    hint = "raise the wall between them, or take fewer particles"
    if (mine is not None and mine.outside) or (theirs is not None and theirs.outside):
        return
    if mine is None or theirs is None:
        cites = being.cites() or other.cites()
        said = f"{words}; {cites}" if cites else words
        nan = float("nan")
        ledger.measure("nest-leaks", being, nan, nan, "kT", said, hint=hint)
        return
    left, taken = mine.figures["depth_left"], theirs.figures["space_charge"]
    low = left.low - OTHER_FACTOR * taken.high
    kept = kT_left(Figure(left.value - taken.value, low, left.high), being)
    ledger.measure("nest-leaks", being, kept.low, kept.high, "kT", words, hint=hint)
