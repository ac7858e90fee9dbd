"""The written line behind a place, ready for a terminal: tabs spread, columns counted as shown.

Columns of a `Place` count characters; a terminal counts cells.  Tab stops stand every eight cells
and wide characters take two, as the GNU Coding Standards ("Formatting Error Messages") ask for.
Editors and SARIF viewers count UTF-16 code units; `utf16_column` converts at that edge.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Mapping
from functools import lru_cache

from wellseq.base.names import printable
from wellseq.base.place import Place

TAB = 8
_LINE_END = re.compile(r"\r\n|\n|\r")


def source_line(sources: Mapping[str, str], place: Place) -> str | None:
    """The text of the place's first line, or None when the file or the line is not known."""
    text = sources.get(place.file)
    if text is None:
        return None
    return line_of(text, place.line)


def line_of(text: str, number: int) -> str | None:
    """The line of that number (from 1) without its end (LF, CRLF, CR), None when there is none."""
    lines = lines_of(text)
    return lines[number - 1] if 0 < number <= len(lines) else None


@lru_cache(maxsize=16)
def lines_of(text: str) -> tuple[str, ...]:
    """All lines of a text without their ends."""
    return tuple(_LINE_END.split(text))


def cells(character: str, at: int) -> int:
    """How many cells a character takes when it is written at cell `at` (0 is the first)."""
    if character == "\t":
        return TAB - at % TAB
    if unicodedata.combining(character) or unicodedata.category(character) in ("Mn", "Me"):
        return 0
    if unicodedata.category(character) in ("Cc", "Cf", "Cs"):
        return len(printable(character))
    return 2 if unicodedata.east_asian_width(character) in "WF" else 1


def display_column(line: str, column: int) -> int:
    """The display column (from 1) of the character at `column` (from 1)."""
    at = 0
    for character in line[: column - 1]:
        at += cells(character, at)
    return at + 1 + max(0, column - 1 - len(line))


def utf16_column(line: str, column: int) -> int:
    """The UTF-16 column (from 1) of the character at `column` (from 1); it counts on beyond."""
    before = line[: column - 1]
    astral = sum(character > "\uffff" for character in before)
    return column + astral


def character_column(line: str, utf16: int) -> int:
    """The column in characters (from 1) of a UTF-16 column; inside a pair, that of its character.

    The inverse of `utf16_column`.
    """
    at = 1
    for number, character in enumerate(line, start=1):
        if at >= utf16:
            return number
        at += 2 if character > "\uffff" else 1
        if at > utf16:
            return number
    return len(line) + 1 + utf16 - at


def shown_line(line: str) -> str:
    """The line as it can safely be printed: tabs spread, control characters escaped."""
    pieces: list[str] = []
    at = 0
    for character in line:
        width = cells(character, at)
        pieces.append(" " * width if character == "\t" else printable(character))
        at += width
    return "".join(pieces)


def marker(line: str, place: Place, sign: str = "~") -> str:
    """A line of blanks and signs that lies under the place when printed below `shown_line`."""
    start = display_column(line, place.column)
    last = place.end_column if place.end_line == place.line else len(line.rstrip()) + 1
    end = display_column(line, max(last, place.column + 1))
    return " " * (start - 1) + sign * max(1, end - start)
