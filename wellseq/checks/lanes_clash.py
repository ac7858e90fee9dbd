"""Two lanes of one `alongside` want the same thing."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake
from wellseq.checks.case import Case
from wellseq.checks.written import mistakes_named

SAYS = "Two lanes of one alongside drive the same output, line, ring or cloud."
NEEDS = ("mistakes",)
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake]:
    """The mistakes of this name that were met while the file was drawn."""
    return mistakes_named(case, "lanes-clash")
