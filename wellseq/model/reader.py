"""A statement and its step kind → one `Step`, or every mistake that the statement holds.

What a step takes is read off the annotations of its fields, once per kind.
"""

from __future__ import annotations

import types
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from functools import cache
from typing import Annotated, Any, Literal, Union, get_args, get_origin

from pydantic import ValidationError

from wellseq.base.names import nearest, printable
from wellseq.base.place import Place
from wellseq.model.operands import Slot, place_of, settle
from wellseq.model.scope import Names
from wellseq.model.step import Step, Subject, Takes
from wellseq.model.values import UNKNOWN
from wellseq.text.tree import Block, Clause, Name, Operand, Statement


@dataclass(frozen=True, slots=True)
class Signature:
    """What a step kind takes: subjects in order, clauses by word, bare words."""

    verb: str
    subjects: tuple[Slot, ...]
    clauses: dict[str, Slot]
    words: dict[str, Slot]
    labels: tuple[str, ...]

    @property
    def listed(self) -> str:
        """Clauses and words, for a message."""
        return ", ".join([*self.clauses, *self.words]) or "nothing after its subject"


@cache
def signature(kind: type[Step]) -> Signature:
    """The signature of a step kind, from its fields."""
    slots = [_slot(name, kind) for name in kind.model_fields]
    return Signature(
        kind.__name__.lower(),
        tuple(slot for slot in slots if slot.subject),
        {s.word: s for s in slots if not s.subject and s.takes.what != "word"},
        {s.word: s for s in slots if s.takes.what == "word"},
        tuple(slot.field for slot in slots if slot.takes.what == "label"),
    )


def _slot(name: str, kind: type[Step]) -> Slot:
    info = kind.model_fields[name]
    marks = [*info.metadata, *_inner_marks(info.annotation)]
    types_ = list(_plain_types(info.annotation))
    return Slot(
        field=name,
        word=name.removesuffix("_"),
        takes=next(mark for mark in marks if isinstance(mark, Takes)),
        required=info.is_required(),
        subject=any(isinstance(mark, Subject) for mark in marks),
        exact=Fraction in types_,
        choices=tuple(
            word for item in types_ if get_origin(item) is Literal for word in get_args(item)
        ),
    )


def _inner_marks(annotation: Any) -> Iterator[object]:
    """The marks of `X | None`, where X itself is annotated."""
    for item in get_args(annotation):
        if get_origin(item) is Annotated:
            yield from get_args(item)[1:]


def _plain_types(annotation: Any) -> Iterator[Any]:
    origin = get_origin(annotation)
    if origin is Annotated or origin in (Union, types.UnionType):
        for item in get_args(annotation):
            yield from _plain_types(item)
    else:
        yield annotation


def read_step(statement: Statement, kind: type[Step], names: Names) -> Step | None:
    """The step that a statement says, None when a mistake was reported."""
    return _Reading(statement, kind, names).step()


