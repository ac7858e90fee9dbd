"""A figure goes missing because a model was asked outside the range in which it holds.

Said once, where it arises, for all quantities of a cloud that go missing in a step together; what
needs them afterwards only says that they are missing.  A measured value that follows at once
(`assume`) settles the matter, and so does a check that reports the cause itself.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case, reached
from wellseq.checks.written import mistakes_named
from wellseq.clouds.forecast import Gap, in_words

SAYS = "A figure of a cloud cannot be foretold: a model was asked outside its range."
NEEDS = ("timeline", "forecast")
WAIVABLE = True

HINT = "put a measured value in its place with `assume` right after the step"


def read(case: Case) -> Iterator[Reading | Mistake]:
    """What is not known (NaN), for each cloud and step in which figures went missing."""
    yield from mistakes_named(case, "forecast-out-of-range")
    together: dict[tuple[str, int, int], list[Gap]] = {}
    for gap in reached(case.forecast).gaps:
        if not gap.told and not gap.replaced:
            together.setdefault((gap.cloud, gap.block, gap.number), []).append(gap)
    for gaps in together.values():
        yield _reading(case, gaps)


def _reading(case: Case, gaps: list[Gap]) -> Reading:
    first = gaps[0]
    what = " and ".join(dict.fromkeys(gap.quantity for gap in gaps))
    reasons = dict.fromkeys(in_words(reason) for gap in gaps for reason in gap.outside)
    return Reading(
        value=math.nan,
        limit=at_most(0.0),
        message=f"the {what} of {first.cloud} cannot be foretold from here on; "
        + "; ".join(reasons),
        origin=case.origin(first.number),
        subject=first.cloud,
        block=case.block_name(first.block),
        window_s=(first.start_s, first.end_s),
        hint=HINT,
    )
