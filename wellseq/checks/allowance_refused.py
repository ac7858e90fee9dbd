"""An allowance names a finding that may never be allowed, or no finding at all.

A rule marked `never_waivable` may never be broken, though other rules may be by allowance.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake
from wellseq.base.names import nearest
from wellseq.checks.case import Case, reached
from wellseq.checks.judging import check_names, waivable
from wellseq.checks.written import mistakes_named
from wellseq.model.sequence import Allowed

SAYS = "An `allow` names a finding that may never be allowed, or that does not exist."
NEEDS = ("sequence",)
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake]:
    """The allowances that can accept nothing, each written one once."""
    yield from mistakes_named(case, "allowance-refused")
    for allowance in dict.fromkeys(reached(case.sequence).allowances):
        if not waivable(allowance.name):
            yield _mistake(allowance)
        for finding in case.findings:
            here = (finding.name, finding.place) == (allowance.name, allowance.step_place)
            if here and finding.blocks and not finding.waivable:
                message = f"this '{allowance.name}' may never be allowed: {finding.message}"
                hint = "mend the step"
                yield Mistake("allowance-refused", allowance.place, message, hint)
                break


def _mistake(allowance: Allowed) -> Mistake:
    name = allowance.name
    if name not in check_names():
        known = [one for one in check_names() if waivable(one)]
        message, hint = f"there is no finding '{name}'", nearest(name, known, "may be allowed")
    else:
        message, hint = f"'{name}' may never be allowed", "mend what it points at"
    return Mistake("allowance-refused", allowance.place, message, hint)
