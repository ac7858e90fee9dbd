"""Places in a source text: where a mistake or a statement was written.

Lines and columns count from 1; columns count characters (Unicode code points), the end column is
the one after the last character.  Lines end at LF, CRLF or CR only.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, order=True)
class Place:
    """A span of one file: from (line, column) up to, not including, (end_line, end_column)."""

    file: str
    line: int = 1
    column: int = 1
    end_line: int = 1
    end_column: int = 1

    def to(self, other: Place) -> Place:
        """The span from the start of this place to the end of another of the same file."""
        return Place(self.file, self.line, self.column, other.end_line, other.end_column)

    def __str__(self) -> str:
        return f"{self.file}:{self.line}:{self.column}"
