"""An interlock rule speaks of something that is not known where it matters."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading
from wellseq.checks.breaches import reading, whole
from wellseq.checks.case import Case, reached
from wellseq.checks.written import mistakes_named
from wellseq.rules.rulings import Outcome

SAYS = "An interlock rule could not be examined, since something that it speaks of is not known."
NEEDS = ("timeline", "rulings")
WAIVABLE = True


def read(case: Case) -> Iterator[Reading | Mistake]:
    """Every step at which a rule would have to know more; the value is not known (NaN)."""
    yield from mistakes_named(case, "interlock-not-examined")
    for ruling in reached(case.rulings).of(Outcome.NOT_EXAMINED):
        for breach in ruling.breaches:
            unknown = ", ".join(breach.unknown) or "something that it speaks of"
            why = f"cannot be examined, since nothing is known here of {unknown}"
            yield reading(case, ruling, breach, why)
        if not ruling.breaches:
            yield whole(ruling)
