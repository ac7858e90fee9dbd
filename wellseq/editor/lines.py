"""A text → what an editor draws without asking the engine: colours, folds."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass

from wellseq.editor.names import Index
from wellseq.emit.excerpt import lines_of
from wellseq.model.headers import INSIDE, OUTSIDE
from wellseq.model.steps import verbs
from wellseq.model.trap import Trap
from wellseq.text.mistakes import Mistakes
from wellseq.text.scan import scan
from wellseq.text.tokens import Token

SORTS = (
    *("keyword", "number", "string", "comment", "operator"),
    *("variable", "function", "type", "property", "enumMember", "event", "parameter"),
)
"""What a stretch of text can be, by the protocol's own words."""
_OF_SYMBOLS = {
    "let": "variable",
    "pattern": "property",
    "procedure": "function",
    "cloud": "type",
    "sequence": "function",
    "argument": "parameter",
    "each": "parameter",
}
_KEYWORDS = frozenset(("CLAUSE", "BECAUSE", "_ALLOW", "KEEP"))
_OPERATORS = frozenset(("PLUS", "MINUS", "STAR", "SLASH", "_EQUALS", "_SPREAD", "_DOTS"))
_COMMENT = re.compile(r"#[^\r\n]*")


@dataclass(frozen=True, slots=True)
class Coloured:
    """A stretch of one line, columns from 1 in characters, and what it is."""

    line: int
    column: int
    end_column: int
    sort: str


def colours(text: str, index: Index, trap: Trap | None) -> Iterator[Coloured]:
    """Every stretch that has a sort, in order; what is wrong keeps the colour of plain text."""
    body = text.removeprefix("\ufeff")
    hardware = _hardware(trap)
    line, line_start, at = 1, 0, 0
    begins = True
    for token in scan(body, Mistakes("")):
        if comment := _COMMENT.search(body, at, token.start):
            yield Coloured(
                line, comment.start() - line_start + 1, comment.end() - line_start + 1, "comment"
            )
        at = token.end
        if token.type == "NEWLINE":
            line, line_start, begins = line + 1, token.end, True
            continue
        sort = _sort(token, begins, index, hardware)
        if sort:
            yield Coloured(token.line, token.column, token.column + token.end - token.start, sort)
        begins = token.type in ("SEMICOLON", "LBRACE", "RBRACE", "STRING") and (
            begins or token.type != "STRING"
        )
    if comment := _COMMENT.search(body, at):
        yield Coloured(
            line, comment.start() - line_start + 1, comment.end() - line_start + 1, "comment"
        )


def _hardware(trap: Trap | None) -> dict[str, str]:
    if trap is None:
        return {}
    found = {one.name: "enumMember" for one in (*trap.electrodes, *trap.outputs, *trap.lines)}
    return found | {one.name: "event" for one in trap.triggers}


def _sort(token: Token, begins: bool, index: Index, hardware: dict[str, str]) -> str:
    if token.type in _KEYWORDS:
        return "keyword"
    if token.type in _OPERATORS:
        return "operator"
    if token.type in ("NUMBER", "STRING"):
        return token.type.lower()
    if token.type == "FINDING":
        return "type"
    if token.type != "NAME":
        return ""
    word = str(token.value)
    if begins and word in (*verbs(), *INSIDE, *OUTSIDE, "lane"):
        return "keyword"
    mention = index.mention_from(token.line, token.column)
    if mention is None:
        return ""
    symbol = index.own(mention.name, mention.around)
    return (
        _OF_SYMBOLS[symbol.sort] if symbol is not None else hardware.get(mention.name, "variable")
    )


def folds(text: str) -> Iterator[tuple[int, int, str]]:
    """(first line, last line, kind) of every block and every run of comment lines, from 1."""
    opened: list[int] = []
    for token in scan(text.removeprefix("\ufeff"), Mistakes("")):
        if token.type == "LBRACE":
            opened.append(token.line)
        elif token.type == "RBRACE" and opened:
            first = opened.pop()
            if token.line - 1 > first:
                yield first, token.line - 1, "region"
    start = 0
    lines = [*lines_of(text), ""]
    for number, line in enumerate(lines, start=1):
        if line.lstrip().startswith("#"):
            start = start or number
        elif start:
            if number - 1 > start:
                yield start, number - 1, "comment"
            start = 0
