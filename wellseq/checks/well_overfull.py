"""The charges in a well leave less than 4 kT of its depth.

Source of the limit: derived, clouds/at_rest.py.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_least
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "The charges of a cloud fill its well, so that it spills."
NEEDS = ("timeline", "forecast")
WAIVABLE = True

LIMIT = at_least(4.0, "kT")


def read(case: Case) -> Iterator[Reading | Mistake]:
    """The depth left by the space charge, in kT."""
    yield from foretold(case, "well-overfull", LIMIT)
