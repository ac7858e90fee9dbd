"""The contents page: every stage from a text to a published folder, in order.

    text → Tree → Sequence → Timeline → Shipped → Wells → Rulings → Findings → Cleared → folder

Nothing is decided here but how far a file gets: a text with mistakes is not drawn, a drawing with
mistakes is not searched for wells, since what follows from a mistake is no news.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import replace
from fractions import Fraction
from os import PathLike
from pathlib import Path

from wellseq.base.finding import Finding, Mistake
from wellseq.checks.case import Case
from wellseq.checks.judging import check_names, clear, judge
from wellseq.emit.columns import Column, Kind, rows_as_read
from wellseq.emit.content import content_id
from wellseq.emit.expand import Poured, ticks_between
from wellseq.emit.keys import Draft, drawn
from wellseq.emit.publish import DRAFT_ENDING, write_folder
from wellseq.fields.field import Field
from wellseq.model import build as model
from wellseq.model.sequence import Sequence, SourceFile
from wellseq.model.trap import Trap
from wellseq.model.trap_file import read_trap
from wellseq.reread import folder as second_reader
from wellseq.rules import examine as interlocks
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


def compile_file(
    path: Name,
    *,
    lets: Mapping[str, str] | None = None,
    each: Each = None,
    shown: str | None = None,
) -> Case:
    """Everything known about one sequence file, with its findings.

    `lets` replace values of the file, as written on a command line; `each` plays one value (from 1)
    of an `each` only; `shown` is the name that findings give the file, its path unless given.
    Never raises for what is in the file: `findings` has it.
    """
    return judge(_stages(Path(path), shown or Path(path).as_posix(), lets or {}, each))


def table_hash(path: Name, *, lets: Mapping[str, str] | None = None) -> str | None:
    """The content id of a file's tables (SHA-256), None for a file that comes to none.

    Wells are not followed and nothing is judged: this tells tables apart, it clears none.
    """
    here = Path(path)
    content = read_bytes(here, here.as_posix())
    text = decode(content, here.as_posix()) if isinstance(content, bytes) else content
    if isinstance(text, Mistake):
        return None
    tree = parse(text, here.as_posix())
    built = model.build(tree, here, known_findings=check_names(), lets=lets)
    if built.sequence is None or built.mistakes:
        return None
    trap = built.sequence.trap
    timeline = draw(built.sequence, lambda: _field(trap))
    return None if timeline.mistakes else content_id(ship(timeline))


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
    case = Case(
        path,
        shown,
        built.mistakes,
        built.trap,
        built.sequence,
        rules=built.rules,
        sources=built.sources,
    )
    if built.sequence is None or built.mistakes:
        return case
    return _played(replace(case, each=_value_of(built.sequence, each)), built.sequence)


def _played(case: Case, sequence: Sequence) -> Case:
    """The stages of a sound sequence: drawn, shipped, its clouds' wells followed, rules judged."""
    timeline = draw(sequence, lambda: _field(sequence.trap))
    shipped = ship(timeline)
    wells = trace(timeline, shipped, _field(sequence.trap)) if not timeline.mistakes else None
    drawn = replace(case, mistakes=timeline.mistakes, timeline=timeline)
    if wells is None or case.rules is None:
        return replace(drawn, shipped=shipped)
    rulings = interlocks.examine(case.rules, timeline, shipped, wells)
    return replace(drawn, shipped=shipped, wells=wells, rulings=rulings)


_FIELDS: dict[str, Field] = {}
FIELDS_KEPT = 2
MEMORIES_MAX = 20_000


def _field(trap: Trap) -> Field:
    """The field of a trap; those of the last trap files are kept, with what was proved in them.

    Proofs are remembered by everything that they depend on, so keeping them changes no figure.
    """
    kept = _FIELDS.pop(trap.source, None)
    if kept is None or sum(map(len, kept.memory.values())) > MEMORIES_MAX:
        kept = Field(trap)
    _FIELDS[trap.source] = kept
    while len(_FIELDS) > FIELDS_KEPT:
        del _FIELDS[next(iter(_FIELDS))]
    return kept


def _value_of(sequence: Sequence, each: Each) -> str:
    """The value of the `each` that is played alone, in base units; empty when all are."""
    number = each[1] if isinstance(each, tuple) else each
    values = sequence.each_values
    return str(values[number - 1]) if number and number <= len(values) else ""


def build(
    path: Name,
    folder: Name,
    *,
    lets: Mapping[str, str] | None = None,
    each: Each = None,
    also: Iterable[str] = (),
) -> Case:
    """Compile a file and, if nothing stands in the way, publish its tables as `folder`.

    `also` names further forms of every table, "npz" or "hdf5".  Raises CannotPublish when the
    folder cannot be written, Miswritten when it does not read back; in both cases nothing was
    changed.
    """
    case = compile_file(path, lets=lets, each=each)
    publish(case, folder, also)
    return case


def publish(case: Case, folder: Name, also: Iterable[str] = ()) -> bool:
    """Publish a case if it is clear; False, and nothing written, when it is not."""
    cleared = clear(case)
    if cleared is None:
        return False
    write_folder(cleared, Path(folder), second_reader.verify, tuple(also))
    return True


def publish_draft(case: Case, folder: Name, also: Iterable[str] = ()) -> Path | None:
    """Write what a case has of tables to a folder that says it is a draft, and return its name.

    None, and nothing written, when it did not get as far as tables.
    """
    if not drawn(case):
        return None
    named = Path(folder)
    if not named.name.endswith(DRAFT_ENDING):
        named = named.with_name(named.name + DRAFT_ENDING)
    write_folder(Draft(case), named, second_reader.verify_draft, tuple(also))
    return named


def verify(folder: Name) -> tuple[Finding, ...]:
    """Everything wrong with a published folder, from its bytes alone; empty when it is sound."""
    return second_reader.verify(Path(folder), Path(folder).as_posix())


def examine(folder: Name) -> second_reader.Reading:
    """`verify` with what was examined in words, and what a sound folder says."""
    return second_reader.read_folder(Path(folder), Path(folder).as_posix())


def poured(reading: second_reader.Reading, block: int, every_s: Fraction) -> Poured:
    """A block (from 1) of a sound folder, sampled every so many seconds (exact s).

    Raises ValueError for a folder with findings and for a number that is no block's, NoSuchRate
    when the block's clock does not divide the rate.
    """
    meaning = reading.meaning
    if meaning is None or reading.findings:
        raise ValueError("only a folder that verifies is poured")
    plan = meaning.plan
    if not 1 <= block <= len(plan.blocks):
        raise ValueError(f"there is no block {block}: this folder has 1 to {len(plan.blocks)}")
    table, about = meaning.tables[block - 1], plan.blocks[block - 1]
    columns = [
        Column(one.name, Kind.CODE, one.code_max, one.whole, draws=not one.holds)
        for one in plan.converters
    ]
    columns += [_worded(one.name, Kind.LEVEL, one.levels) for one in plan.switches]
    columns += [_worded(one.name, Kind.STATE, one.states) for one in plan.lines]
    numbers = [table.columns[one.name] for one in columns]
    rows = rows_as_read(columns, table.ticks, numbers, about.tick_s)
    every = ticks_between(about.tick_s, every_s)
    return Poured(rows, every, about.name, about.trigger, plan.content_id)


def _worded(name: str, kind: Kind, words: Iterable[Fraction | str]) -> Column:
    said = tuple(one if isinstance(one, str) else f"{float(one)!r}_V" for one in words)
    return Column(name, kind, len(said) - 1, words=said)
