"""What was proved → `claims.json`: stretch by stretch, where each cloud is held and how deeply.

W is the region of the well, L and R the proved own sides left and right of it (m along the axis).
`certified_V` is a lower bound of the own vacuum depth with all `losses_V` taken off, to be compared
with `floor_V`; times are exact seconds of the block and whole ticks around them.
"""

from __future__ import annotations

import json
import math
from collections.abc import Iterator
from dataclasses import asdict
from fractions import Fraction

from wellseq.checks.judging import Cleared
from wellseq.emit.blocks import exact
from wellseq.wells.wells import Held, SideDepth

SCHEMA = "wellseq/claims"
SCHEMA_VERSION = 1


def write(cleared: Cleared) -> Iterator[tuple[str, list[bytes]]]:
    """(name, content) of the claims of a cleared case."""
    case = cleared.case
    if case.wells is None or case.shipped is None:
        return
    ticks = [block.tick_s for block in case.shipped.blocks]
    document = {
        "schema": SCHEMA,
        "schema_version": SCHEMA_VERSION,
        "basis_error_V_per_V": _plain(case.wells.basis_error_V_per_V),
        "claims": [_claim(held, ticks[held.block]) for held in case.wells.held],
    }
    text = json.dumps(document, indent=1, sort_keys=True, ensure_ascii=False, allow_nan=False)
    yield "claims.json", [f"{text}\n".encode()]


def _claim(held: Held, tick_s: Fraction) -> dict[str, object]:
    return {
        "cloud": held.cloud,
        "charge_sign": held.charge_sign,
        "block": held.block + 1,
        "step_number": held.number,
        "start_s": exact(held.start_s),
        "end_s": exact(held.end_s),
        "ticks": [math.floor(held.start_s / tick_s), math.ceil(held.end_s / tick_s)],
        "well_m": list(held.well_m),
        "cloud_from_to_m": [held.from_m, held.to_m],
        "left": _side(held.left, held.floor_V[0]),
        "right": _side(held.right, held.floor_V[1]),
        "trap_depth_V": _plain(held.trap_V),
        "counts_from_ground": held.energetic,
    }


def _side(side: SideDepth, floor_V: float) -> dict[str, object]:
    return {
        "region_m": list(side.region_m),
        "certified_V": _plain(side.certified_V),
        "best_V": _plain(side.best_V),
        "floor_V": _plain(floor_V),
        "at_s": _plain(side.at_s),
        "barrier_m": _plain(side.barrier_m),
        "well_m": _plain(side.well_m),
        "losses_V": {cause.removesuffix("_V"): size for cause, size in asdict(side.losses).items()},
    }


def _plain(value: float) -> float | None:
    return float(value) if math.isfinite(value) else None
