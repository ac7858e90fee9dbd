"""A `use` or `trap` that leads outside the trap file's tree, in circles, or too deep."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake
from wellseq.checks.case import Case
from wellseq.checks.written import mistakes_named

SAYS = "A used file lies outside the trap file's tree, is a link, uses itself, or lies too deep."
NEEDS = ("mistakes",)
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake]:
    """The mistakes of this name that were met while the file was opened."""
    return mistakes_named(case, "import-refused")
