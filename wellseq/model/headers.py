"""A tree → what its file consists of: version, trap, used files, definitions, the sequence."""

from __future__ import annotations

from dataclasses import dataclass, field
from fractions import Fraction

from wellseq.base.finding import Mistake
from wellseq.base.names import printable
from wellseq.base.place import Place
from wellseq.model.reporter import Reporter
from wellseq.model.steps import verbs
from wellseq.text.tree import (
    Assignment,
    Block,
    Call,
    Name,
    Number,
    Statement,
    String,
    Tree,
)

VERSION = 1
EXAMPLES = {
    "wellseq": "wellseq 1",
    "trap": 'trap "saltmarsh.trap.toml"',
    "use": 'use "common/gates.well"',
    "let": "let wall = 90 V",
    "cloud": "cloud coolant is electron { number 6e7 ± 10 % }",
    "pattern": "pattern cradle { C3, C9 = -90 V; others = 0 V }",
    "procedure": "procedure lift(height) { … }",
    "sequence": "sequence evening { … }",
    "repeat": "repeat 4 { … }",
    "each": "each height of 40 V, 60 V { … }",
    "do": "do lift(60 V)",
    "alongside": "alongside { lane { … } lane { … } }",
    "lane": "lane { … }",
}
"""How every statement that is no step is written."""
DEFINITIONS = ("let", "cloud", "pattern", "procedure")
OUTSIDE = ("wellseq", "trap", "use", *DEFINITIONS, "sequence")
"""Statements that stand outside a sequence."""
INSIDE = ("repeat", "each", "do", "alongside")
"""Statements that stand in a sequence and are no steps."""


@dataclass(slots=True)
class Header:
    """The statements of one file by what they are; each fits its example."""

    tree: Tree
    trap: String | None = None
    uses: list[String] = field(default_factory=list)
    definitions: list[Statement] = field(default_factory=list)
    sequence: Statement | None = None


def fits(
    statement: Statement,
    reporter: Reporter,
    *shape: type | tuple[type, ...],
    value: bool = False,
    clauses: bool = False,
    label: bool = False,
) -> bool:
    """Whether a statement has operands of this shape and nothing else; reports it when not.

    With `value` and `clauses` it must have these, with `label` it may have one.
    """
    verb = statement.verb.text if statement.verb is not None else ""
    for allowance in statement.allowances:
        message = f"`allow` stands after one step, not after `{verb}`"
        reporter.add(Mistake("syntax", allowance.place, message))
    if statement.label is not None and not label:
        message = f"`{verb}` takes no label"
        reporter.add(Mistake("syntax", statement.label.place, message, "a label names a step"))
    given = statement.operands
    right = (
        len(given) == len(shape)
        and all(isinstance(item, kind) for item, kind in zip(given, shape, strict=True))
        and (statement.value is not None) == value
        and bool(statement.clauses) == clauses
        and not statement.words
    )
    if not right:
        place = statement.verb.place if statement.verb is not None else statement.place
        reporter.add(Mistake("syntax", place, _written(verb, statement, bool(clauses))))
    return right


def _written(verb: str, statement: Statement, clauses: bool) -> str:
    how = f"`{verb}` is written: {EXAMPLES[verb]}"
    if statement.clauses and not clauses:
        word = statement.clauses[0].word.text
        return f"'{word}' is a word of the language and is no part of this; {how}"
    return how


def read_header(tree: Tree, reporter: Reporter) -> Header:
    """Sort the statements of a file; whatever cannot stand there is reported."""
    header = Header(tree)
    for number, item in enumerate(tree.statements):
        verb = item.verb.text if isinstance(item, Statement) and item.verb is not None else ""
        if number == 0 and verb != "wellseq" and not tree.mistakes:
            message = "a file begins with its language version"
            reporter.add(Mistake("syntax", item.place, message, EXAMPLES["wellseq"]))
        if isinstance(item, Assignment) or verb not in OUTSIDE:
            _misplaced(item, verb, reporter)
        elif verb == "wellseq":
            _version(item, number, reporter)
        else:
            _sort(item, verb, header, reporter)
    if not tree.statements and not tree.mistakes:
        message = "this file says nothing"
        reporter.add(Mistake("syntax", Place(tree.file), message, EXAMPLES["wellseq"]))
    return header


def _misplaced(item: Statement | Assignment, verb: str, reporter: Reporter) -> None:
    if verb in verbs() or verb in INSIDE:
        message = f"`{verb}` stands inside a sequence or a procedure"
        reporter.add(Mistake("syntax", item.place, message, EXAMPLES["sequence"]))
        return
    said = f"`{printable(verb)}`" if verb else "this"
    message = f"{said} is nothing that a file can hold here"
    near = reporter.near(verb, OUTSIDE, "it holds")
    reporter.add(Mistake("syntax", item.place, message, near))


def _version(item: Statement, number: int, reporter: Reporter) -> None:
    if number:
        message = "the language version stands once, before everything else"
        reporter.add(Mistake("syntax", item.place, message))
        return
    if not fits(item, reporter, Number):
        return
    version = item.operands[0]
    if isinstance(version, Number) and (version.value != Fraction(VERSION) or version.unit):
        message = f"this version of the language is not known here; version {VERSION} is"
        reporter.add(Mistake("syntax", version.place, message, EXAMPLES["wellseq"]))


def _sort(item: Statement, verb: str, header: Header, reporter: Reporter) -> None:
    if verb in ("trap", "use"):
        if not fits(item, reporter, String):
            return
        (path,) = item.operands
        if verb == "use" and isinstance(path, String):
            header.uses.append(path)
        elif header.trap is not None:
            message = f"this file names its trap already (line {header.trap.place.line})"
            reporter.add(Mistake("syntax", item.place, message, "a file is for one trap"))
        elif isinstance(path, String):
            header.trap = path
    elif verb == "sequence":
        if not fits(item, reporter, Name, Block):
            return
        if header.sequence is not None:
            message = f"this file has a sequence already (line {header.sequence.place.line})"
            hint = "a file holds one sequence; several belong into several files"
            reporter.add(Mistake("syntax", item.place, message, hint))
            return
        header.sequence = item
    elif _defines(item, verb, reporter):
        header.definitions.append(item)


def _defines(item: Statement, verb: str, reporter: Reporter) -> bool:
    if verb == "let":
        return fits(item, reporter, Name, value=True)
    if verb == "pattern":
        return fits(item, reporter, Name, Block)
    if verb == "procedure":
        return fits(item, reporter, (Call, Name), Block)
    shape = (Name, Block) if len(item.operands) > 1 else (Name,)
    return fits(item, reporter, *shape, clauses=True)
