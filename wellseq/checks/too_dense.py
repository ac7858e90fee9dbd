"""A cloud is denser than a tenth of the Brillouin density.

No rotation confines more than n_B = eps0 B^2/(2m).  Source: A theorem of Larmor and its importance
for electrons in magnetic fields, Phys. Rev. 67, 260 (1945), from memory; the tenth: derived, the
models of clouds hold below it.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case
from wellseq.checks.foretold import foretold

SAYS = "The density of a cloud comes too near to the greatest that the magnetic field can hold."
NEEDS = ("timeline", "forecast")
WAIVABLE = True

SHARE = 0.1
LIMIT = at_most(SHARE)


def read(case: Case) -> Iterator[Reading | Mistake]:
    """Its share of the Brillouin density, dimensionless."""
    yield from foretold(case, "too-dense", LIMIT)
