"""A tree → where its names are defined and mentioned.

Names of a file count in the whole file, arguments in their procedure, and what an `each` goes
through in its braces.  Bare words, states and choices (`smoothly`, `open`, `depth of`) are none.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from wellseq.base.place import Place
from wellseq.model.headers import DEFINITIONS
from wellseq.model.reader import signature
from wellseq.model.steps import step_class
from wellseq.text.tree import (
    Assignment,
    Binary,
    Block,
    Call,
    Clause,
    Name,
    Negative,
    Operand,
    Span,
    Spreading,
    Statement,
    String,
    Tree,
)

Item = Statement | Assignment


@dataclass(frozen=True, slots=True)
class Symbol:
    """A name with a meaning: its sort, where it is given, the statement that gives it.

    `within` is the statement inside which the name counts, None for the whole file.
    """

    name: str
    sort: str
    place: Place
    statement: Place
    within: Place | None = None


@dataclass(frozen=True, slots=True)
class Mention:
    """A name as it stands somewhere, with the statements around it, the innermost last."""

    name: str
    place: Place
    around: tuple[Place, ...]


class Index:
    """The names of one file."""

    def __init__(self, tree: Tree) -> None:
        self.tree = tree
        self.symbols: list[Symbol] = []
        self.mentions: list[Mention] = []
        self.labels: dict[str, Place] = {}
        self.label_mentions: list[tuple[str, Place]] = []
        self.statements: list[Item] = []
        self.uses: list[str] = []
        self.trap = ""
        waiting: list[tuple[Item, tuple[Place, ...]]] = [(item, ()) for item in tree.statements]
        while waiting:
            item, around = waiting.pop()
            self.statements.append(item)
            waiting += self._take(item, around)
        self.statements.sort(key=lambda item: item.place)
        self.mentions.sort(key=lambda mention: mention.place)
        self.symbols.sort(key=lambda symbol: symbol.place)
        self._begins = {(one.place.line, one.place.column): one for one in self.mentions}

    def mention_from(self, line: int, column: int) -> Mention | None:
        """The name that begins at a spot."""
        return self._begins.get((line, column))

    def mention_at(self, line: int, column: int) -> Mention | None:
        """The name that stands at a spot, or ends there."""
        for mention in self.mentions:
            place = mention.place
            if place.line == line and place.column <= column <= place.end_column:
                return mention
        return None

    def statement_at(self, line: int, column: int) -> Item | None:
        """The innermost statement around a spot."""
        found: Item | None = None
        for item in self.statements:
            place = item.place
            if (place.line, place.column) <= (line, column) <= (place.end_line, place.end_column):
                found = item
        return found

    def own(self, name: str, around: tuple[Place, ...] = ()) -> Symbol | None:
        """What a name means in this file, for a mention with these statements around it."""
        for symbol in self.symbols:
            if symbol.name == name and (symbol.within is None or symbol.within in around):
                return symbol
        return None

    def mentions_of(self, symbol: Symbol) -> list[Place]:
        """Every place of this file where a symbol stands, its definition among them."""
        return [
            mention.place
            for mention in self.mentions
            if mention.name == symbol.name and self.own(mention.name, mention.around) == symbol
        ]

    def _take(self, item: Item, around: tuple[Place, ...]) -> list[tuple[Item, tuple[Place, ...]]]:
        """Note the names of one statement; returns the statements inside it."""
        inner: list[tuple[Item, tuple[Place, ...]]] = []
        here = (*around, item.place)
        for operand in self._operands(item):
            waiting: list[Operand] = [operand]
            while waiting:
                part = waiting.pop()
                if isinstance(part, Block):
                    inner += [(one, here) for one in part.items]
                elif isinstance(part, Name):
                    self.mentions.append(Mention(part.text, part.place, here))
                else:
                    waiting += _parts(part)
        if isinstance(item, Statement):
            self._define(item)
            self._note_texts(item)
        return inner

    def _operands(self, item: Item) -> Iterator[Operand]:
        if isinstance(item, Assignment):
            yield from item.targets
        else:
            kind = step_class(item.verb.text) if item.verb is not None else None
            slots = signature(kind).subjects if kind is not None else ()
            for number, operand in enumerate(item.operands):
                slot = slots[number] if number < len(slots) else None
                if slot is None or slot.takes.what not in ("choice", "state"):
                    yield operand
            for clause in item.clauses:
                if clause.word.text != "is":
                    yield from clause.operands
        if item.value is not None:
            yield item.value

    def _define(self, item: Statement) -> None:
        verb = item.verb.text if item.verb is not None else ""
        first = item.operands[0] if item.operands else None
        if verb in (*DEFINITIONS, "sequence"):
            name = first.name if isinstance(first, Call) else first
            if isinstance(name, Name):
                self.symbols.append(Symbol(name.text, verb, name.place, item.place))
            for argument in first.arguments if isinstance(first, Call) else ():
                if isinstance(argument, Name):
                    self._local(argument, "argument", item)
        elif verb == "each" and isinstance(first, Name):
            self._local(first, "each", item)
        elif verb in ("use", "trap") and isinstance(first, String):
            if verb == "use":
                self.uses.append(first.text)
            else:
                self.trap = first.text

    def _local(self, name: Name, sort: str, item: Statement) -> None:
        self.symbols.append(Symbol(name.text, sort, name.place, item.place, item.place))

    def _note_texts(self, item: Statement) -> None:
        if item.label is not None:
            place = self.labels.get(item.label.text, item.label.place)
            self.labels[item.label.text] = min(place, item.label.place)
        for clause in item.clauses:
            if clause.word.text == "after":
                self.label_mentions += _texts(clause)


def _texts(clause: Clause) -> list[tuple[str, Place]]:
    return [(one.text, one.place) for one in clause.operands if isinstance(one, String)]


def _parts(operand: Operand) -> tuple[Operand, ...]:
    if isinstance(operand, Binary):
        return operand.left, operand.right
    if isinstance(operand, Negative):
        return (operand.operand,)
    if isinstance(operand, Spreading):
        return operand.value, operand.spread
    if isinstance(operand, Span):
        return operand.first, operand.last
    if isinstance(operand, Call):
        return operand.name, *operand.arguments
    return ()
