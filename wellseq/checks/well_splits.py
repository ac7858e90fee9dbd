"""The well of a held cloud divides into two."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading
from wellseq.checks.case import Case
from wellseq.checks.written import proofs_ended
from wellseq.wells.wells import Trouble

SAYS = "The well of a held cloud divides, so that it is not known where the cloud goes."
NEEDS = ("wells",)
WAIVABLE = True


def read(case: Case) -> Iterator[Mistake | Reading]:
    """What was shown to happen, and `not known` where only the proof failed."""
    return proofs_ended(case, Trouble.SPLITS)
