"""What is played strays too far from what was written, or one code is too much of a depth."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import numbered, telling
from wellseq.checks.numbers import amount
from wellseq.checks.written import mistakes_named
from wellseq.wells.wells import SideDepth

SAYS = "The steps of a converter are too coarse for the ramp, or for the depth of the well."
NEEDS = ("trap", "timeline", "shipped", "wells")
WAIVABLE = True

SHARE_OF_DEPTH = 0.1
"""House default: the most that half a code may take of a held depth."""


def read(case: Case) -> Iterator[Reading | Mistake]:
    """How far each motion is played off its wish, V; half a code's share of each held depth, V."""
    yield from mistakes_named(case, "steps-too-coarse")
    yield from _of_ramps(case)
    yield from _of_depths(case)


def _of_ramps(case: Case) -> Iterator[Reading]:
    limit = at_most(reached(case.trap).margins.staircase_V, "V")
    for shipped in reached(case.shipped).blocks:
        strays = shipped.strays
        volts = [stray.volts for stray in strays]
        groups = numbered(stray.output for stray in strays)
        steps = [stray.number for stray in strays]
        for index in telling(limit, volts, volts, groups, steps):
            stray = strays[index]
            yield Reading(
                value=stray.volts,
                limit=limit,
                message=(
                    f"{stray.output} is played up to {{value}} off the written ramp in "
                    f"{stray.rows} rows, at most {{limit}}"
                ),
                origin=case.origin(stray.number),
                subject=stray.output,
                block=shipped.block.name,
                window_s=(float(stray.start_s), float(stray.end_s)),
                hint="give the ramp more time, or allow a larger 'staircase' in the trap file",
            )


def _of_depths(case: Case) -> Iterator[Reading]:
    sides: list[tuple[int, SideDepth]] = []
    held = reached(case.wells).held
    for index, one in enumerate(held):
        sides.extend(((index, one.left), (index, one.right)))
    halves = [side.losses.half_code_V for _, side in sides]
    bounds = [SHARE_OF_DEPTH * side.best_V for _, side in sides]
    groups = numbered((held[index].cloud, held[index].block) for index, _ in sides)
    steps = [held[index].number for index, _ in sides]
    for kept in telling(at_most(0.0, "V"), halves, halves, groups, steps, bounds):
        one, side = held[sides[kept][0]], sides[kept][1]
        yield Reading(
            value=halves[kept],
            limit=at_most(bounds[kept], "V"),
            message=(
                f"half a code is {{value}} of the {amount(side.best_V, 'V')} that hold "
                f"{one.cloud}, at most {{limit}}"
            ),
            origin=case.origin(one.number),
            subject=one.cloud,
            block=case.block_name(one.block),
            window_s=(float(one.start_s), float(one.end_s)),
            hint="hold the cloud deeper, or on outputs with more bits or a smaller range",
        )
