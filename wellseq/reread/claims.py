"""`claims.json`: every proved depth is what was demanded, and within the folder's blocks."""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction

from wellseq.reread.plan import Plan
from wellseq.reread.reading import Part, Unsound

UNSOUND = "claims-unsound"
SCHEMA = "wellseq/claims"
SCHEMA_VERSION = 1
ROUNDING_V = Fraction(1, 10**9)


def judge_claims(document: Part, plan: Plan) -> Iterator[Unsound]:
    """Everything wrong with the claims; raises Unsound where they cannot be read."""
    document.word("schema", SCHEMA)
    document.whole("schema_version", SCHEMA_VERSION, SCHEMA_VERSION)
    for claim in document.parts("claims"):
        yield from _claim(claim, plan)


def _claim(claim: Part, plan: Plan) -> Iterator[Unsound]:
    block = plan.blocks[claim.whole("block", 1, len(plan.blocks)) - 1]
    start, end = claim.exact("start_s"), claim.exact("end_s")
    first, last = claim.numbers("ticks", 2)
    if not 0 <= start <= end <= block.duration_s:
        yield claim.wrong("start_s", "followed by end_s within the block")
    if not first * block.tick_s <= start <= end <= last * block.tick_s:
        yield claim.wrong("ticks", "around the times of the claim")
    if claim.whole("charge_sign", -1, 1) == 0:
        yield claim.wrong("charge_sign", "1 or -1")
    low, high = claim.numbers("well_m", 2)
    if low > high:
        yield claim.wrong("well_m", "a region along the axis")
    allowed = claim.whole("step_number", -1) in plan.shallow_steps
    for side in (claim.part("left"), claim.part("right")):
        yield from _side(side, allowed)


def _side(side: Part, allowed: bool) -> Iterator[Unsound]:
    certified, floor = side.number_or_none("certified_V"), side.number_or_none("floor_V")
    best = side.number_or_none("best_V")
    losses = side.part("losses_V")
    lost = sum((losses.number(cause) for cause in losses.values), Fraction(0))
    if side.numbers("region_m", 2) != tuple(sorted(side.numbers("region_m", 2))):
        yield side.wrong("region_m", "a region along the axis")
    if certified is None or floor is None or best is None:
        yield side.wrong("certified_V", "known")
    elif certified < floor and not allowed:
        yield side.wrong("certified_V", f"at least the {float(floor):g} V demanded")
    elif certified + lost > best + ROUNDING_V * (1 + abs(best)):
        yield side.wrong("certified_V", "below the depth that was found, with the losses taken off")
