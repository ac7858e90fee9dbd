"""A quantity of the wrong kind, or without its unit, or out of its allowed range."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake
from wellseq.checks.case import Case
from wellseq.checks.written import mistakes_named

SAYS = "A quantity has the wrong kind of unit, none, or a value that makes no sense there."
NEEDS = ("mistakes",)
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake]:
    """The mistakes of this name that were met while the file was settled."""
    return mistakes_named(case, "unit-mismatch")
