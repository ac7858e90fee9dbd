"""Two clouds come into one well that were not meant to meet."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading
from wellseq.checks.case import Case
from wellseq.checks.written import proofs_ended
from wellseq.wells.wells import Trouble

SAYS = "The wells of two clouds become one though no step says that they should meet."
NEEDS = ("wells",)
WAIVABLE = True


def read(case: Case) -> Iterator[Mistake | Reading]:
    """What was shown to happen, and `not known` where only the proof failed."""
    return proofs_ended(case, Trouble.MERGE)
