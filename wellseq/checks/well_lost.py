"""The well of a held cloud vanishes outside `release` and `kick`."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading
from wellseq.checks.case import Case
from wellseq.checks.written import proofs_ended
from wellseq.wells.wells import Trouble

SAYS = "The well of a held cloud vanishes though no release or kick asks for it."
NEEDS = ("wells",)
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake | Reading]:
    """What was shown to happen, and `not known` where only the proof failed."""
    return proofs_ended(case, Trouble.LOST)
