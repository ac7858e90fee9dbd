"""Electrodes and end plates → the bore: stretches of one radius, and the planes between them.

A change of radius lies between two electrodes: the annular face belongs to the narrower one, at its
end, and the gap lies on the wider wall beside it.  By its mirror image in the face that gap is half
a gap of twice the width, so its straight rise begins at the face and is 1.1027 times as wide.  A
grounded tube, as wide as the outermost electrode, goes on beyond the stack: for ever, or up to a
grounded plate.

Shapes: rises (ne, n).  Units: m, V per V.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import groupby, pairwise
from math import ceil, inf, isfinite

import numpy as np
from numpy.typing import ArrayLike, NDArray

from wellseq.fields.gaps import GAP_FACTOR, gap_left, reach_of
from wellseq.fields.hermite import QUINTIC_ERROR, FloatArray
from wellseq.fields.tube import Axis, Wall
from wellseq.fields.uniform import (
    NODES_MAX,
    REACH_RADII,
    ROUNDING,
    STEP_SUPREMA,
    STEPS_PER_RADIUS,
    Electrode,
)

IMAGES_RADII = 17.0
"""Rises further than this from every place that is asked for are not felt (e^{−2.405·17})."""
BALL_SUPREMA = (2240.0, 16_800.0, 143_000.0)
"""n! (2n + 1)/2 ∫|P_n| for n = 6, 7, 8, rounded up: the greatest n-th derivative along a line, in
the middle of a ball of radius 1, of a harmonic function between −1 and 1 (tested)."""
FACE_SHARE = 0.04
"""What the rule for a gap g beside a face of height f leaves out, V per V on the axis, is at most
this × g/a × the lesser of 1 and g²/(f a): from finite elements (tests/fields/test_elements.py)."""
Plates = tuple[float | None, float | None]


@dataclass(frozen=True, slots=True)
class Plane:
    """A plane at `z_m` between two sections with an opening of `radius_m`; 0 for an end plate.

    The level of its face is that of the electrode number `face`; −1 for ground.
    """

    z_m: float
    radius_m: float
    face: int


@dataclass(frozen=True, slots=True)
class Section:
    """A stretch of the bore of one radius, from `left` to `right`, endless where that is None.

    At `centre_m` (n,) its wall rises by `rise` (ne, n) over `width_m` (n,), in order along the
    axis; rises of width 0 may stand on a plane.
    """

    radius_m: float
    left: Plane | None
    right: Plane | None
    centre_m: FloatArray
    width_m: FloatArray
    rise: FloatArray

    @property
    def span_m(self) -> tuple[float, float]:
        """Where it begins and ends, m; infinite where it does not."""
        low = -inf if self.left is None else self.left.z_m
        return low, inf if self.right is None else self.right.z_m

    @property
    def length_m(self) -> float:
        """From plane to plane, m."""
        return self.span_m[1] - self.span_m[0]

    def leaky(self) -> FloatArray:
        """1 at gaps between two electrodes of the section, 0 at its ends and beside faces, (n,)."""
        inner = self.width_m > 0
        for plane in (self.left, self.right):
            if plane is not None:
                inner &= np.abs(self.centre_m - plane.z_m) > 0.51 * self.width_m
        return np.asarray(inner, dtype=float)

    def level(self, plane: Plane | None) -> FloatArray:
        """What a plane of it is at for every electrode at 1 V, (ne,)."""
        level = np.zeros(self.rise.shape[0])
        if plane is not None and plane.face >= 0:
            level[plane.face] = 1.0
        return level


@dataclass(frozen=True, slots=True)
class Bore:
    """Sections from left to right, the planes with an opening between them, the end plates."""

    sections: tuple[Section, ...]
    steps: tuple[Plane, ...]
    plates_m: Plates

    @property
    def count(self) -> int:
        """How many electrodes there are."""
        return int(self.sections[0].rise.shape[0])

    @property
    def least_radius_m(self) -> float:
        """Radius of the narrowest section, m."""
        return min(section.radius_m for section in self.sections)

    def span_of(self, section: Section) -> tuple[float, float]:
        """Where a section has its rises, m: from plane to plane, or to the end of the stack."""
        low, high = section.span_m
        first = low if isfinite(low) else float(section.centre_m[0])
        return first, high if isfinite(high) else float(section.centre_m[-1])

    def radius_at(self, z_m: ArrayLike) -> FloatArray:
        """The bore's radius (m, shape of z) at places along the axis; on a step the narrower."""
        place = np.asarray(z_m, dtype=float)
        planes = np.array([step.z_m for step in self.steps])
        radii = np.array([section.radius_m for section in self.sections])
        before = radii[np.searchsorted(planes, place, side="left")]
        return np.minimum(before, radii[np.searchsorted(planes, place, side="right")])


