"""What is wrong without a number: mistakes under their own name, and proofs that came to an end."""

from __future__ import annotations

import math
from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case
from wellseq.wells.wells import Trouble, Unproved


def mistakes_named(case: Case, name: str) -> Iterator[Mistake]:
    """The mistakes of a case that carry this name, each place and pass once, as they came."""
    seen: set[Mistake] = set()
    for mistake in case.mistakes:
        if mistake.name == name and mistake not in seen:
            seen.add(mistake)
            yield mistake


def proofs_ended(case: Case, trouble: Trouble) -> Iterator[Mistake | Reading]:
    """Clouds that could not be followed any further because of one kind of trouble.

    What was shown to happen is a mistake.  Where only the proof failed the reading is not known
    (NaN), which is judged `unsure`.
    """
    yield from mistakes_named(case, trouble.value)
    if case.wells is None:
        return
    for end in case.wells.unproved:
        if end.trouble is trouble:
            yield _mistake(case, end) if end.sure else _not_known(case, end)


def _mistake(case: Case, end: Unproved) -> Mistake:
    origin = case.origin(end.number)
    return Mistake(
        end.trouble.value,
        origin.place,
        end.message,
        end.hint,
        origin,
        subject=end.cloud,
        block=case.block_name(end.block),
        window_s=(end.start_s, end.end_s),
    )


def _not_known(case: Case, end: Unproved) -> Reading:
    return Reading(
        value=math.nan,
        limit=at_most(0.0),
        message=end.message,
        origin=case.origin(end.number),
        subject=end.cloud,
        block=case.block_name(end.block),
        window_s=(end.start_s, end.end_s),
        hint=end.hint,
    )
