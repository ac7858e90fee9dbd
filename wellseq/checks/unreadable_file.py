"""A file is missing, is no file, or is not UTF-8 text."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake
from wellseq.checks.case import Case
from wellseq.checks.written import mistakes_named

SAYS = "A file that is needed is missing, is not a file, or is not UTF-8 text."
NEEDS = ("mistakes",)
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake]:
    """The mistakes of this name that were met while the file was opened."""
    return mistakes_named(case, "unreadable-file")
