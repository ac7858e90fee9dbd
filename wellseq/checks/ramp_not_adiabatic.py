"""A well changes too fast for the bounce action of its cloud to be conserved.

eps = max|d ln w/dt|/w, or |z''|/(w^2 L) for a well that moves.  Source of the limit: derived, from
direct simulations in tests/clouds/test_adiabatic.py.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "A well changes or moves so fast that its cloud cannot follow."
NEEDS = ("timeline", "forecast")
WAIVABLE = True

LIMIT = at_most(0.3)


def read(case: Case) -> Iterator[Reading | Mistake]:
    """eps, the change of the bounce frequency in a swing, dimensionless."""
    yield from foretold(case, "ramp-not-adiabatic", LIMIT)
