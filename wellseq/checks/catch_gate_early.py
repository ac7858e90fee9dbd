"""The near gate shuts sooner than where 98 % of the best share is caught."""

from __future__ import annotations

import math
from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_least
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "A gate shuts before all of the bunch is inside."
NEEDS = ("timeline", "forecast")
WAIVABLE = True


def read(case: Case) -> Iterator[Reading | Mistake]:
    """When the near gate is half shut, s after the trigger, against the first good time."""
    yield from foretold(case, "catch-gate-early", at_least(-math.inf, "s"))
