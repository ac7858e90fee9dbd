"""An allowance that nothing needed: what it accepted is mended, or stands at another step.

Where a file has mistakes, or a cloud could not be followed to the end, nothing is said: what was
not examined may need its allowance yet.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Verdict
from wellseq.checks.case import Case, reached
from wellseq.checks.judging import waivable
from wellseq.checks.written import mistakes_named

SAYS = "An `allow` accepts a finding that its step does not have."
NEEDS = ("sequence", "timeline", "shipped", "wells")
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake]:
    """The allowances that no finding of their step needed, each written one once."""
    yield from mistakes_named(case, "allowance-unused")
    if case.mistakes or reached(case.wells).unproved:
        return
    used = {
        (finding.name, finding.place)
        for finding in case.findings
        if finding.verdict is Verdict.ALLOWED or (finding.blocks and not finding.waivable)
    }
    for allowance in dict.fromkeys(reached(case.sequence).allowances):
        needed = (allowance.name, allowance.step_place) in used
        if waivable(allowance.name) and not needed:
            yield Mistake(
                "allowance-unused",
                allowance.place,
                f"this step has no finding '{allowance.name}' to allow",
                "take the allowance away",
            )
