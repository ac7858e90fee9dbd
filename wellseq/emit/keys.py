"""What opens a writer: `Cleared`, or, for a folder that says it is a draft, `Draft`.

Nothing else does.  A draft's tables are for looking at: its manifest has another schema, which the
second reader refuses, and so does whatever reads published folders.
"""

from __future__ import annotations

from dataclasses import dataclass

from wellseq.checks.case import Case
from wellseq.checks.judging import Cleared, clear


@dataclass(frozen=True, slots=True)
class Draft:
    """The key to a draft of a case that got as far as its tables, with whatever stands against it.

    Raises ValueError for a case without tables.
    """

    case: Case

    def __post_init__(self) -> None:
        if not drawn(self.case):
            raise ValueError("a case without tables has no draft")


Key = Cleared | Draft


def drawn(case: Case) -> bool:
    """Whether a case got as far as its tables."""
    stages = (case.trap, case.sequence, case.timeline, case.shipped)
    return None not in stages


def opens(key: object) -> bool:
    """Whether something is a key, and no forged one: a `Cleared` is asked for again."""
    if isinstance(key, Draft):
        return drawn(key.case)
    return isinstance(key, Cleared) and clear(key.case) is not None
