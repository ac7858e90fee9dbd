"""What the ledger of clouds measured for a check → its readings.

Every measurement is an interval in the unit of its limit; of what passes, the least margin of each
cloud in a block is kept.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from wellseq.base.finding import Limit, Mistake, Reading
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import numbered, telling
from wellseq.checks.numbers import amount
from wellseq.checks.written import mistakes_named
from wellseq.clouds.forecast import Measured


def foretold(case: Case, name: str, limit: Limit) -> Iterator[Reading | Mistake]:
    """Mistakes and readings of one check; a bound of the trap or the author replaces `limit`'s."""
    yield from mistakes_named(case, name)
    yield from readings(case, name, limit)


def readings(case: Case, name: str, limit: Limit) -> Iterator[Reading]:
    """What the ledger measured for one check, as readings."""
    mine = [one for one in reached(case.forecast).measured if one.check == name]
    bounds = [one.limit if one.limit == one.limit else limit.value for one in mine]
    kept = telling(
        limit,
        [one.low for one in mine],
        [one.high for one in mine],
        numbered((one.cloud, one.block) for one in mine),
        [one.number for one in mine],
        bounds=bounds,
    )
    for index in kept:
        yield reading(case, mine[index], replace(limit, value=bounds[index]))


def reading(case: Case, one: Measured, limit: Limit) -> Reading:
    """One measurement, ready to be judged by a limit of its unit."""
    middle = one.low if one.low == one.high or one.high == float("inf") else None
    return Reading(
        value=(one.low + one.high) / 2 if middle is None else middle,
        uncertainty=(one.high - one.low) / 2 if middle is None else 0.0,
        between=(one.low, one.high),
        limit=limit,
        message=one.words.replace("{value}", _span(one)),
        origin=case.origin(one.number),
        subject=one.cloud,
        block=case.block_name(one.block),
        window_s=(one.start_s, one.end_s),
        hint=one.hint,
    )


def _span(one: Measured) -> str:
    if one.low == one.high or one.low != one.low:
        return amount(one.low, one.unit)
    return f"{amount(one.low, one.unit)} to {amount(one.high, one.unit)}"
