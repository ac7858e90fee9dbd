"""A cloud is named where it is in no well, or is placed where there is none."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading
from wellseq.checks.case import Case
from wellseq.checks.written import proofs_ended
from wellseq.wells.wells import Trouble

SAYS = "A cloud is placed where no well would hold it, or used where it is not in the trap."
NEEDS = ("wells",)
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake | Reading]:
    """What was shown to happen, and `not known` where only the proof failed."""
    return proofs_ended(case, Trouble.NOT_PLACED)
