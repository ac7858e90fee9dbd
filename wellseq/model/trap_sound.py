"""What makes a trap sound beyond its single values: unique names, the stack, mentions, rest.

Works on what could be read, so that one bad value does not hide the faults of all the others: a
piece that could not be read has no part, and whatever would need it is not judged.  Lengths in m.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence

from wellseq.base.names import nearest
from wellseq.model.hardware import Converter, Electrode, Line, Rest, Switch
from wellseq.model.margins import PairMargin
from wellseq.model.surroundings import Bore, MagneticField
from wellseq.model.toml_places import Path
from wellseq.model.trap_faults import SECTIONS, Entry, Fault, said
from wellseq.model.trap_stack import stack_faults
from wellseq.model.written import is_name
from wellseq.text.mistakes import quoted

STRAYS_MAX = 20
"""Words that name nothing for which a meaning is looked for before other faults are held back."""


def meant_by(word: str, known: Sequence[str]) -> str | None:
    """The known name that a word was probably meant to be, if one is near."""
    hint = nearest(word, known)
    return next((name for name in known if hint == f"did you mean '{name}'?"), None)


Numbered = tuple[tuple[int, PairMargin], ...]


def faults_of(
    entries: Sequence[Entry],
    pairs: Numbered,
    rest: Sequence[Rest],
    bore: Bore | None,
    field: MagneticField | None,
) -> Iterator[Fault]:
    """Everything that is wrong with a trap as a whole, in no particular order.

    `bore` and `field` are None where they could not be read.
    """
    stack = [entry for entry in entries if entry.model is Electrode]
    outputs = [entry for entry in entries if entry.model in (Converter, Switch)]
    yield from _reused(entries)
    yield from stack_faults(stack, bore, field)
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
            message = f"the name {said(entry.name)} is already taken by {_called(other)}"
            hint = "electrodes, outputs, lines and triggers share their names"
            yield Fault((*entry.path, "name"), "name-reused", message, hint, (*other.path, "name"))


def _called(entry: Entry) -> str:
    article = "an" if SECTIONS[entry.model][0] in "aeiou" else "a"
    return f"{article} {SECTIONS[entry.model]}"


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
            message = f"output {said(entry.name)} drives no electrode and passes through no switch"
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
