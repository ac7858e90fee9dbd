"""The near gate shuts later than where 98 % of the best share is caught."""

from __future__ import annotations

import math
from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "A gate shuts so late that part of the bunch has left again."
NEEDS = ("timeline", "forecast")
WAIVABLE = True


def read(case: Case) -> Iterator[Reading | Mistake]:
    """When the near gate is half shut, s after the trigger, against the last good time."""
    yield from foretold(case, "catch-gate-late", at_most(math.inf, "s"))
