"""`claims.json` against the tables: every well is as deep, at the quantised voltages, as claimed.

The potential is worked out by `steps.py`, from modes and waves, where the compiler used a table.
At an instant of a claimed stretch, with U = sign · φ on the axis:

    depth of a side = max U over its region − min U over the well's region

must be at least what was certified; and with calibration, noise and patch taken off at the two
places found (and the claimed lag and ripple), at least the floor.  A side counts only as far as no
dip deeper than the ripple lies between the well and the top; the well's region must rise from its
least place outward.  Points on a grid underrate a depth, so the least and greatest are polished.

Examined are, per stretch, both ends less one clock, the rows around where it is least, and rows
spread over the rest as far as a bound on the work allows.  Volts in V, places in m.
"""

from __future__ import annotations

import math
from bisect import bisect_left, bisect_right
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from fractions import Fraction

from wellseq.reread.course import Course, Stand
from wellseq.reread.plan import Plan
from wellseq.reread.reading import Part, Unsound
from wellseq.reread.steps import Tube
from wellseq.reread.table import Table

UNSOUND = "depth-not-held"
INSTANTS_MAX = 6000
"""How many instants are examined at most, over all claims."""
SPREAD = 8
"""Rows examined in the midst of a stretch, beside its ends and where it is least."""
NODES_PER_RADIUS = 24
NODES_MAX = 400
"""Points of one region at most."""
ROUNDING_V = 1e-6
FIELD_V_PER_V = 1e-7
"""How far two ways to sum up the same field may differ, V per V on each electrode."""
Region = tuple[float, float]


@dataclass(slots=True)
class Examined:
    """What was judged: stretches and instants, and the least depth beyond its floor, V."""

    stretches: int = 0
    judged: int = 0
    instants: int = 0
    least_V: float = math.inf
    least_of: str = ""
    unknown: str = ""

    def sentence(self) -> str:
        """What was examined, in words; depths in V."""
        if self.unknown:
            return f"depth NOT worked out again: {self.unknown}"
        said = (
            f"depth worked out again at {self.instants} instants of {self.judged} of "
            f"{self.stretches} held stretches, by another field"
        )
        if not self.judged:
            return said
        return f"{said}; the least is {self.least_V:.3g} V above its floor ({self.least_of})"


@dataclass(frozen=True, slots=True)
class Side:
    """One side of a claim; volts in V, the region in m."""

    name: str
    region_m: Region
    certified_V: float
    floor_V: float
    taken_V: float
    ripple_V: float


@dataclass(frozen=True, slots=True)
class Claim:
    """One stretch: which cloud, when (ticks), where (m), and what holds it."""

    cloud: str
    sign: int
    block: int
    start: Fraction
    end: Fraction
    least: tuple[Fraction, ...]
    well_m: Region
    sides: tuple[Side, ...]
    from_ground: bool
    allowed: bool
    number: int


def judge_depths(
    document: Part, plan: Plan, tables: Sequence[Table], examined: Examined
) -> Iterator[Unsound]:
    """Everything in which the depths are not as claimed; `examined` is filled in.

    Nothing is judged in a bore whose field is not known here; then `examined` says so.
    """
    claims = [_claim(part, plan, at) for at, part in enumerate(document.parts("claims"))]
    examined.stretches = len(claims)
    if not claims:
        return
    radii = {electrode.radius_m for electrode in plan.electrodes}
    if len(radii) != 1 or plan.ends != "open":
        examined.unknown = "the second reader knows a bore of one radius with open ends only"
        return
    spans = [(float(one.from_m), float(one.to_m)) for one in plan.electrodes]
    wells = _Wells(Tube(spans, float(radii.pop())))
    courses = [Course(plan, table) for table in tables]
    # The tightest claims first, so that a bound on the work leaves out the easiest ones.
    tightest = sorted(claims, key=lambda one: min(s.certified_V - s.floor_V for s in one.sides))
    for claim in tightest:
        if examined.instants >= INSTANTS_MAX:
            break
        wrong = _judge(claim, plan, courses[claim.block], wells, examined)
        if wrong:
            where = f"claim {claim.number + 1}, {claim.cloud}: {wrong}"
            yield Unsound(UNSOUND, document.file, where)


