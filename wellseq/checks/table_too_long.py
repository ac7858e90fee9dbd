"""A block has more rows than the converter card holds."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case, reached
from wellseq.checks.written import mistakes_named
from wellseq.timeline.shipped import ShippedBlock

SAYS = "A block of the table has more rows than the converter card's memory."
NEEDS = ("trap", "timeline", "shipped")
WAIVABLE = False


def read(case: Case) -> Iterator[Reading | Mistake]:
    """The number of rows of each block; it points at the step that takes most of them."""
    yield from mistakes_named(case, "table-too-long")
    limit = at_most(float(reached(case.trap).margins.table_rows), "rows")
    for shipped in reached(case.shipped).blocks:
        number, rows = _longest(shipped)
        yield Reading(
            value=float(len(shipped.ticks)),
            limit=limit,
            message=f"the block '{shipped.block.name}' takes {{value}}, the card holds {{limit}}",
            origin=case.origin(number),
            subject="rows",
            block=shipped.block.name,
            hint=f"this step alone takes {rows} rows" if rows else "",
        )


def _longest(shipped: ShippedBlock) -> tuple[int, int]:
    """The step of a block with the most rows and how many; the first step when nothing moves."""
    rows: Counter[int] = Counter()
    for number, _, count in {(s.number, s.start_s, s.rows) for s in shipped.strays}:
        rows[number] += count
    if rows:
        return max(rows.items(), key=lambda pair: (pair[1], -pair[0]))
    spans = shipped.block.spans
    return (spans[0].number if spans else -1), 0
