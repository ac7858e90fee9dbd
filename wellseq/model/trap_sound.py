"""What makes a trap sound beyond its single values: unique names, the stack, mentions, rest.

Works on what could be read, so that one bad value does not hide the faults of all the others: a
piece that could not be read has no part, and whatever would need it is not judged.  Lengths in m.
"""

from __future__ import annotations

import math
from collections.abc import Generator, Iterable, Iterator, Sequence
from dataclasses import dataclass

from wellseq.base.names import nearest
from wellseq.model.hardware import Converter, Electrode, Line, Part, Rest, Stretch, Switch, Trigger
from wellseq.model.margins import PairMargin
from wellseq.model.toml_places import Path
from wellseq.model.written import is_name
from wellseq.text.mistakes import quoted

SECTIONS = {
    Electrode: "electrode",
    Converter: "output",
    Switch: "output",
    Line: "line",
    Trigger: "trigger",
}
"""Model → the key of the list of tables in which a trap file has it."""
STRAYS_MAX = 20
"""Words that name nothing for which a meaning is looked for before other faults are held back."""
GAP_RADII_MAX = 2
"""A gap as wide as the bore is no gap but a forgotten electrode."""
DUST = 1e-9
"""Relative rounding of a difference of two lengths; a limit met exactly is met."""


@dataclass(frozen=True, slots=True)
class Fault:
    """Something wrong, at a path of the file.

    `see` is the path of what it clashes with.  `word` and `known` are a word that names nothing and
    what it could have named; `what` says what those are.
    """

    path: Path
    name: str
    message: str
    hint: str = ""
    see: Path | None = None
    word: str = ""
    known: tuple[str, ...] = ()
    what: str = ""


@dataclass(frozen=True, slots=True)
class Entry:
    """One table of the file: which model it is for, its number, its name, the part if readable.

    An electrode of which only the ends could be read has a `Stretch` for its part.
    `mentions` are the output names that it uses, each with the rest of its path; None when they
    could not be read.
    """

    model: type[Part]
    number: int
    name: str | None
    part: Part | None
    mentions: tuple[tuple[Path, str], ...] | None = ()

    @property
    def path(self) -> Path:
        """Where its table stands."""
        return (SECTIONS[self.model], self.number)

    @staticmethod
    def of(number: int, part: Electrode | Converter | Switch | Line | Trigger) -> Entry:
        """The entry of a part that has been read."""
        mentions: tuple[tuple[Path, str], ...] = ()
        if isinstance(part, Electrode):
            mentions = ((("output",), part.output),)
        elif isinstance(part, Switch):
            named = enumerate(part.levels)
            mentions = tuple((("levels", n), item) for n, item in named if isinstance(item, str))
        return Entry(type(part), number, part.name, part, mentions)


def meant_by(word: str, known: Sequence[str]) -> str | None:
    """The known name that a word was probably meant to be, if one is near."""
    hint = nearest(word, known)
    return next((name for name in known if hint == f"did you mean '{name}'?"), None)


Numbered = tuple[tuple[int, PairMargin], ...]


def faults_of(entries: Sequence[Entry], pairs: Numbered, rest: Sequence[Rest]) -> Iterator[Fault]:
    """Everything that is wrong with a trap as a whole, in no particular order."""
    stack = [entry for entry in entries if entry.model is Electrode]
    outputs = [entry for entry in entries if entry.model in (Converter, Switch)]
    yield from _reused(entries)
    yield from _stack(stack)
    if stack and outputs:
        yield from _mentions(entries, outputs)
    else:
        for missing in [
            what for what, has in (("electrode", stack), ("output", outputs)) if not has
        ]:
            yield Fault((missing,), "syntax", f"the trap has no {missing}", f"write [[{missing}]]")
    yield from _states(entries)
    yield from _pairs(stack, pairs)
    yield from _rests(stack, outputs, rest)


def _reused(entries: Sequence[Entry]) -> Iterator[Fault]:
    first: dict[str, Entry] = {}
    for entry in entries:
        if entry.name is None:
            continue
        other = first.setdefault(entry.name, entry)
        if other is not entry:
            message = f"the name {_said(entry.name)} is already taken by {_called(other)}"
            hint = "electrodes, outputs, lines and triggers share their names"
            yield Fault((*entry.path, "name"), "name-reused", message, hint, (*other.path, "name"))


def _called(entry: Entry) -> str:
    article = "an" if SECTIONS[entry.model][0] in "aeiou" else "a"
    return f"{article} {SECTIONS[entry.model]}"


