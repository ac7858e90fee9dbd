"""What leaves a well over its barrier does not fall all the way outward from there."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import numbered, telling
from wellseq.checks.written import proofs_ended
from wellseq.wells.wells import Trouble

SAYS = "What leaves a well on purpose would have to climb again before it is out."
NEEDS = ("timeline", "wells")
WAIVABLE = True

LIMIT = at_most(1e-3, "V")
"""House default: the ripple below which two minima count as one."""


def read(case: Case) -> Iterator[Reading | Mistake]:
    """How much an outgoing particle has to climb again beyond the barrier, V, per way out."""
    yield from proofs_ended(case, Trouble.NO_WAY_OUT)
    ways = reached(case.wells).ways_out
    kept = telling(
        LIMIT,
        [way.climb_V - way.uncertainty_V for way in ways],
        [way.climb_V + way.uncertainty_V for way in ways],
        numbered((way.cloud, way.block) for way in ways),
        [way.number for way in ways],
    )
    for way in (ways[index] for index in kept):
        yield Reading(
            value=way.climb_V,
            uncertainty=way.uncertainty_V,
            limit=LIMIT,
            message=(
                f"what leaves the well of {way.cloud} has to climb {{value}} again beyond the "
                "barrier; at most {limit} is taken for level"
            ),
            origin=case.origin(way.number),
            subject=way.cloud,
            block=case.block_name(way.block),
            window_s=(way.at_s, way.at_s),
            hint="let the potential fall all the way from the barrier to the end of the stack",
        )