class _Reading:
    """One statement on its way to a step: what was given for each field, and where."""

    def __init__(self, statement: Statement, kind: type[Step], names: Names) -> None:
        self.statement = statement
        self.kind = kind
        self.names = names
        self.signature = signature(kind)
        self.verb = statement.verb
        self.sound = True
        self.given: dict[str, tuple[Operand, ...]] = {}
        self.places: dict[str, Place] = {}
        self.words: dict[str, bool] = {}

    @property
    def place(self) -> Place:
        """Where the verb stands, for what concerns the whole statement."""
        return self.verb.place if self.verb is not None else self.statement.place

    def wrong(self, name: str, place: Place, message: str, hint: str = "") -> None:
        """Report a mistake; no step comes of this statement."""
        self.names.report(name, place, message, hint)
        self.sound = False

    def step(self) -> Step | None:
        """Sort what was written into fields, settle each, and make the step."""
        clauses, operands = self._unfold()
        self._take_clauses(clauses)
        operands = self._take_words(operands)
        self._take_subjects(operands)
        if self.statement.value is not None:
            self.wrong("syntax", self.statement.value.place, f"`{self._said}` takes no `=`")
        values = self._settle()
        self._ask_for_missing()
        return self._made(values) if self._complete(values) else None

    @property
    def _said(self) -> str:
        return self.signature.verb

    def _unfold(self) -> tuple[list[Clause], list[Operand]]:
        """Clauses, with those between braces among them, and the other operands."""
        clauses = list(self.statement.clauses)
        operands: list[Operand] = []
        for operand in self.statement.operands:
            if not (self.kind.BRACED and isinstance(operand, Block)):
                operands.append(operand)
                continue
            for item in operand.items:
                if not isinstance(item, Statement) or item.verb is not None:
                    self._not_a_clause(item.place)
                    continue
                clauses += item.clauses
                for stray in (*item.operands, *item.words, *item.allowances):
                    self._not_a_clause(stray.place)
        return clauses, operands

    def _not_a_clause(self, place: Place) -> None:
        taken = self.signature.listed
        self.wrong("syntax", place, f"between these braces `{self._said}` takes: {taken}")

    def _take_clauses(self, clauses: list[Clause]) -> None:
        for clause in clauses:
            word = clause.word.text
            slot = self.signature.clauses.get(word)
            if word in self.kind.REFUSED:
                self.wrong("unknown-name", clause.word.place, self.kind.REFUSED[word])
            elif slot is None:
                self.wrong(
                    "syntax",
                    clause.word.place,
                    f"`{self._said}` does not take `{word}`; it takes: {self.signature.listed}",
                )
            elif slot.field in self.places:
                self.wrong("syntax", clause.word.place, f"`{word}` is said twice")
            else:
                self.places[slot.field] = clause.word.place
                self._give(slot, clause)

    def _give(self, slot: Slot, clause: Clause) -> None:
        operands = clause.operands
        if len(operands) > 1 and slot.takes.what != "electrodes":
            self.wrong(
                "syntax",
                place_of(operands[1:]),
                f"`{slot.word}` takes one value or name, {len(operands)} are given",
            )
        else:
            self.given[slot.field] = operands
            self.places[slot.field] = place_of(operands)

    def _take_words(self, operands: list[Operand]) -> list[Operand]:
        """Bare words out of everything that is a name; what is left are subjects."""
        left: list[Operand] = []
        for item in (*operands, *self.statement.words):
            slot = self.signature.words.get(item.text) if isinstance(item, Name) else None
            if slot is None:
                left.append(item)
            elif slot.field in self.words:
                self.wrong("syntax", item.place, f"`{slot.word}` is said twice")
            else:
                self.words[slot.field] = True
                self.places[slot.field] = item.place
        return left

    def _take_subjects(self, operands: list[Operand]) -> None:
        subjects = self.signature.subjects
        for number, slot in enumerate(subjects):
            if not operands:
                break
            last = number == len(subjects) - 1
            count = len(operands) if last and slot.takes.what == "electrodes" else 1
            taken, operands = tuple(operands[:count]), operands[count:]
            self.given[slot.field] = taken
            self.places[slot.field] = place_of(taken)
        for stray in operands:
            self._stray(stray)

    def _stray(self, item: Operand) -> None:
        if isinstance(item, Name):
            known = [*self.signature.clauses, *self.signature.words]
            self.wrong(
                "syntax",
                item.place,
                f"`{self._said}` does not take '{printable(item.text)}'",
                nearest(item.text, known, "it takes") if known else "",
            )
        else:
            taken = self.signature.listed
            self.wrong(
                "syntax", item.place, f"`{self._said}` does not take this; it takes: {taken}"
            )

    def _settle(self) -> dict[str, object]:
        """Every field that was given and is sound, in the order of the fields."""
        values: dict[str, object] = dict(self.words)
        for slot in (*self.signature.subjects, *self.signature.clauses.values()):
            if slot.field not in self.given:
                continue
            operands = self.given[slot.field]
            if slot.takes.what == "choice" and self._refused(operands[0]):
                continue
            value = settle(slot, operands, self.names, values)
            if value is UNKNOWN:
                self.sound = False
            else:
                values[slot.field] = value
        return values

    def _refused(self, operand: Operand) -> bool:
        word = operand.text if isinstance(operand, Name) else ""
        if word in self.kind.REFUSED:
            self.wrong("unknown-name", operand.place, self.kind.REFUSED[word])
        return word in self.kind.REFUSED

    def _complete(self, values: dict[str, object]) -> bool:
        """Whether a step can be made, if only to see what else is wrong with it."""
        slots = (*self.signature.subjects, *self.signature.clauses.values())
        return all(slot.field in values for slot in slots if slot.required) and all(
            field in values for field in self.given
        )

    def _ask_for_missing(self) -> None:
        for slot in self.signature.subjects:
            if slot.required and slot.field not in self.places:
                self.wrong("syntax", self.place, f"`{self._said}` needs {slot.spoken}")
        for slot in self.signature.clauses.values():
            if slot.required and slot.field not in self.places:
                self.wrong(
                    "syntax", self.place, f"`{self._said}` needs `{slot.word}` and {slot.spoken}"
                )

    def _made(self, values: dict[str, object]) -> Step | None:
        try:
            step = self.kind.model_validate(values)
        except ValidationError as error:
            for fault in error.errors(include_url=False, include_input=False):
                field = str(fault["loc"][0]) if fault["loc"] else ""
                message = fault["msg"].removeprefix("Value error, ")
                self.wrong("syntax", self.places.get(field, self.place), message)
            return None
        trap = self.names.trap
        for objection in step.objections(trap) if trap is not None else ():
            self.wrong(
                objection.name,
                self.places.get(objection.field, self.place),
                objection.message,
                objection.hint,
            )
        return step if self.sound else None