def _stack(stack: Sequence[Entry]) -> Iterator[Fault]:
    """Lengths, order and gaps of the electrodes, as far as their ends could be read."""
    before: Entry | None = None
    radius_m = yield from _radii(stack)
    for entry in stack:
        if not isinstance(entry.part, Stretch):
            continue
        if entry.part.to_m <= entry.part.from_m:
            message = (
                f"electrode {_said(entry.name)} ends at {_mm(entry.part.to_m)}, not after it begins"
            )
            hint = f"'to' lies above {_mm(entry.part.from_m)}"
            yield Fault((*entry.path, "to"), "trap-not-sound", message, hint)
            continue
        if before is not None:
            yield from _neighbours(before, entry, radius_m)
        if before is None or entry.part.to_m > _ends(before)[1]:
            before = entry


def _radii(stack: Sequence[Entry]) -> Generator[Fault, None, float]:
    """Tells of the first electrode that differs; gives the first one's radius, infinite if none."""
    parts = [(entry, entry.part) for entry in stack if isinstance(entry.part, Electrode)]
    if not parts:
        return math.inf
    radius_m = parts[0][1].radius_m
    for entry, part in parts:
        if part.radius_m != radius_m:
            message = "a stepped bore is not understood yet: every electrode needs the same radius"
            first = quoted(parts[0][1].name)
            hint = f"{first} has {_mm(radius_m)}, {quoted(part.name)} {_mm(part.radius_m)}"
            yield Fault((*entry.path, "radius"), "trap-not-sound", message, hint)
            break
    return radius_m


def _ends(entry: Entry) -> tuple[float, float]:
    return (entry.part.from_m, entry.part.to_m) if isinstance(entry.part, Stretch) else (0.0, 0.0)


def _neighbours(left: Entry, right: Entry, radius_m: float) -> Iterator[Fault]:
    path = (*right.path, "from")
    (left_from_m, left_to_m), (right_from_m, right_to_m) = _ends(left), _ends(right)
    gap_m = right_from_m - left_to_m
    if right_to_m <= left_from_m:
        message = f"electrode {_said(right.name)} lies before {_said(left.name)}"
        yield Fault(path, "trap-not-sound", message, "list electrodes in order along the axis")
    elif gap_m < 0:
        message = (
            f"electrode {_said(right.name)} begins {_mm(-gap_m)} before {_said(left.name)} ends"
        )
        hint = f"{_said(left.name)} ends at {_mm(left_to_m)}; electrodes do not overlap"
        yield Fault(path, "trap-not-sound", message, hint)
    elif right.number == left.number + 1 and gap_m > GAP_RADII_MAX * radius_m * (1 + DUST):
        message = f"the gap between {_said(left.name)} and {_said(right.name)} is {_mm(gap_m)} wide"
        hint = f"at most two radii, {_mm(GAP_RADII_MAX * radius_m)}; is an electrode missing?"
        yield Fault(path, "trap-not-sound", message, hint)


def _said(name: str | None) -> str:
    return "without a name" if name is None else quoted(name)


def _mm(length_m: float) -> str:
    return f"{length_m * 1e3:.6g} mm"


def _mentions(entries: Sequence[Entry], outputs: Sequence[Entry]) -> Iterator[Fault]:
    """Mentions of outputs that do not exist, and outputs that nothing mentions."""
    names = {entry.name: entry for entry in outputs}
    used: set[str] = set()
    strays: list[str] = []
    for entry in entries:
        for tail, word in entry.mentions or ():
            used.add(word)
            found = names.get(word)
            # An output whose name could not be read may be the one that is meant.
            if found is None and None in names:
                continue
            if found is None or (entry.model is Switch and found.model is Switch):
                strays.append(word)
                yield _stray(entry, tail, word, found, outputs)
    if all(entry.mentions is not None for entry in entries):
        yield from _unused(outputs, used, strays)


def _stray(
    entry: Entry, tail: Path, word: str, found: Entry | None, outputs: Sequence[Entry]
) -> Fault:
    path = (*entry.path, *tail)
    if entry.model is Switch:
        known = _names(item for item in outputs if item.model is Converter)
        what = "converter outputs"
        message = f"{quoted(word)} is " + ("another switch" if found else "no converter output")
    else:
        known, what, message = _names(outputs), "outputs", f"there is no output {quoted(word)}"
    return Fault(path, "unknown-name", message, word=word, known=known, what=what)


def _names(entries: Iterable[Entry]) -> tuple[str, ...]:
    return tuple(entry.name for entry in entries if entry.name and is_name(entry.name))


def _unused(outputs: Sequence[Entry], used: set[str], strays: list[str]) -> Iterator[Fault]:
    idle = [entry for entry in outputs if entry.name is not None and entry.name not in used]
    known = _names(idle)
    # A misspelt mention is one fault, not also an output without a use.
    meant = {meant_by(word, known) for word in strays[:STRAYS_MAX]}
    for entry in idle:
        if entry.name not in meant:
            message = f"output {_said(entry.name)} drives no electrode and passes through no switch"
            hint = "name it as an electrode's output, or take it out"
            yield Fault((*entry.path, "name"), "name-unused", message, hint)


