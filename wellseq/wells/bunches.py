"""A bunch that has an energy and no temperature yet: held by its gates, its energy from ground.

A particle of energy E (eV per elementary charge, counted at ground) is turned round by a gate
whose U = sign * phi on the axis rises above E; so the depth of a side is max U over the gate, with
no well taken off.  What the gates are certified to hold once closed is what has been kept.
"""

from __future__ import annotations

import numpy as np

from wellseq.fields.certificate import SideBound, certify
from wellseq.fields.field import Field
from wellseq.timeline.motion import Segment
from wellseq.wells.living import Bunch
from wellseq.wells.losses import losses
from wellseq.wells.wells import Held, SideDepth

ENERGY_KEPT_SHARE = 0.99
"""A bunch counts as kept while its gates hold this share of what they held when closed."""


def guard(field: Field, patch_V: float, bunch: Bunch, segment: Segment, block: int) -> Held:
    """Certify both gates (V) through a segment; the first one sets what has been kept."""
    spans = sorted((field.span_m(gate) for gate in bunch.gates), key=sum)
    left, right = (
        (int(np.searchsorted(field.z_m, low)), int(np.searchsorted(field.z_m, high)))
        for low, high in spans
    )
    well = (left[1], right[0])
    bound = certify(
        field, bunch.charge_sign, segment.base, segment.moves, well, left, right, bottom=0.0
    )
    assert bound.left is not None
    assert bound.right is not None
    sides = [
        _side(field, patch_V, segment, side, region)
        for side, region in ((bound.left, left), (bound.right, right))
    ]
    certified = min(side.certified_V for side in sides)
    if bunch.kept_V is None:
        bunch.kept_V = ENERGY_KEPT_SHARE * min(bunch.highest_V, certified)
    ends = float(field.z_m[well[0]]), float(field.z_m[well[1]])
    return Held(
        cloud=bunch.cloud,
        charge_sign=bunch.charge_sign,
        block=block,
        start_s=segment.start_s,
        end_s=segment.end_s,
        number=segment.number,
        well_m=ends,
        from_m=ends[0],
        to_m=ends[1],
        left=sides[0],
        right=sides[1],
        trap_V=certified,
        floor_V=(bunch.kept_V, bunch.kept_V),
        energetic=True,
    )


def _side(
    field: Field, patch_V: float, segment: Segment, bound: SideBound, region: tuple[int, int]
) -> SideDepth:
    weights = np.abs(field.phi[0][:, region[0] : region[1] + 1]).max(axis=1)
    taken = losses(segment, weights, patch_V=patch_V, basis_error=field.error_V_per_V)
    return SideDepth(
        certified_V=bound.lower_V - taken.total_V,
        best_V=bound.upper_V,
        losses=taken,
        at_s=float(segment.start_s),
        barrier_m=bound.barrier_z_m,
        well_m=bound.well_z_m,
        region_m=(float(field.z_m[region[0]]), float(field.z_m[region[1]])),
    )