def _claim(part: Part, plan: Plan, number: int) -> Claim:
    block = part.whole("block", 1, len(plan.blocks)) - 1
    tick_s = plan.blocks[block].tick_s
    sides, least = [], []
    for name in ("left", "right"):
        side = part.part(name)
        losses = side.part("losses_V")
        low, high = map(float, side.numbers("region_m", 2))
        certified, floor = side.number_or_none("certified_V"), side.number_or_none("floor_V")
        ripple = float(losses.number("ripple"))
        sides.append(
            Side(
                name=name,
                region_m=(low, high),
                certified_V=math.nan if certified is None else float(certified),
                floor_V=math.nan if floor is None else float(floor),
                taken_V=float(losses.number("lag")) + ripple,
                ripple_V=ripple,
            )
        )
        at_s = side.number_or_none("at_s")
        if at_s is not None:
            least.append(at_s / tick_s)
    low, high = map(float, part.numbers("well_m", 2))
    return Claim(
        cloud=part.text("cloud"),
        sign=part.whole("charge_sign", -1, 1),
        block=block,
        start=part.exact("start_s") / tick_s,
        end=part.exact("end_s") / tick_s,
        least=tuple(least),
        well_m=(low, high),
        sides=tuple(sides),
        from_ground=part.flag("counts_from_ground"),
        allowed=part.whole("step_number", -1) in plan.shallow_steps,
        number=number,
    )


def _judge(claim: Claim, plan: Plan, course: Course, wells: _Wells, examined: Examined) -> str:
    """What is wrong with one claim, as a sentence; empty when nothing is."""
    met: set[Stand] = set()
    for tick in _instants(claim, plan, course):
        for stand in course.stands(tick):
            if stand in met:
                continue
            met.add(stand)
            examined.instants += 1
            wrong = _wrong(claim, stand, wells, examined)
            if wrong:
                return f"{wrong}, at tick {float(tick):.0f}"
    examined.judged += bool(met)
    return ""


