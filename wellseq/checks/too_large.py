"""A file, a nesting or an expansion beyond its bound."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake
from wellseq.checks.case import Case
from wellseq.checks.written import mistakes_named

SAYS = "The file, its nesting, a number or what it expands to is beyond a fixed bound."
NEEDS = ("mistakes",)
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake]:
    """The mistakes of this name that were met while the file was read."""
    return mistakes_named(case, "too-large")
