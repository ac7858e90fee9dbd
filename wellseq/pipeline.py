"""The contents page: every stage from a text to a published folder, in order.

    text → Tree → Sequence → Timeline → Shipped → Wells → Findings → Cleared → folder

Nothing is decided here but how far a file gets: a text with mistakes is not drawn, a drawing with
mistakes is not searched for wells, since what follows from a mistake is no news.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from functools import cache
from os import PathLike
from pathlib import Path

from wellseq.base.finding import Finding, Mistake
from wellseq.checks.case import Case
from wellseq.checks.judging import check_names, clear, judge
from wellseq.emit.publish import write_folder
from wellseq.fields.field import Field
from wellseq.model import build as model
from wellseq.model.sequence import Sequence, SourceFile
from wellseq.model.trap import Trap
from wellseq.model.trap_file import read_trap
from wellseq.reread import folder as second_reader
from wellseq.text.parse import parse
from wellseq.text.read import decode, read_bytes
from wellseq.timeline.draw import draw
from wellseq.timeline.ship import ship
from wellseq.wells.trace import trace

Name = str | PathLike[str]
Each = tuple[str, int] | int | None


class TrapMistakes(ValueError):
    """A trap file is wrong; `mistakes` says where and how."""

    def __init__(self, mistakes: tuple[Mistake, ...]) -> None:
        super().__init__("\n".join(f"{one.place}: {one.message} [{one.name}]" for one in mistakes))
        self.mistakes = mistakes


def load_trap(path: Name) -> Trap:
    """The trap that a file describes.  Raises TrapMistakes with everything wrong in it."""
    trap, mistakes = read_trap(Path(path), Path(path).as_posix())
    if trap is None:
        raise TrapMistakes(mistakes)
    return trap


def compile_file(path: Name, *, lets: Mapping[str, str] | None = None, each: Each = None) -> Case:
    """Everything known about one sequence file, with its findings.

    `lets` replace values of the file, as written on a command line; `each` plays one value (from 1)
    of an `each` only.  Never raises for what is in the file: `findings` has it.
    """
    return judge(_stages(Path(path), Path(path).as_posix(), lets or {}, each))


def _stages(path: Path, shown: str, lets: Mapping[str, str], each: Each) -> Case:
    content = read_bytes(path, shown)
    if isinstance(content, Mistake):
        return Case(path, shown, mistakes=(content,))
    text = decode(content, shown)
    if isinstance(text, Mistake):
        return Case(path, shown, mistakes=(text,), sources=(SourceFile(shown, content),))
    tree = parse(text, shown)
    known = check_names()
    built = model.build(tree, path, known_findings=known, lets=lets, each=each, content=content)
    case = Case(path, shown, built.mistakes, built.trap, built.sequence, sources=built.sources)
    if built.sequence is None or built.mistakes:
        return case
    return _played(replace(case, each=_value_of(built.sequence, each)), built.sequence)


def _played(case: Case, sequence: Sequence) -> Case:
    """The stages of a sound sequence: drawn, shipped, and its clouds' wells followed."""
    field_of = cache(lambda: Field(sequence.trap))
    timeline = draw(sequence, field_of)
    shipped = ship(timeline)
    wells = trace(timeline, shipped, field_of()) if not timeline.mistakes else None
    drawn = replace(case, mistakes=timeline.mistakes, timeline=timeline)
    return replace(drawn, shipped=shipped, wells=wells)


def _value_of(sequence: Sequence, each: Each) -> str:
    """The value of the `each` that is played alone, in base units; empty when all are."""
    number = each[1] if isinstance(each, tuple) else each
    values = sequence.each_values
    return str(values[number - 1]) if number and number <= len(values) else ""


def build(
    path: Name, folder: Name, *, lets: Mapping[str, str] | None = None, each: Each = None
) -> Case:
    """Compile a file and, if nothing stands in the way, publish its tables as `folder`.

    Raises CannotPublish when the folder cannot be written, Miswritten when it does not read back;
    in both cases nothing was changed.
    """
    case = compile_file(path, lets=lets, each=each)
    publish(case, folder)
    return case


def publish(case: Case, folder: Name) -> bool:
    """Publish a case if it is clear; False, and nothing written, when it is not."""
    cleared = clear(case)
    if cleared is None:
        return False
    write_folder(cleared, Path(folder), second_reader.verify)
    return True


def verify(folder: Name) -> tuple[Finding, ...]:
    """Everything wrong with a published folder, from its bytes alone; empty when it is sound."""
    return second_reader.verify(Path(folder), Path(folder).as_posix())
