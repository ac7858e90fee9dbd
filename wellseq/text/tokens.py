"""A token: the smallest written thing, with its place."""

from __future__ import annotations

from typing import Any

from wellseq.base.place import Place


class Token:
    """One token of a line; `value` is a Number, a Block, or else the text as it was written.

    `start` and `end` are offsets into the source.  A block's end is set when its brace closes.
    Lark reads `type`, and the other attributes when it makes an end mark that borrows a place.
    """

    __slots__ = (
        "column",
        "end",
        "end_column",
        "end_line",
        "file",
        "line",
        "start",
        "type",
        "value",
    )
    start_pos = end_pos = None

    def __init__(
        self, type: str, value: Any, file: str, line: int, column: int, start: int, end: int
    ) -> None:
        self.type = type
        self.value = value
        self.file = file
        self.line = self.end_line = line
        self.column = column
        self.start = start
        self.end = end
        self.end_column = column + end - start

    @property
    def place(self) -> Place:
        """Where the token stands."""
        return Place(self.file, self.line, self.column, self.end_line, self.end_column)


MARKS = {
    "..": "_DOTS",
    "±": "_SPREAD",
    "+-": "_SPREAD",
    "+": "PLUS",
    "-": "MINUS",
    "−": "MINUS",
    "*": "STAR",
    "/": "SLASH",
    "=": "_EQUALS",
    ",": "_COMMA",
    ";": "SEMICOLON",
    "(": "LPAR",
    ")": "RPAR",
    "{": "LBRACE",
    "}": "RBRACE",
}
"""Written mark → token type."""

OPERATORS = frozenset(("PLUS", "MINUS", "STAR", "SLASH"))
