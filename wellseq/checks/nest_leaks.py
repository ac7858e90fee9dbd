"""A nested cloud keeps less than 20 kT of depth.

Source of the limit: derived; Antihydrogen production using trapped plasmas, Phys. Lett. A 129, 38
(1988), from memory, for the arrangement.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_least
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "Of two clouds of opposite sign beside each other one is not surely kept."
NEEDS = ("timeline", "forecast")
WAIVABLE = True

LIMIT = at_least(20.0, "kT")


def read(case: Case) -> Iterator[Reading | Mistake]:
    """The depth that a cloud keeps beside the other, in kT."""
    yield from foretold(case, "nest-leaks", LIMIT)
