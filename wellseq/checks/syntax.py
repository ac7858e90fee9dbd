"""A statement does not have the shape of a statement, or a clause is not its verb's."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake
from wellseq.checks.case import Case
from wellseq.checks.written import mistakes_named

SAYS = "A statement cannot be understood: its shape, or a clause that its verb does not take."
NEEDS = ("mistakes",)
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake]:
    """The mistakes of this name that were met while the file was read."""
    return mistakes_named(case, "syntax")
