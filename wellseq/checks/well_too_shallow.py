"""A cloud's well is less deep, on one side and at some instant, than the floor demanded there.

What is judged is the interval from the certified depth (everything that can be wrong with the
voltages taken off) to the least depth of the wish itself: only a certified depth passes, only a
wish that is itself too shallow fails, anything between is unsure.  Volts per unit charge.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import fields

from wellseq.base.finding import Mistake, Reading, at_least
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import numbered, telling
from wellseq.checks.numbers import amount
from wellseq.checks.written import mistakes_named
from wellseq.wells.wells import Held, Losses, SideDepth

SAYS = "The well that holds a cloud is not deep enough, or cannot be proved to be."
NEEDS = ("timeline", "wells")
WAIVABLE = True

_CAUSES = {
    "calibration_V": "calibration",
    "noise_V": "noise of the outputs",
    "half_code_V": "rounding to converter codes",
    "stray_V": "the staircase that plays the ramp",
    "lag_V": "lag behind the filters",
    "shape_V": "curved motion taken as straight",
    "patch_V": "contact potentials",
    "ripple_V": "ripple of the bottom",
    "basis_V": "the field solver",
}


def read(case: Case) -> Iterator[Reading | Mistake]:
    """For each stretch in which a cloud is held, and each side: certified to wished depth, V."""
    yield from mistakes_named(case, "well-too-shallow")
    sides = [
        (held, side, depth, floor)
        for held in reached(case.wells).held
        for side, depth, floor in (
            ("left", held.left, held.floor_V[0]),
            ("right", held.right, held.floor_V[1]),
        )
    ]
    kept = telling(
        at_least(0.0, "V"),
        [depth.certified_V for _, _, depth, _ in sides],
        [depth.best_V for _, _, depth, _ in sides],
        numbered((held.cloud, held.block, side) for held, side, _, _ in sides),
        [held.number for held, _, _, _ in sides],
        bounds=[floor for _, _, _, floor in sides],
    )
    for index in kept:
        yield _reading(case, *sides[index])


def _reading(case: Case, held: Held, side: str, depth: SideDepth, floor_V: float) -> Reading:
    low, high = depth.certified_V, depth.best_V
    counted = "from ground " if held.energetic else ""
    return Reading(
        value=(low + high) / 2,
        uncertainty=(high - low) / 2,
        between=(low, high),
        limit=at_least(floor_V, "V"),
        message=(
            f"the well of {held.cloud} is {amount(low, 'V')} deep {counted}on its {side} side, "
            f"{{limit}} demanded; {_what_is_lost(depth.losses)}"
        ),
        origin=case.origin(held.number),
        subject=f"{held.cloud}, {side}",
        block=case.block_name(held.block),
        window_s=(float(held.start_s), float(held.end_s)),
        hint=(
            f"least at {amount(depth.at_s, 's')}, over the barrier at "
            f"{amount(depth.barrier_m, 'm')}"
        ),
    )


def _what_is_lost(losses: Losses) -> str:
    """The sum taken off and its largest cause, in words."""
    by_cause = [(getattr(losses, item.name), item.name) for item in fields(losses)]
    largest, name = max(by_cause, key=lambda pair: pair[0])
    if not largest > 0:
        return "nothing is taken off"
    return (
        f"{amount(losses.total_V, 'V')} is taken off, "
        f"most of it ({amount(largest, 'V')}) for {_CAUSES[name]}"
    )
