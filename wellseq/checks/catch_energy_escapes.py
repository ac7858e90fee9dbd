"""More than a tenth of a bunch has more energy than its gates hold.

The tenth is common sense, no source: what is lost hits the walls.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "Part of a bunch has more energy than the gates hold."
NEEDS = ("timeline", "forecast")
WAIVABLE = True

SHARE = 0.1
LIMIT = at_most(SHARE)


def read(case: Case) -> Iterator[Reading | Mistake]:
    """The share of the bunch with more energy than the gates hold, dimensionless."""
    yield from foretold(case, "catch-energy-escapes", LIMIT)