def _instants(claim: Claim, plan: Plan, course: Course) -> list[Fraction]:
    """The instants of a stretch to look at; none when it is shorter than rounding may move it."""
    clocks = [output.clock_s for output in plan.outputs]
    slack = max(clocks) / course.table.block.tick_s
    low, high = claim.start + slack, claim.end - slack
    if low > high:
        return []
    ticks = course.table.ticks
    first, last = bisect_right(ticks, low), bisect_left(ticks, high)
    rows = set(range(first, last, max(1, (last - first) // SPREAD)))
    for least in claim.least:
        beside = course.row(least)
        rows |= {row for row in (beside, beside + 1) if first <= row < last}
    inside = {Fraction(ticks[row]) for row in rows}
    return sorted(inside | {low, high})


def _wrong(claim: Claim, stand: Stand, wells: _Wells, examined: Examined) -> str:
    volts, off = stand
    shape = wells.shape(claim.sign, volts)
    bottom = shape.bottom(claim.well_m, claim.sides[0].ripple_V, claim.from_ground)
    if bottom is None:
        return "its well's region holds more than one well"
    for side in claim.sides:
        inner = claim.well_m[0] if side.name == "left" else claim.well_m[1]
        top = shape.top(side.region_m, inner, side.ripple_V, claim.from_ground)
        depth = top.level - bottom.level
        here = f"its {side.name} side is {depth:.6g} V deep"
        if not depth >= side.certified_V - shape.slack_V:
            return f"{here}, {side.certified_V:.6g} V were certified"
        weights = zip(off, top.units, bottom.units, strict=True)
        sure = depth - side.taken_V - sum(one * abs(up - down) for one, up, down in weights)
        beyond = sure - side.floor_V
        if beyond < examined.least_V:
            examined.least_V, examined.least_of = beyond, f"{claim.cloud}, {side.name}"
        if not claim.allowed and not beyond >= -shape.slack_V:
            return f"{here}, {sure:.6g} V surely, and {side.floor_V:.6g} V are demanded"
    return ""


@dataclass(frozen=True, slots=True)
class Point:
    """A place of the axis: U there in V, and every electrode's potential at 1 V (V per V)."""

    level: float
    units: tuple[float, ...]


class _Wells:
    """The field of the tube with the grids of all regions that were asked for."""

    def __init__(self, tube: Tube) -> None:
        self.tube = tube
        self._grids: dict[Region, list[float]] = {}

    def grid(self, region: Region) -> list[float]:
        """The nodes of one common grid inside a region (m), and its ends."""
        if region not in self._grids:
            low, high = region
            step = self.tube.radius_m / NODES_PER_RADIUS
            first, last = math.floor(low / step) + 1, math.ceil(high / step)
            apart = 1 + max(0, last - first) // NODES_MAX
            self._grids[region] = [low, *(step * at for at in range(first, last, apart)), high]
        return self._grids[region]

    def shape(self, sign: int, volts: tuple[float, ...]) -> _Shape:
        return _Shape(self, sign, volts)


class _Shape:
    """U along the axis at given voltages (V)."""

    def __init__(self, wells: _Wells, sign: int, volts: tuple[float, ...]) -> None:
        self.wells, self.volts = wells, tuple(sign * one for one in volts)
        self.slack_V = ROUNDING_V + FIELD_V_PER_V * sum(map(abs, volts))
        self._known: dict[Region, list[float]] = {}

    def levels(self, region: Region) -> list[float]:
        if region not in self._known:
            tube, volts = self.wells.tube, self.volts
            self._known[region] = [
                sum(map(float.__mul__, volts, tube.potentials(z))) for z in self.wells.grid(region)
            ]
        return self._known[region]

    def point(self, z_m: float) -> Point:
        units = self.wells.tube.potentials(z_m, keep=False)
        return Point(sum(map(float.__mul__, self.volts, units)), units)

    def bottom(self, region: Region, ripple_V: float, from_ground: bool) -> Point | None:
        """The least U of a well's region; None when it does not rise from there outward."""
        if from_ground:
            return Point(0.0, (0.0,) * len(self.volts))
        levels = self.levels(region)
        at = min(range(len(levels)), key=levels.__getitem__)
        allowed = ripple_V + self.slack_V
        if _dip(levels[at:]) > allowed or _dip(levels[at::-1]) > allowed:
            return None
        return self._polished(region, at, -1)

    def top(self, region: Region, inner_m: float, ripple_V: float, from_ground: bool) -> Point:
        """The greatest U of a side, no further out than a dip of more than the ripple."""
        levels = self.levels(region)
        order = range(len(levels))
        if abs(inner_m - region[1]) < abs(inner_m - region[0]):
            order = order[::-1]
        best = order[0]
        for at in order:
            if levels[at] > levels[best]:
                best = at
            elif not from_ground and levels[best] - levels[at] > ripple_V + self.slack_V:
                break
        return self._polished(region, best, 1)

    def _polished(self, region: Region, at: int, sense: int) -> Point:
        """The node, or the place of the parabola's vertex beside it where that is better."""
        grid, levels = self.wells.grid(region), self.levels(region)
        node = self.point(grid[at])
        if not 0 < at < len(grid) - 1:
            return node
        vertex = self.point(_vertex(grid[at - 1 : at + 2], levels[at - 1 : at + 2]))
        return vertex if sense * (vertex.level - node.level) > 0 else node


def _vertex(places: list[float], levels: list[float]) -> float:
    """Where the parabola through three points has its vertex, kept between the outer two."""
    (low, here, high), (before, level, after) = places, levels
    left = (level - before) / (here - low)
    right = (after - level) / (high - here)
    bend = (right - left) / (high - low)
    if not bend:
        return here
    return min(max((low + here) / 2 - left / (2 * bend), low), high)


def _dip(levels: list[float]) -> float:
    """How far a run of levels ever falls below what it had reached."""
    reached, deepest = -math.inf, 0.0
    for level in levels:
        reached = max(reached, level)
        deepest = max(deepest, reached - level)
    return deepest
