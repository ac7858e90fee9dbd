"""The claimed temperature is not above the floor that bore and heating set."""

from __future__ import annotations

import math
from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "A cloud is to be colder than its bore and its heating let it become."
NEEDS = ("timeline", "forecast")
WAIVABLE = True


def read(case: Case) -> Iterator[Reading | Mistake]:
    """The floor of the temperature, K, against the temperature that was claimed."""
    yield from foretold(case, "never-that-cold", at_most(math.inf, "K"))
