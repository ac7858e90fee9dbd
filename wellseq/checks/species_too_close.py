"""Two species that do not share a well stand closer to each other than the trap file allows."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_least
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import numbered, telling
from wellseq.checks.written import mistakes_named
from wellseq.wells.wells import Separation

SAYS = "The wells of two different species come closer than the trap file allows."
NEEDS = ("trap", "sequence", "timeline", "wells")
WAIVABLE = True


def read(case: Case) -> Iterator[Reading | Mistake]:
    """The least distance, m, between the proved wells of each two clouds of different species."""
    yield from mistakes_named(case, "species-too-close")
    pairs = [pair for pair in reached(case.wells).separations if _differ(case, pair)]
    limit = at_least(reached(case.trap).margins.separation_m, "m")
    distances = [pair.least_m for pair in pairs]
    groups = numbered((pair.clouds, pair.block) for pair in pairs)
    for index in telling(limit, distances, distances, groups, [pair.number for pair in pairs]):
        pair = pairs[index]
        one, other = pair.clouds
        yield Reading(
            value=pair.least_m,
            limit=limit,
            message=f"the wells of {one} and {other} are {{value}} apart, at least {{limit}}",
            origin=case.origin(pair.number),
            subject=f"{one}, {other}",
            block=case.block_name(pair.block),
            window_s=(pair.start_s, pair.end_s),
            hint="put an electrode more between them",
        )


def _differ(case: Case, pair: Separation) -> bool:
    """Whether two clouds are of different species; a cloud that is not declared counts as such."""
    species = [
        cloud.species.name if (cloud := reached(case.sequence).clouds.get(name)) else name
        for name in pair.clouds
    ]
    return species[0] != species[1]
