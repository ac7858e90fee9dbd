"""A finding → the places that lead to it, from the outside in: use, calls, passes of repeats."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Finding
from wellseq.base.place import Place
from wellseq.emit.examined import Examined
from wellseq.emit.outline import outline


def trail(thing: Examined, finding: Finding) -> list[tuple[Place, str]]:
    """(place, what happens there), outermost first; empty for a finding written in plain sight."""
    found = list(_uses(thing, finding))
    passes = list(finding.passes)
    for place in finding.chain:
        found += _repeats(thing, place, passes)
        found.append((place, "called here"))
    found += _repeats(thing, finding.place, passes)
    return found


def _uses(thing: Examined, finding: Finding) -> Iterator[tuple[Place, str]]:
    """The `use` that brings the file which the finding points into."""
    if finding.place.file == thing.shown or thing.shown not in thing.sources:
        return
    uses = outline(thing.sources[thing.shown], thing.shown).uses
    if finding.place.file in uses:
        yield uses[finding.place.file], "brought by this `use`"


def _repeats(thing: Examined, place: Place, passes: list[int]) -> Iterator[tuple[Place, str]]:
    """The repeats around a place that have not been told yet; takes their passes off the list."""
    source = thing.sources.get(place.file)
    if source is None or place.file.endswith(".toml") or not passes:
        return
    written = outline(source, place.file).at(place)
    for around in written.around if written is not None else ():
        if passes:
            head = Place(around.file, around.line, around.column, around.line, around.column + 1)
            yield head, f"in pass {passes.pop(0)} of this repeat"
