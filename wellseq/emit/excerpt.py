"""The written line behind a place, ready for a terminal: tabs spread, columns counted as shown.

Columns of a `Place` count characters; a terminal counts cells.  Tab stops stand every eight cells
and wide characters take two, as the GNU Coding Standards ("Formatting Error Messages") ask for.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Mapping

from wellseq.base.names import printable
from wellseq.base.place import Place

TAB = 8
_LINE_END = re.compile(r"\r\n|\n|\r")


def source_line(sources: Mapping[str, str], place: Place) -> str | None:
    """The text of the place's first line, or None when the file or the line is not known."""
    text = sources.get(place.file)
    if text is None:
        return None
    lines = _LINE_END.split(text)
    return lines[place.line - 1] if 0 < place.line <= len(lines) else None


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
