"""One well over one segment: prove that it holds, and certify how deep.

The segment is cut where one region cannot hold the minimum throughout, or where what is taken off
for the shape of the motion is large; the parts that come out are proved one after the other.  From
each certified depth everything is taken off that can make an electrode differ from the wish: for a
cause with a deviation d_e per electrode, at most sum_e d_e osc_e, osc_e being the greatest
|phi_e(barrier) - phi_e(well)| over the proved regions.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from fractions import Fraction

import numpy as np
import numpy.typing as npt

from wellseq.fields.certificate import Region, SideBound, certify, oscillation
from wellseq.fields.field import Field
from wellseq.fields.following import Proven, prove
from wellseq.timeline.motion import Segment
from wellseq.wells.losses import losses
from wellseq.wells.wells import SideDepth

Vector = npt.NDArray[np.float64]
CUTS_MAX = 12
"""How often a segment may be halved before the proof gives up."""
LOOSE_SHARE = 0.02
LOOSE_V = 1e-3
"""A part is cut once more while the chord's loss exceeds both of these (share of the depth, V)."""
RIPPLE_SHARE = 0.1
RIPPLE_V = 1e-3
"""Minima that a lesser barrier separates are one, and that much is taken off: the greater of these
(share of the floor; V)."""


@dataclass(frozen=True, slots=True)
class Part:
    """A part of a segment on which one region holds the minimum.

    `window_s` in block time; base (electrodes,), moves (progresses, electrodes) in V.
    """

    window_s: tuple[Fraction, Fraction]
    base: Vector
    moves: Vector
    segment: Segment

    def corners(self) -> Vector:
        """Voltages (corners, electrodes) where every progress is 0 or 1; the start comes first."""
        found = self.base.reshape(1, -1)
        for move in self.moves:
            found = np.concatenate([found, found + move])
        return found

    def cut(self) -> tuple[Part, Part] | None:
        """Two halves: in progress where there is just one and it is exact, else in time."""
        start_s, end_s = self.window_s
        middle_s = (start_s + end_s) / 2
        if len(self.moves) == 1 and not np.any(self.segment.shape_V):
            half = self.moves / 2
            first = replace(self, window_s=(start_s, middle_s), moves=half)
            return first, replace(
                self, window_s=(middle_s, end_s), base=self.base + half[0], moves=half
            )
        halves = self.segment.cut()
        if halves is None:
            return None
        return part_of(halves[0]), part_of(halves[1])


def part_of(segment: Segment) -> Part:
    """A whole segment as one part."""
    return Part((segment.start_s, segment.end_s), segment.base, segment.moves, segment)


@dataclass(frozen=True, slots=True)
class Hold:
    """A proved part: the regions (m), where the minimum is at its ends, and both sides' depths."""

    window_s: tuple[Fraction, Fraction]
    well_m: tuple[float, float]
    from_m: float
    to_m: float
    left: SideDepth
    right: SideDepth
    trap_V: float

    @property
    def certified_V(self) -> float:
        """The lesser of the two sides' certified depths, V."""
        return min(self.left.certified_V, self.right.certified_V)


@dataclass(frozen=True, slots=True)
class Lost:
    """A part on which no region could be proved to hold the minimum, up to a ripple (V)."""

    window_s: tuple[Fraction, Fraction]
    from_m: float
    part: Part
    ripple_V: float


@dataclass(frozen=True, slots=True)
class Known:
    """What was found for one motion: the proof, both sides' bounds, depth out to the ends (V)."""

    proven: Proven
    left: SideBound
    right: SideBound
    trap_V: float


