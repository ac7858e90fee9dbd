"""A digital line is set or expected against what it is."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake
from wellseq.checks.case import Case
from wellseq.checks.written import mistakes_named

SAYS = (
    "A digital line is set though it is an input, set twice at once, or expected where it is not."
)
NEEDS = ("mistakes",)
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake]:
    """The mistakes of this name that were met while the file was drawn."""
    return mistakes_named(case, "line-misused")
