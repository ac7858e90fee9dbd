"""A converter is asked for volts that it cannot give.

Judged at the electrode: the reach of an output is its nominal range through its calibration.
Pieces go one way from their first voltage to their last, so that their ends decide.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from wellseq.base.finding import Limit, Mistake, Reading, at_least, at_most
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import numbered, telling
from wellseq.checks.numbers import amount
from wellseq.checks.written import mistakes_named
from wellseq.model.trap import Converter

SAYS = "An output is asked for a voltage outside its range."
NEEDS = ("trap", "timeline")
WAIVABLE = False


@dataclass(frozen=True, slots=True)
class _Asked:
    """Volts that an output is asked for from an instant (s) of a block on."""

    output: str
    block: str
    time_s: float
    volts: float
    number: int


def read(case: Case) -> Iterator[Reading | Mistake]:
    """Each voltage that a converter is asked for, against both ends of its reach, V."""
    yield from mistakes_named(case, "voltage-out-of-range")
    reach = {o.name: o.reach_V for o in reached(case.trap).outputs if isinstance(o, Converter)}
    asked = list(_asked(case))
    volts = [one.volts for one in asked]
    groups = numbered((one.output, one.block) for one in asked)
    steps = [one.number for one in asked]
    for end, side in ((0, at_least(0.0, "V")), (1, at_most(0.0, "V"))):
        bounds = [reach[one.output][end] for one in asked]
        for index in telling(side, volts, volts, groups, steps, bounds):
            limit = Limit(side.side, bounds[index], "V")
            yield _reading(case, asked[index], limit, reach[asked[index].output])


def _asked(case: Case) -> Iterator[_Asked]:
    for block in reached(case.timeline).blocks:
        first = block.spans[0].number if block.spans else -1
        for output, volts in block.volts.items():
            yield _Asked(output, block.name, 0.0, volts, first)
        for piece in block.pieces:
            yield _Asked(piece.output, block.name, float(piece.end_s), piece.to_V, piece.number)


def _reading(case: Case, asked: _Asked, limit: Limit, reach: tuple[float, float]) -> Reading:
    low, high = amount(reach[0], "V"), amount(reach[1], "V")
    return Reading(
        value=asked.volts,
        limit=limit,
        message=f"{asked.output} is asked for {{value}}, {limit.side} {{limit}} is possible",
        origin=case.origin(asked.number),
        subject=asked.output,
        block=asked.block,
        window_s=(asked.time_s, asked.time_s),
        hint=f"{asked.output} reaches from {low} to {high} at the electrode",
    )
