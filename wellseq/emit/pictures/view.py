"""A case → everything that its pictures show, gathered once: axis, courses, tracks, steps, notes.

What a case did not get to is empty or None, and the pictures say so.  Times are s of the block.
"""

from __future__ import annotations

import math
from bisect import bisect_right
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from wellseq.base.finding import Finding, Origin, Verdict
from wellseq.base.place import Place
from wellseq.checks.case import Case
from wellseq.emit.examined import Examined, examined, nearness
from wellseq.emit.hazards import Hazard, hazards
from wellseq.emit.outline import outline
from wellseq.emit.pictures.courses import Course, courses
from wellseq.emit.pictures.forecast import Told, told
from wellseq.emit.pictures.scale import Scale, volts_scale
from wellseq.emit.pictures.score import Score, score
from wellseq.emit.pictures.stage import Stage, stage
from wellseq.emit.pictures.tracks import Track, energy_eV, tracks
from wellseq.emit.sources import written_names
from wellseq.model.trap import Trap

ORDER = (Verdict.FAIL, Verdict.UNSURE, Verdict.ALLOWED, Verdict.PASS)
TEXT_MOST = 140


@dataclass(frozen=True, slots=True)
class Step:
    """One played step: how it is written, where, and when in which block (s)."""

    number: int
    text: str
    origin: Origin
    block: int
    start_s: float
    end_s: float


@dataclass(frozen=True, slots=True)
class Note:
    """A finding, and the block and instants (s) that it speaks of; None where it names none."""

    number: int
    finding: Finding
    at: tuple[int, float, float] | None


@dataclass(frozen=True, slots=True)
class View:
    """What the pictures show.

    `steps` are in order of time; `scale` has room for every voltage; `names` of files as shown lead
    to those that depend on no working directory.
    """

    case: Case
    thing: Examined
    trap: Trap | None
    stage: Stage | None
    axis: Score | None
    courses: tuple[Course, ...]
    tracks: tuple[Track, ...]
    steps: tuple[Step, ...]
    notes: tuple[Note, ...]
    hazards: tuple[Hazard, ...]
    told: tuple[Told, ...]
    scale: Scale
    names: Mapping[str, str]

    def step_at(self, block: int, time_s: float) -> int | None:
        """The number of the step that began last at an instant (s) of a block."""
        at = bisect_right(self.steps, (block, time_s), key=lambda one: (one.block, one.start_s))
        found = self.steps[at - 1] if at else None
        return found.number if found is not None and found.block == block else None

    def name_of(self, file: str) -> str:
        """A source as seen from the sequence, wherever the program was started."""
        return self.names.get(file, file)

    def length_m(self, cloud: str, block: int, time_s: float) -> float:
        """The forecast length of a cloud, m, in the step at an instant (s); NaN where not known."""
        rows = [
            one
            for one in self.told
            if one.cloud == cloud and one.block == block and one.start_s <= time_s <= one.end_s
        ]
        figure = rows[-1].figure("length") if rows else None
        return math.nan if figure is None else figure.value

    def volts(self, block: int, time_s: float) -> list[float]:
        """Wished volts (V) of all electrodes at an instant (s) of a block, in order."""
        behind = {name: one for one in self.courses for name in one.electrodes}
        assert self.trap is not None
        return [behind[one.name].at(block, time_s) for one in self.trap.electrodes]

    @property
    def drawn(self) -> bool:
        """Whether there is a sequence to show over time."""
        return self.axis is not None


def view(case: Case) -> View:
    """Gather everything of a case, as far as the case got."""
    thing = examined(case)
    trap = case.trap
    axis = score(case.timeline) if case.timeline is not None else None
    found = courses(case.timeline, axis) if case.timeline is not None and axis is not None else ()
    followed = tracks(case, axis) if axis is not None else ()
    steps = tuple(sorted(_steps(case, thing), key=lambda one: (one.block, one.start_s)))
    live = hazards(trap, case.shipped) if trap is not None and case.shipped is not None else ()
    reach = [end for course in found for end in course.ends_V]
    reach += [
        track.sign * energy_eV(stated) / abs(track.charges)
        for track in followed
        for stated in track.stated
        if stated.quantity == "energy"
    ]
    return View(
        case,
        thing,
        trap,
        stage(trap) if trap is not None else None,
        axis,
        found,
        followed,
        steps,
        tuple(_notes(thing, steps)),
        tuple(live),
        told(case, axis),
        volts_scale(reach),
        written_names(case),
    )


def _steps(case: Case, thing: Examined) -> Iterator[Step]:
    if case.timeline is None:
        return
    texts: dict[Place, str] = {}
    for block in case.timeline.blocks:
        for span in block.spans:
            origin = case.timeline.origins[span.number]
            if origin.place not in texts:
                texts[origin.place] = _text(thing, origin)
            start, end = float(span.start_s), float(span.end_s)
            yield Step(span.number, texts[origin.place], origin, block.index, start, end)


def _text(thing: Examined, origin: Origin) -> str:
    source = thing.sources.get(origin.place.file)
    written = outline(source, origin.place.file).at(origin.place) if source is not None else None
    text = written.text if written is not None and written.text else origin.step
    return text if len(text) <= TEXT_MOST else f"{text[: TEXT_MOST - 1]}…"


def _notes(thing: Examined, steps: tuple[Step, ...]) -> Iterator[Note]:
    """What blocks first, then what was allowed, then passes by their margin."""
    at = {(one.origin.place, one.origin.passes, one.origin.chain): one for one in steps}
    ranked = sorted(thing.findings, key=lambda one: (ORDER.index(one.verdict), nearness(one)))
    for number, finding in enumerate(ranked):
        step = at.get((finding.place, finding.passes, finding.chain))
        if step is None:
            yield Note(number, finding, None)
            continue
        window = finding.window_s or (step.start_s, step.end_s)
        yield Note(number, finding, (step.block, float(window[0]), float(window[1])))
