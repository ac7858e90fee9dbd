"""The text of one file → its statements as they are named apart from where they stand.

A statement is its words without label, comments and layout, together with the definition and the
blocks around it.  That is what a fingerprint is made of, and what tells which `repeat` a pass was.
"""

from __future__ import annotations

import re
from bisect import bisect_right
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache

from wellseq.base.place import Place
from wellseq.emit.excerpt import lines_of
from wellseq.model.headers import INSIDE, OUTSIDE
from wellseq.model.library import beside
from wellseq.text.mistakes import Mistakes
from wellseq.text.parse import parse
from wellseq.text.scan import scan
from wellseq.text.tokens import Token
from wellseq.text.tree import Assignment, Block, Number, Statement, String

OPENS = frozenset((*OUTSIDE, *INSIDE, "lane"))
"""Verbs whose braces hold statements of their own."""
PASSES = ("repeat", "each")
_LINE_END = re.compile(r"\r\n|\n|\r")
_COMMENT = re.compile(r'("[^"\r\n]*"?)|#[^\r\n]*')
_TABLE = re.compile(r"\s*(\[+[^\]]*\]+)")
_NAME = re.compile(r"\s*name\s*=\s*(.*)")


@dataclass(frozen=True, slots=True)
class Written:
    """A statement: its words, the heads of what it stands in (outermost first), its verb.

    `text` is the statement as its author wrote it, on one line and without comments.
    """

    place: Place
    words: str
    text: str
    within: tuple[str, ...]
    verb: str
    around: tuple[Place, ...]
    """The `repeat` and `each` statements around it, outermost first."""


class Outline:
    """The statements of one sequence file; made by `outline`."""

    def __init__(self, source: str, file: str) -> None:
        self.file = file
        self.source = source.removeprefix("\ufeff")
        self._starts = [0, *(match.end() for match in _LINE_END.finditer(self.source))]
        self.uses: dict[str, Place] = {}
        """File name as shown → the `use` that brings it."""
        self._written = sorted(self._walk(), key=lambda one: one.place)
        self._order = [(one.place.line, one.place.column) for one in self._written]
        self._exact = {one.place: one for one in self._written}

    def at(self, place: Place) -> Written | None:
        """The innermost statement that a place is in; None where there is none."""
        if place in self._exact:
            return self._exact[place]
        spot = (place.line, place.column)
        for index in range(bisect_right(self._order, spot) - 1, -1, -1):
            one = self._written[index]
            if spot < (one.place.end_line, one.place.end_column):
                return one
        return None

    def text_at(self, place: Place) -> str:
        """The words that stand at a place, without comments and layout."""
        return words_of(self.source[self._offset(place.line, place.column) : self._end(place)])

    def line_at(self, number: int) -> str:
        """The words of a line, for what no statement was made of."""
        lines = lines_of(self.source)
        return words_of(lines[number - 1]) if 0 < number <= len(lines) else ""

    def _offset(self, line: int, column: int) -> int:
        if not 0 < line <= len(self._starts):
            return len(self.source)
        return self._starts[line - 1] + column - 1

    def _end(self, place: Place) -> int:
        return self._offset(place.end_line, place.end_column)

    def _walk(self) -> Iterator[Written]:
        waiting: list[tuple[Statement | Assignment, tuple[str, ...], tuple[Place, ...]]] = [
            (item, (), ()) for item in parse(self.source, self.file).statements
        ]
        while waiting:
            item, within, around = waiting.pop()
            verb = item.verb.text if isinstance(item, Statement) and item.verb else ""
            block = item.block() if isinstance(item, Statement) and verb in OPENS else None
            text = self._text(item, block)
            words = words_of(text)
            yield Written(item.place, words, plain_text(text), within, verb, around)
            if verb == "use" and isinstance(item, Statement):
                self._note_use(item)
            if block is not None:
                inner = (*around, item.place) if verb in PASSES else around
                waiting += [(one, (*within, words), inner) for one in block.items]

    def _text(self, item: Statement | Assignment, block: Block | None) -> str:
        """A statement from its verb on, without the statements that it holds."""
        first = item.verb if isinstance(item, Statement) and item.verb is not None else item
        start = self._offset(first.place.line, first.place.column)
        if block is not None:
            return self.source[start : self._offset(block.place.line, block.place.column)]
        return self.source[start : self._end(item.place)]

    def _note_use(self, item: Statement) -> None:
        if item.operands and isinstance(item.operands[0], String):
            self.uses.setdefault(beside(self.file, item.operands[0].text), item.place)


@lru_cache(maxsize=64)
def outline(source: str, file: str) -> Outline:
    """The outline of a text; the same text is walked once."""
    return Outline(source, file)


@lru_cache(maxsize=16384)
def words_of(text: str) -> str:
    """The tokens of a text with one blank between them; numbers by value, `50 ms` as `50 ms`."""
    return " ".join(_word(token) for token in scan(text, Mistakes("")) if token.type != "NEWLINE")


def plain_text(text: str) -> str:
    """A piece of source on one line, its comments left out."""
    return " ".join(_COMMENT.sub(r"\1", text).split())


def _word(token: Token) -> str:
    if isinstance(token.value, Number):
        return f"{token.value.value} {token.value.unit}".rstrip()
    return f'"{token.value}"' if token.type == "STRING" else str(token.value)


def trap_words(source: str, number: int) -> tuple[str, tuple[str, ...]]:
    """The words of a line of a trap file, and the table it stands in with that table's name."""
    lines = lines_of(source.removeprefix("\ufeff"))
    if not 0 < number <= len(lines):
        return "", ()
    head = next((n for n in range(number - 1, -1, -1) if _TABLE.match(lines[n])), None)
    line = " ".join(lines[number - 1].split("#")[0].split())
    if head is None:
        return line, ()
    table = _TABLE.match(lines[head])
    within = [table[1] if table else ""]
    for one in lines[head + 1 :]:
        if _TABLE.match(one):
            break
        if name := _NAME.match(one):
            within.append(name[1].split("#")[0].strip())
            break
    return line, tuple(within)


def trap_named(source: str, file: str) -> str | None:
    """The trap file that a sequence names, as seen from where the sequence's own name is."""
    for item in parse(source, file).statements:
        if isinstance(item, Statement) and item.verb is not None and item.verb.text == "trap":
            first = item.operands[0] if item.operands else None
            return beside(file, first.text) if isinstance(first, String) else None
    return None


def has_sequence(source: str, file: str) -> bool:
    """Whether a text is a sequence, not only patterns and procedures for other files.

    A text with mistakes counts as one: what it was to be is not known.
    """
    tree = parse(source, file)
    verbs = (item.verb for item in tree.statements if isinstance(item, Statement))
    return bool(tree.mistakes) or any(
        verb is not None and verb.text == "sequence" for verb in verbs
    )