class Holding:
    """Proves and certifies; remembers what it has done, since sequences repeat themselves."""

    def __init__(self, field: Field, patch_V: float) -> None:
        self.field = field
        self.patch_V = patch_V
        # Kept with the field, so that the next look at a text that changed a little is quick.
        self._known: dict[bytes, Known | None] = field.memory.setdefault("proofs of wells", {})

    def hold(
        self, sign: int, z_m: float, segment: Segment, floor_V: float
    ) -> Iterator[Hold | Lost]:
        """Follow a well from z (m) through a segment against a floor (V); ends where it is lost."""
        waiting = [(part_of(segment), 0)]
        ripple_V = max(RIPPLE_V, RIPPLE_SHARE * floor_V)
        while waiting:
            part, cuts = waiting.pop()
            known = self._solve(sign, z_m, part, ripple_V)
            halves = part.cut() if cuts < CUTS_MAX and self._loose(part, known, floor_V) else None
            if halves is not None:
                waiting += [(halves[1], cuts + 1), (halves[0], cuts + 1)]
            elif known is None:
                yield Lost(part.window_s, z_m, part, ripple_V)
                return
            else:
                hold = self._hold(part, z_m, known)
                z_m = hold.to_m
                yield hold

    def _loose(self, part: Part, known: Known | None, floor_V: float) -> bool:
        if known is None:
            return True
        shape_V = part.segment.shape_V
        if not np.any(shape_V):
            return False
        proven = known.proven
        weights = self._weights(proven.core, proven.left, proven.right)
        depth = min(known.left.lower_V, known.right.lower_V)
        return float(shape_V @ weights) > max(LOOSE_V, LOOSE_SHARE * max(depth - floor_V, 0.0))

    def _weights(self, core: Region, left: Region, right: Region | None) -> Vector:
        """How far each electrode's error moves a depth over these regions; kept with the field."""
        kept: dict[bytes, Vector] = self.field.memory.setdefault("weights of errors", {})
        key = repr((core, left, right)).encode()
        if key not in kept:
            kept[key] = oscillation(self.field, core, left, right)
        return kept[key]

    def _solve(self, sign: int, z_m: float, part: Part, ripple_V: float) -> Known | None:
        deviation = part.segment.deviation_V()
        key = b"".join(
            (
                sign.to_bytes(1, "little", signed=True),
                np.array([z_m, ripple_V]).tobytes(),
                part.base.tobytes(),
                part.moves.tobytes(),
                deviation.tobytes(),
            )
        )
        if key not in self._known:
            self._known[key] = self._prove(sign, z_m, part, deviation, ripple_V)
        return self._known[key]

    def _prove(
        self, sign: int, z_m: float, part: Part, deviation: Vector, ripple_V: float
    ) -> Known | None:
        corners = part.corners()
        proven = prove(
            self.field, sign, corners[0], corners[-1], z_m, deviation, ripple_V, corners[1:-1]
        )
        if proven is None:
            return None
        last = len(self.field.z_m) - 1
        sides = self._both(sign, part, proven.core, proven.left, proven.right)
        outside = self._both(sign, part, proven.core, (0, proven.core[0]), (proven.core[1], last))
        return Known(proven, *sides, min(side.lower_V for side in outside))

    def _both(
        self, sign: int, part: Part, core: Region, left: Region, right: Region
    ) -> tuple[SideBound, SideBound]:
        bound = certify(self.field, sign, part.base, part.moves, core, left, right)
        assert bound.left is not None
        assert bound.right is not None
        return bound.left, bound.right

    def _hold(self, part: Part, from_m: float, known: Known) -> Hold:
        z_m, proven = self.field.z_m, known.proven
        left = self._side(part, proven, known.left, proven.left)
        right = self._side(part, proven, known.right, proven.right)
        taken_V = max(left.losses.total_V, right.losses.total_V)
        well_m = float(z_m[proven.core[0]]), float(z_m[proven.core[1]])
        return Hold(
            part.window_s,
            well_m,
            from_m,
            proven.z_end_m,
            left,
            right,
            known.trap_V - taken_V,
        )

    def _side(
        self, part: Part, proven: Proven, bound: SideBound, region: tuple[int, int]
    ) -> SideDepth:
        segment = part.segment
        weights = self._weights(proven.core, region, None)
        taken = losses(
            segment,
            weights,
            patch_V=self.patch_V,
            basis_error=self.field.error_V_per_V,
            ripple_V=proven.ripple_V,
        )
        share = float(np.mean(bound.progress)) if bound.progress else 0.0
        start_s, end_s = map(float, part.window_s)
        z_m = self.field.z_m
        return SideDepth(
            certified_V=bound.lower_V - taken.total_V,
            best_V=bound.upper_V,
            losses=taken,
            at_s=start_s + share * (end_s - start_s),
            barrier_m=bound.barrier_z_m,
            well_m=bound.well_z_m,
            region_m=(float(z_m[region[0]]), float(z_m[region[1]])),
        )
