"""A drive turns more slowly than the plasma it is to hold.

Source of the limit: a few percent of slip, Torque-balanced high-density steady states of
single-component plasmas, Phys. Rev. Lett. 94, 035001 (2005), from memory.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "A rotating drive begins below the rotation of its plasma, which it would brake."
NEEDS = ("timeline", "forecast")
WAIVABLE = True

SLIP = 0.05
LIMIT = at_most(SLIP)


def read(case: Case) -> Iterator[Reading | Mistake]:
    """How far below the plasma's rotation the drive begins, as a share."""
    yield from foretold(case, "drive-slips", LIMIT)
