"""A plasma is compressed so fast that it boils out of its well.

Q = (W/2)(x - 1 - ln x) eV per particle, x the compression of r^2.  Source: derived,
clouds/handlers/rotated.py.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "Compression frees more heat than the plasma can radiate while its well still holds it."
NEEDS = ("timeline", "forecast")
WAIVABLE = True

LIMIT = at_most(1.0)


def read(case: Case) -> Iterator[Reading | Mistake]:
    """Heat freed over what can be radiated in the step, dimensionless."""
    yield from foretold(case, "compression-overheats", LIMIT)