def bore_of(electrodes: Sequence[Electrode], plates_m: Plates = (None, None)) -> Bore:
    """The bore of electrodes given in order along the axis, with grounded plates where given.

    Raises ValueError for no electrode, spans that are empty, overlap or are not finite, a radius
    that is not positive, or a plate inside the stack.
    """
    _check(electrodes, plates_m)
    numbers = range(len(electrodes))
    runs = [list(run) for _, run in groupby(numbers, lambda e: float(electrodes[e].radius_m))]
    steps = [_plane(electrodes, left[-1], right[0]) for left, right in pairwise(runs)]
    ends = [None if z_m is None else Plane(float(z_m), 0.0, -1) for z_m in plates_m]
    planes = [ends[0], *steps, ends[1]]
    sections = [
        _section(electrodes, run, left, right)
        for run, left, right in zip(runs, planes[:-1], planes[1:], strict=True)
    ]
    return Bore(tuple(sections), tuple(steps), plates_m)


def axis_of(bore: Bore) -> Axis:
    """The nodes of the field in steps of at most the least radius / 22.

    From plate to plate, or 8 radii beyond the stack where the tube goes on.  Raises ValueError when
    there would be more than 40,000 nodes.
    """
    low_m, high_m = bore.span_of(bore.sections[0])[0], bore.span_of(bore.sections[-1])[1]
    start = low_m if bore.sections[0].left else low_m - REACH_RADII * bore.sections[0].radius_m
    last = bore.sections[-1]
    stop = high_m if last.right else high_m + REACH_RADII * last.radius_m
    steps = (stop - start) * STEPS_PER_RADIUS / bore.least_radius_m
    if not steps <= NODES_MAX:
        raise ValueError(
            f"a stack of {high_m - low_m:g} m with a bore of radius {bore.least_radius_m:g} m "
            "is too long for its bore"
        )
    count = ceil(steps)
    return Axis(start, (stop - start) / count, count + 1)


def interpolation_error(bore: Bore, axis: Axis, order: int = 0) -> float:
    """Greatest error of the quintic between nodes, V/m^order per V on one electrode (order 0-2).

    Two edges at most in one open tube (uniform.py); else h⁶/46080 times the greatest derivative
    that a potential between −1 V and 1 V can have in the middle of a ball of the least radius.
    """
    a = bore.least_radius_m
    if not bore.steps and bore.plates_m == (None, None):
        supremum = 2.0 * STEP_SUPREMA[order]
    else:
        supremum = BALL_SUPREMA[order]
    bound = supremum * QUINTIC_ERROR * (axis.step_m / a) ** 6 + ROUNDING * 30.0**order
    return float(bound / a**order)


def _check(electrodes: Sequence[Electrode], plates_m: Plates) -> None:
    if not electrodes:
        raise ValueError("a stack needs at least one electrode")
    numbers = [x for e in electrodes for x in (e.from_m, e.to_m, e.radius_m)]
    numbers += [z_m for z_m in plates_m if z_m is not None]
    if not all(map(isfinite, numbers)) or any(not e.radius_m > 0 for e in electrodes):
        raise ValueError("lengths of electrodes must be finite and the radius positive")
    if any(e.to_m <= e.from_m for e in electrodes) or any(
        after.from_m < before.to_m for before, after in pairwise(electrodes)
    ):
        raise ValueError("electrodes must be longer than nothing and must not overlap")
    low, high = plates_m
    if (low is not None and low > electrodes[0].from_m) or (
        high is not None and high < electrodes[-1].to_m
    ):
        raise ValueError("a plate cannot stand inside the stack")


def _plane(electrodes: Sequence[Electrode], left: int, right: int) -> Plane:
    one, other = electrodes[left], electrodes[right]
    if one.radius_m < other.radius_m:
        return Plane(float(one.to_m), float(one.radius_m), left)
    return Plane(float(other.from_m), float(other.radius_m), right)


def _section(
    electrodes: Sequence[Electrode], run: list[int], left: Plane | None, right: Plane | None
) -> Section:
    """The rises of a run of electrodes between two planes, or an endless grounded tube."""
    rises: list[tuple[float, float, int, int]] = []
    first, last = electrodes[run[0]], electrodes[run[-1]]
    if left is None or left.radius_m == 0.0:
        rises.append((float(first.from_m), 0.0, -1, run[0]))
    elif left.face != run[0]:
        width_m = GAP_FACTOR * (first.from_m - left.z_m)
        rises.append((left.z_m + width_m / 2, width_m, left.face, run[0]))
    for before, after in pairwise(run):
        low, high = electrodes[before].to_m, electrodes[after].from_m
        rises.append(((low + high) / 2, GAP_FACTOR * (high - low), before, after))
    if right is None or right.radius_m == 0.0:
        rises.append((float(last.to_m), 0.0, run[-1], -1))
    elif right.face != run[-1]:
        width_m = GAP_FACTOR * (right.z_m - last.to_m)
        rises.append((right.z_m - width_m / 2, width_m, run[-1], right.face))
    rise = np.zeros((len(electrodes), len(rises)))
    for place, (_, _, before, after) in enumerate(rises):
        if before >= 0:
            rise[before, place] -= 1.0
        if after >= 0:
            rise[after, place] += 1.0
    centres, widths = (np.array([one[i] for one in rises], dtype=float) for i in (0, 1))
    return Section(float(first.radius_m), left, right, centres, widths, rise)


