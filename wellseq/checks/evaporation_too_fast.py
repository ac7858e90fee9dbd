"""An evaporation leaves the range in which a number and a temperature can be foretold.

eta > 4 and |d ln U/dt| < nu/50.  Source: derived, clouds/evaporation.py.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_least
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "A well is lowered faster than its cloud can rethermalise, or below its own space charge."
NEEDS = ("timeline", "forecast")
WAIVABLE = True

LIMIT = at_least(1.0)


def read(case: Case) -> Iterator[Reading | Mistake]:
    """How much of what the model needs at least is there, dimensionless."""
    yield from foretold(case, "evaporation-too-fast", LIMIT)
