"""Two pictures → what changed physically, and whether any of it is worse.

Steps are matched by what they say and by their pass, then by verb and subject, then by verb; what
only moved is no change.  Changes of a share below NOISE are none.  Worse, beyond a tolerance that
is a share of the old value: a lesser depth, a lesser margin, a higher temperature or fewer
particles as stated, an output that can injure with more volts or for longer.  A finding that is new
and blocks is worse in any case; so is what could not be examined.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Callable, Hashable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from difflib import SequenceMatcher
from itertools import groupby
from typing import TypeVar

from wellseq.base.finding import Finding
from wellseq.emit.fingerprints import fingerprints
from wellseq.review.picture import STATED, Picture, StepPicture

NOISE = 1e-3
ROUNDING = 1e-9
LESS_IS_WORSE, MORE_IS_WORSE, NEITHER = -1, 1, 0
_STATED_SENSE = {"temperature": MORE_IS_WORSE, "number": LESS_IS_WORSE}
K = TypeVar("K", bound=Hashable)
V = TypeVar("V")
Pair = tuple[StepPicture | None, StepPicture | None]


@dataclass(frozen=True, slots=True)
class Change:
    """One figure before and after, in `unit` (SI, or none); None where it was or is not there.

    `sense` says which direction is worse; `worse` whether it went there beyond the tolerance.
    """

    what: str
    subject: str
    old: float | None
    new: float | None
    unit: str
    sense: int = NEITHER
    worse: bool = False


@dataclass(frozen=True, slots=True)
class StepChange:
    """Steps in a row with one and the same change; a step that came or went has no change."""

    kind: str
    first: StepPicture
    last: StepPicture
    count: int
    change: Change | None = None
    was: str = ""


@dataclass(frozen=True, slots=True)
class Comparison:
    """Everything that differs between two sides of one sequence."""

    name: str
    old: Picture | None
    new: Picture | None
    steps: tuple[StepChange, ...] = ()
    whole: tuple[Change, ...] = ()
    came: tuple[Finding, ...] = ()
    went: tuple[Finding, ...] = ()

    @property
    def unexamined(self) -> tuple[str, ...]:
        """Why a side was not examined wholly, a sentence each."""
        sides = (("old", self.old), ("new", self.new))
        return tuple(
            f"the {which} side was not examined wholly: {side.thing.cause}"
            for which, side in sides
            if side is not None and side.thing.cause
        )

    @property
    def worse(self) -> bool:
        """Whether anything got worse beyond the tolerance, or cannot be told."""
        changes = [*self.whole, *(one.change for one in self.steps if one.change is not None)]
        return bool(self.came or self.unexamined) or any(change.worse for change in changes)

    @property
    def empty(self) -> bool:
        """Whether nothing physical changed."""
        alone = self.old is None or self.new is None
        return not (alone or self.steps or self.whole or self.came or self.went)


def compare(name: str, old: Picture | None, new: Picture | None, tolerance: float) -> Comparison:
    """What changed from one picture to the other; None where a side lacks the file.

    `tolerance` is a share of the old value.
    """
    if old is None or new is None:
        one = new or old
        blocking = tuple(find for find in one.thing.findings if find.blocks) if one else ()
        return Comparison(name, old, new, came=blocking if old is None else ())
    pairs = list(matched(old.steps, new.steps))
    whole = (*_margins(old, new), *_outputs(old, new), *_tables(old, new))
    return Comparison(
        name,
        old,
        new,
        tuple(_grouped([_judged(pair, tolerance) for pair in pairs])),
        tuple(_with_verdict(change, tolerance) for change in whole),
        *_findings(old, new),
    )


# steps


def matched(old: Sequence[StepPicture], new: Sequence[StepPicture]) -> Iterator[Pair]:
    """Pairs of steps that are the same one, in order; None where a step has no partner."""
    keys: list[Callable[[StepPicture], Hashable]] = [
        lambda step: (step.words, step.passes),
        lambda step: (*step.words.split()[:2], step.passes),
        lambda step: step.verb,
    ]
    yield from _matched(list(old), list(new), keys)


def _matched(
    old: list[StepPicture], new: list[StepPicture], keys: list[Callable[[StepPicture], Hashable]]
) -> Iterator[Pair]:
    if not keys or not old or not new:
        yield from ((step, None) for step in old)
        yield from ((None, step) for step in new)
        return
    key, *others = keys
    match = SequenceMatcher(None, [key(step) for step in old], [key(step) for step in new], False)
    for tag, i1, i2, j1, j2 in match.get_opcodes():
        if tag == "equal":
            yield from zip(old[i1:i2], new[j1:j2], strict=True)
        else:
            yield from _matched(old[i1:i2], new[j1:j2], others)


def _judged(pair: Pair, tolerance: float) -> tuple[Pair, list[Change]]:
    old, new = pair
    if old is None or new is None:
        return pair, []
    changes = [
        _changed("duration", "", float(old.duration_s), float(new.duration_s), "s"),
        *(
            _changed("depth", cloud, *both, "V", LESS_IS_WORSE)
            for cloud, both in _both(old.depth_V, new.depth_V)
        ),
        *(
            _changed(f"{quantity} stated", cloud, *both, STATED[quantity], _sense(quantity))
            for (cloud, quantity), both in _both(old.stated, new.stated)
        ),
        *_reached(old, new),
    ]
    return pair, [_with_verdict(change, tolerance) for change in changes if change is not None]


def _sense(quantity: str) -> int:
    return _STATED_SENSE.get(quantity, NEITHER)


def _reached(old: StepPicture, new: StepPicture) -> Iterator[Change | None]:
    for electrodes, (before, after) in _both(old.volts, new.volts):
        for number, what in enumerate(("lowest voltage", "highest voltage")):
            ends = [side[number] if side is not None else None for side in (before, after)]
            yield _changed(what, electrodes, ends[0], ends[1], "V")


@dataclass(slots=True)
class _Run:
    """Steps one after the other in which one figure changes alike; `change` is the worst."""

    start: int
    first: StepPicture
    last: StepPicture
    count: int
    change: Change
    was: str

    def take(self, step: StepPicture, change: Change) -> None:
        """One more step."""
        self.last = step
        self.count += 1
        if change.new is not None and self.change.new is not None:
            rising = change.sense == MORE_IS_WORSE
            if (change.new > self.change.new) == rising:
                self.change = replace(change, worse=change.worse or self.change.worse)


def _grouped(judged: list[tuple[Pair, list[Change]]]) -> list[StepChange]:
    """Steps that came and went, and every run of steps that change alike as one, in order."""
    done: list[tuple[int, StepChange]] = []
    running: dict[tuple[str, str], tuple[Hashable, _Run]] = {}
    for number, ((old, new), changes) in enumerate(judged):
        if old is None or new is None:
            gone = old if new is None else new
            assert gone is not None
            done.append((number, StepChange("went" if new is None else "came", gone, gone, 1)))
            continue
        met = {(change.what, change.subject): change for change in changes}
        for figure in [one for one in running if one not in met and _has(new, *one)]:
            done.append(_ended(running.pop(figure)[1]))
        for figure, change in met.items():
            alike = _shift(change)
            if figure in running and running[figure][0] == alike:
                running[figure][1].take(new, change)
                continue
            if figure in running:
                done.append(_ended(running.pop(figure)[1]))
            was = old.text if old.words != new.words else ""
            running[figure] = alike, _Run(number, new, new, 1, change, was)
    done += [_ended(run) for _, run in running.values()]
    return [change for _, change in sorted(done, key=lambda pair: pair[0])]


def _has(step: StepPicture, what: str, subject: str) -> bool:
    """Whether a step has a figure; a cloud that no stretch of time is told of ends no run."""
    return what != "depth" or subject in step.depth_V


def _shift(change: Change) -> Hashable:
    """By how much a figure changes, and from where, roughly."""
    if change.old is None or change.new is None:
        return change.old is None, _near(change.old), _near(change.new)
    return f"{change.new - change.old:.2g}", f"{change.old:.2g}"


def _ended(run: _Run) -> tuple[int, StepChange]:
    was = run.was if run.count == 1 else ""
    return run.start, StepChange("changed", run.first, run.last, run.count, run.change, was)


def _near(value: float | None) -> str:
    return "" if value is None else f"{value:.4g}"


# the whole


def _margins(old: Picture, new: Picture) -> Iterator[Change]:
    for (name, subject), (before, after) in _both(old.margins, new.margins):
        unit = next((side.unit for side in (after, before) if side is not None), "")
        ends = [side.margin if side is not None else None for side in (before, after)]
        # A subject that is not there any more has no margin to lose.
        sense = LESS_IS_WORSE if None not in ends else NEITHER
        change = _changed(f"margin, {name}", subject, ends[0], ends[1], unit, sense)
        if change is not None:
            yield change


def _outputs(old: Picture, new: Picture) -> Iterator[Change]:
    for electrodes, (before, after) in _both(old.extremes, new.extremes):
        for number, what in enumerate(("lowest voltage", "highest voltage")):
            ends = [side[number] if side is not None else None for side in (before, after)]
            change = _changed(what, electrodes, ends[0], ends[1], "V")
            if change is not None:
                yield change
    for output, (hazard, now) in _both(old.hazards, new.hazards):
        volts = [side.largest_V if side is not None else 0.0 for side in (hazard, now)]
        live = [side.live_s if side is not None else 0.0 for side in (hazard, now)]
        for what, (one, two), unit in (
            ("hazard, largest voltage", volts, "V"),
            ("hazard, time above touch", live, "s"),
        ):
            change = _changed(what, output, one, two, unit, MORE_IS_WORSE)
            if change is not None:
                yield change


def _tables(old: Picture, new: Picture) -> Iterator[Change]:
    for name, (before, after) in _both(old.tables, new.tables):
        rows = [float(side.rows) if side is not None else None for side in (before, after)]
        times = [float(side.duration_s) if side is not None else None for side in (before, after)]
        for what, ends, unit in (("table rows", rows, ""), ("block duration", times, "s")):
            change = _changed(what, name, ends[0], ends[1], unit)
            if change is not None:
                yield change


def _findings(old: Picture, new: Picture) -> tuple[tuple[Finding, ...], tuple[Finding, ...]]:
    """Blocking findings that came, and that went."""
    sides = []
    for side in (old, new):
        found = side.thing.findings
        prints = fingerprints(side.thing, found)
        sides.append([(p, one) for p, one in zip(prints, found, strict=True) if one.blocks])
    result = []
    for mine, others in ((sides[1], sides[0]), (sides[0], sides[1])):
        there = Counter(print_ for print_, _ in others)
        left = []
        for print_, finding in mine:
            there[print_] -= 1
            if there[print_] < 0:
                left.append(finding)
        result.append(tuple(left))
    return result[0], result[1]


# figures


def _both(old: Mapping[K, V], new: Mapping[K, V]) -> Iterator[tuple[K, tuple[V | None, V | None]]]:
    """Every key of either side with both values, in order."""
    for key in dict.fromkeys((*old, *new)):
        yield key, (old.get(key), new.get(key))


def _changed(
    what: str, subject: str, old: float | None, new: float | None, unit: str, sense: int = NEITHER
) -> Change | None:
    """The change of a figure, None when there is none to speak of."""
    if old is None or new is None:
        return None if old is new else Change(what, subject, old, new, unit, sense)
    if old == new or (math.isnan(old) and math.isnan(new)):
        return None
    if abs(new - old) <= NOISE * max(abs(old), abs(new)):
        return None
    return Change(what, subject, old, new, unit, sense)


def _with_verdict(change: Change, tolerance: float) -> Change:
    old, new = change.old, change.new
    if not change.sense or old is None or new is None:
        return change
    beyond = change.sense * (new - old) > tolerance * abs(old) * (1 + ROUNDING)
    return replace(change, worse=beyond or math.isnan(new))


def merged(changes: Sequence[Change]) -> Iterator[Change]:
    """Neighbouring changes of the same figure from and to the same values, as one."""
    for _, group in groupby(changes, _alike):
        first, *rest = group
        subjects = [one.subject for one in (first, *rest)]
        apart = "; " if any(", " in subject for subject in subjects) else ", "
        yield replace(first, subject=apart.join(subjects))


def _alike(one: Change) -> Hashable:
    return one.what, _near(one.old), _near(one.new), one.unit, one.worse