def _states(entries: Sequence[Entry]) -> Iterator[Fault]:
    """The states that lines begin in and are safe in; a role goes with a safe state."""
    for entry in entries:
        line = entry.part
        if not isinstance(line, Line):
            continue
        for key, state in (("initial", line.initial), ("safe", line.safe)):
            if state is not None and state not in line.states:
                message = f"line {quoted(line.name)} has no state {quoted(state)}"
                yield Fault(
                    (*entry.path, key),
                    "unknown-name",
                    message,
                    word=state,
                    known=line.states,
                    what="states",
                )
        if line.role is not None and line.safe is None:
            message = f"line {quoted(line.name)} has a role and does not say when it is safe"
            hint = f'write one of its states, as in safe = "{line.states[0]}"'
            yield Fault((*entry.path, "role"), "syntax", message, hint)


def _pairs(stack: Sequence[Entry], pairs: Numbered) -> Iterator[Fault]:
    numbers = {entry.name: entry.number for entry in reversed(stack)}
    seen: dict[frozenset[str], int] = {}
    for number, pair in pairs:
        path: Path = ("margins", "pair", number, "between")
        strays = [(n, word) for n, word in enumerate(pair.between) if word not in numbers]
        for n, word in strays:
            if None not in numbers:
                yield Fault(
                    (*path, n),
                    "unknown-name",
                    f"there is no electrode {quoted(word)}",
                    word=word,
                    known=_names(stack),
                    what="electrodes",
                )
        one, other = pair.between
        if not strays and abs(numbers[one] - numbers[other]) != 1:
            message = f"{quoted(one)} and {quoted(other)} are not next to each other"
            yield Fault(path, "trap-not-sound", message, "a pair is two neighbouring electrodes")
        first = seen.setdefault(frozenset(pair.between), number)
        if first != number:
            message = f"the pair of {quoted(one)} and {quoted(other)} is given twice"
            yield Fault(path, "name-reused", message, see=("margins", "pair", first))


def _rests(
    stack: Sequence[Entry], outputs: Sequence[Entry], rest: Sequence[Rest]
) -> Iterator[Fault]:
    """Whether every output can stand where it is said to, and is said to stand in one place."""
    by_name = {entry.name: entry for entry in outputs}
    drives = {
        item.part.name: by_name.get(item.part.output)
        for item in reversed(stack)
        if isinstance(item.part, Electrode)
    }
    known = (*_names(stack), *_names(outputs))
    given: dict[str, str] = {}
    for item in rest:
        path = ("rest", item.name)
        if item.name not in known:
            message = f"there is no electrode or output {quoted(item.name)}"
            yield Fault(path, "unknown-name", message, word=item.name, known=known, what="names")
            continue
        entry = drives.get(item.name) or by_name.get(item.name)
        if entry is None or not isinstance(entry.part, Converter | Switch):
            continue
        yield from _rest_level(path, item, entry.part)
        first = given.setdefault(entry.part.name, item.name)
        if first != item.name:
            message = (
                f"the rest of output {quoted(entry.part.name)} is given by {quoted(first)} already"
            )
            yield Fault(path, "name-reused", message, see=("rest", first))
    for entry in outputs:
        if isinstance(entry.part, Converter) and entry.part.name not in given:
            yield from _zero_rest(entry, entry.part)


def _rest_level(path: Path, item: Rest, output: Converter | Switch) -> Iterator[Fault]:
    if isinstance(output, Switch):
        if item.level not in output.levels:
            levels = " or ".join(_level(level) for level in output.levels)
            message = f"{_level(item.level)} is no level of switch {quoted(output.name)}"
            yield Fault(path, "trap-not-sound", message, f"its levels: {levels}")
    elif isinstance(item.level, str):
        message = f"output {quoted(output.name)} is a converter: its rest is in volts"
        yield Fault(path, "unit-mismatch", message, 'for example "0 V"')
    elif not _within_reach(item.level, output):
        low_V, high_V = output.reach_V
        message = f"output {quoted(output.name)} cannot stand at {item.level:g} V"
        yield Fault(path, "trap-not-sound", message, f"from {low_V:g} V to {high_V:g} V")


def _zero_rest(entry: Entry, output: Converter) -> Iterator[Fault]:
    if not _within_reach(0.0, output):
        low_V, high_V = output.reach_V
        reach = f"it reaches {low_V:g} V to {high_V:g} V"
        message = f"output {quoted(output.name)} cannot rest at 0 V: {reach}"
        hint = f'say where it rests: [rest] {output.name} = "{low_V:g} V"'
        yield Fault((*entry.path, "range"), "trap-not-sound", message, hint)


def _within_reach(volts: float, output: Converter) -> bool:
    """Whether a voltage at the electrode can be had to half a code."""
    low_V, high_V = output.reach_V
    half_V = output.gain * output.code_V / 2
    return low_V - half_V <= volts <= high_V + half_V


def _level(level: float | str) -> str:
    return quoted(level) if isinstance(level, str) else f"{level:g} V"