def mirrored(section: Section, strip_m: FloatArray, span_m: tuple[float, float]) -> Wall:
    """The wall of a section with its mirror images in both planes, for places within a span (m).

    The odd reflection about a plane's level V turns w(z) into 2 V − w(−z): rises keep their sign,
    strips (ne, n) change it.  Far from the span the wall is closed off with 0 V.
    """
    reach = IMAGES_RADII * section.radius_m
    window = span_m[0] - reach, span_m[1] + reach
    places, signs, which = _images(section, window)
    rise, strip = section.rise[:, which], strip_m[:, which] * signs
    before = np.zeros(rise.shape[0])
    if section.left is not None:
        low = section.left.z_m
        # A rise on the plane is there twice, and half of the pair lies before the plane's level.
        weight = np.where(places < low, 1.0, np.where(places == low, 0.5, 0.0))
        before = section.level(section.left) - rise @ weight
    after = before + rise.sum(axis=1)
    low_m = float(places.min(initial=window[0]))
    high_m = float(places.max(initial=window[1]))
    nothing = np.zeros((rise.shape[0], 1))
    return Wall(
        section.radius_m,
        np.concatenate(([low_m], places, [high_m])),
        np.concatenate(([0.0], section.width_m[which], [0.0])),
        np.hstack((before[:, None], rise, -after[:, None])),
        np.hstack((nothing, strip, nothing)),
    )


def _images(
    section: Section, window: tuple[float, float]
) -> tuple[FloatArray, FloatArray, NDArray[np.intp]]:
    """Places (m,), signs of strips (m,) and numbers of all rises and their images in a window."""
    centre, number = section.centre_m, np.arange(section.centre_m.size)
    low, high = section.span_m
    pair = number
    places, signs = centre, np.ones(centre.size)
    if section.left is not None or section.right is not None:
        mirror = low if section.left is not None else high
        places = np.concatenate((centre, 2 * mirror - centre))
        signs = np.repeat([1.0, -1.0], centre.size)
        pair = np.concatenate((number, number))
    if isfinite(low) and isfinite(high):
        period = 2 * (high - low)
        first = np.floor((window[0] - high) / period) - 1
        turns = np.arange(first, np.ceil((window[1] - low) / period) + 2)
        places = (places[None, :] + period * turns[:, None]).ravel()
        signs, pair = np.tile(signs, turns.size), np.tile(pair, turns.size)
    inside = (places >= window[0]) & (places <= window[1])
    return places[inside], signs[inside], pair[inside]


@dataclass(frozen=True, slots=True)
class GapsLeft:
    """What the rules for gaps leave out, an estimate: at each of all rises of a bore.

    `z_m` (g,), the local radius `radius_m` (g,), `amplitude` (ne, g) V per V on the axis there.
    """

    z_m: FloatArray
    radius_m: FloatArray
    amplitude: FloatArray

    def on_axis(self, z_m: FloatArray) -> FloatArray:
        """The estimate (ne, n), V per V, at places (n,) on the axis."""
        share = reach_of(z_m[None, :] - self.z_m[:, None], self.radius_m[:, None])
        return np.asarray(self.amplitude @ share)


def gaps_left(bore: Bore) -> GapsLeft:
    """The estimate for every gap of a bore."""
    parts = []
    for section in bore.sections:
        nothing = np.zeros_like(section.rise)
        seen = mirrored(section, nothing, bore.span_of(section))
        own = Wall(section.radius_m, section.centre_m, section.width_m, section.rise, nothing)
        amplitude = gap_left(own, seen.centre_m, seen.rise) * section.leaky()
        amplitude += np.abs(section.rise) * _beside_faces(section)
        parts.append((own.centre_m, amplitude))
    radii = [np.full(z.size, s.radius_m) for (z, _), s in zip(parts, bore.sections, strict=True)]
    return GapsLeft(
        np.concatenate([z for z, _ in parts]),
        np.concatenate(radii),
        np.hstack([amplitude for _, amplitude in parts]),
    )


def _beside_faces(section: Section) -> FloatArray:
    """What the rule leaves out at gaps beside a face, (n,) per V of the rise; 0 at all others."""
    left_out = np.zeros(section.centre_m.size)
    for plane in (section.left, section.right):
        if plane is None or plane.radius_m == 0.0:
            continue
        beside = np.abs(section.centre_m - plane.z_m) <= 0.51 * section.width_m
        gap_m, face_m = section.width_m / GAP_FACTOR, section.radius_m - plane.radius_m
        if face_m > 0.0:
            steep = np.minimum(1.0, gap_m**2 / (section.radius_m * face_m))
            left_out += np.where(beside, FACE_SHARE * gap_m / section.radius_m * steep, 0.0)
    return left_out
