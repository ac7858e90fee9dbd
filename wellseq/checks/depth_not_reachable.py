"""No voltage of the named electrode gives the depth that was asked."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake
from wellseq.checks.case import Case
from wellseq.checks.written import mistakes_named

SAYS = "An evaporation asks for a depth that no voltage of its electrode gives."
NEEDS = ("mistakes",)
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake]:
    """The mistakes of this name that were met while the file was drawn."""
    return mistakes_named(case, "depth-not-reachable")
