"""The claimed temperature is reached after the end of the step, or may be."""

from __future__ import annotations

import math
from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "A cloud is not surely as cold at the end of its cooling as was claimed."
NEEDS = ("timeline", "forecast")
WAIVABLE = True


def read(case: Case) -> Iterator[Reading | Mistake]:
    """When the claimed temperature is reached, s, against the length of the step."""
    yield from foretold(case, "cooling-too-short", at_most(math.inf, "s"))
