"""A case → the figures that a reviewer looks at: per step and cloud, output, margin, table.

Depths are certified own vacuum depths, V; times s; stated figures are those that the author
declares or assumes, in base units (K, m, /m3, counts).  What needs a stage that was not reached is
not there.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from fractions import Fraction
from itertools import pairwise

from wellseq.base.finding import Origin
from wellseq.checks.case import Case
from wellseq.emit.examined import Examined, examined, nearest_of_each
from wellseq.emit.hazards import hazards
from wellseq.emit.outline import outline
from wellseq.model.effects import Assumed
from wellseq.model.sequence import CloudDeclared
from wellseq.model.trap import Switch, Trap
from wellseq.timeline.timeline import Block

STATED = {"number": "", "temperature": "K", "radius": "m", "density": "/m3", "energy": "eV"}
Range = tuple[float, float]


@dataclass(slots=True)
class StepPicture:
    """One played step: how it is written, how long it lasts, what it reaches.

    `words` tell it from others, `text` is for people; `label` is the last one up to here.
    `depth_V` is the least depth per cloud; `volts` the least and greatest volts per electrode
    group that the step moves; `stated` the figures that stand for each cloud from its end on.
    """

    words: str
    text: str
    verb: str
    label: str
    passes: tuple[int, ...]
    where: str
    duration_s: Fraction = Fraction(0)
    depth_V: dict[str, float] = field(default_factory=dict)
    volts: dict[str, Range] = field(default_factory=dict)
    stated: dict[tuple[str, str], float] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Margin:
    """The reading nearest to its limit, for one check and subject; NaN where not known."""

    margin: float
    value: float
    limit: float
    unit: str


@dataclass(frozen=True, slots=True)
class Hazardous:
    """An output that can injure: largest volts commanded, V, and how long above touch, s."""

    largest_V: float
    live_s: float


@dataclass(frozen=True, slots=True)
class Table:
    """One block's table: rows, and how long it plays, s."""

    rows: int
    duration_s: Fraction


@dataclass(frozen=True, slots=True)
class Picture:
    """Everything about one side of a comparison; `thing` has its findings."""

    thing: Examined
    steps: tuple[StepPicture, ...] = ()
    extremes: Mapping[str, Range] = field(default_factory=dict)
    margins: Mapping[tuple[str, str], Margin] = field(default_factory=dict)
    hazards: Mapping[str, Hazardous] = field(default_factory=dict)
    tables: Mapping[str, Table] = field(default_factory=dict)


def picture(case: Case) -> Picture:
    """The picture of a case, as far as the case got."""
    thing = examined(case)
    margins = {
        (one.name, one.subject): Margin(one.margin, one.value, one.limit or 0.0, one.unit)
        for one in nearest_of_each(thing.findings)
        if one.margin is not None and one.value is not None
    }
    if case.timeline is None or case.trap is None or case.shipped is None:
        return Picture(thing, margins=margins)
    extremes: dict[str, Range] = {}
    for block in case.timeline.blocks:
        for name, volts in _reached(case.trap, block).items():
            _widen(extremes, name, volts)
    return Picture(
        thing,
        tuple(_steps(case, thing, case.trap)),
        extremes,
        margins,
        {
            one.output: Hazardous(one.largest_V, sum(end - start for _, start, end in one.windows))
            for one in hazards(case.trap, case.shipped)
        },
        {
            f"{one.block.index + 1} {one.block.name}": Table(len(one.ticks), one.block.duration_s)
            for one in case.shipped.blocks
        },
    )


def _steps(case: Case, thing: Examined, trap: Trap) -> Iterator[StepPicture]:
    timeline, wells = case.timeline, case.wells
    if timeline is None:
        return
    steps = [_step(thing, origin) for origin in timeline.origins]
    for before, step in pairwise(steps):
        step.label = step.label or before.label
    for block in timeline.blocks:
        for span in block.spans:
            steps[span.number].duration_s += span.end_s - span.start_s
        for number, electrodes, ends in _moves(trap, block):
            _widen(steps[number].volts, electrodes, ends)
    for held in wells.held if wells is not None else ():
        depths = steps[held.number].depth_V
        depths[held.cloud] = min(depths.get(held.cloud, held.certified_V), held.certified_V)
    _state(steps, timeline.clouds, timeline.blocks)
    yield from steps


def _step(thing: Examined, origin: Origin) -> StepPicture:
    source = thing.sources.get(origin.place.file)
    written = outline(source, origin.place.file).at(origin.place) if source is not None else None
    words = written.words if written is not None else origin.step
    text = written.text if written is not None else origin.step
    where = f"{origin.place.file}:{origin.place.line}"
    return StepPicture(words, text, origin.step, origin.label, origin.passes, where)


def _moves(trap: Trap, block: Block) -> Iterator[tuple[int, str, Range]]:
    """(step, electrodes, volts at both ends) of every motion of a block."""
    for piece in block.pieces:
        yield piece.number, _electrodes(trap, piece.output), _sorted(piece.from_V, piece.to_V)
    for edge in block.edges:
        switch = trap.output(edge.output)
        levels = switch.levels if isinstance(switch, Switch) else ()
        volts = [levels[number] for number in (edge.from_level, edge.to_level)]
        fixed = [level for level in volts if not isinstance(level, str)]
        if fixed:
            yield edge.number, _electrodes(trap, edge.output), _sorted(fixed[0], fixed[-1])


def _reached(trap: Trap, block: Block) -> dict[str, Range]:
    """Least and greatest wished volts of every output within a block."""
    found = {_electrodes(trap, name): (volts, volts) for name, volts in block.volts.items()}
    for _, electrodes, ends in _moves(trap, block):
        _widen(found, electrodes, ends)
    return found


def _electrodes(trap: Trap, output: str) -> str:
    """An output as people speak of it: by its electrodes, by its own name where it has none."""
    return ", ".join(trap.electrodes_of(output)) or output


def _sorted(one: float, other: float) -> Range:
    return min(one, other), max(one, other)


def _widen(found: dict[str, Range], name: str, ends: Range) -> None:
    low, high = found.get(name, ends)
    found[name] = min(low, ends[0]), max(high, ends[1])


def _state(
    steps: list[StepPicture], clouds: Mapping[str, CloudDeclared], blocks: tuple[Block, ...]
) -> None:
    """Give every step the figures that stand for the clouds from then on."""
    stands: dict[tuple[str, str], float] = {}
    for name, cloud in clouds.items():
        for quantity in STATED:
            spread = getattr(cloud, quantity, None)
            if spread is not None:
                stands[name, quantity] = float(spread.value)
    assumed: dict[int, list[Assumed]] = {}
    for block in blocks:
        for event in block.events:
            if isinstance(event.effect, Assumed):
                assumed.setdefault(event.number, []).append(event.effect)
    for number, step in enumerate(steps):
        for effect in assumed.get(number, ()):
            stands[effect.cloud, effect.quantity] = effect.value
        step.stated = dict(stands)
