"""Exit statuses, and which one several results come to.

0 and 1 are the answers; the rest are those of BSD sysexits(3).  Of several files the worst decides:
a fault of ours first, then output that could not be written, then whatever kept a file from being
examined, then findings.
"""

from __future__ import annotations

from collections.abc import Iterable

CLEAR = 0
FINDINGS = 1
USAGE = 64
NO_INPUT = 66
OUR_FAULT = 70
NO_OUTPUT = 73
WRONG_TRAP = 78
INTERRUPTED = 130

_WORST_FIRST = (OUR_FAULT, NO_OUTPUT, NO_INPUT, WRONG_TRAP, FINDINGS, CLEAR)


def worst(statuses: Iterable[int]) -> int:
    """The status that decides; OUR_FAULT when there is none at all, since nothing was examined."""
    given = set(statuses)
    return next((status for status in _WORST_FIRST if status in given), OUR_FAULT)
