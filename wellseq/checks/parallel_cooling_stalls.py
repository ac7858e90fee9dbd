"""A goal lies where collisions no longer carry the parallel energy over.

Source: Collisional equipartition rate for a magnetized pure electron plasma, Phys. Fluids B 4, 1156
(1992), from memory.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_least
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "Collisions get slower than radiation before a cloud is as cold as was claimed."
NEEDS = ("timeline", "forecast")
WAIVABLE = True

LIMIT = at_least(1.0)


def read(case: Case) -> Iterator[Reading | Mistake]:
    """The goal over the temperature at which collisions and radiation are equally fast."""
    yield from foretold(case, "parallel-cooling-stalls", LIMIT)
