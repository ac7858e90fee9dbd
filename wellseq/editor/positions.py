"""Places (lines and columns from 1, in characters) ↔ positions of the protocol (from 0).

The unit of a column is what editor and server agreed on: UTF-16 code units unless the editor offers
another.  Lines end at LF, CRLF and CR, as the protocol and the language both say.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from wellseq.base.place import Place
from wellseq.emit.excerpt import line_of, lines_of

Spot = tuple[int, int]
"""Line and character, both from 0, in the protocol's unit."""
WIDTHS: dict[str, Callable[[str], int]] = {
    "utf-8": lambda character: len(character.encode("utf-8", "surrogatepass")),
    "utf-16": lambda character: 2 if character > "\uffff" else 1,
    "utf-32": lambda character: 1,
}


@dataclass(frozen=True, slots=True)
class Positions:
    """Converts for one text; `unit` is utf-8, utf-16 or utf-32."""

    text: str
    unit: str = "utf-16"

    def _mark(self, line: int) -> int:
        """How many characters of a line are a byte order mark, which places do not count."""
        return 1 if line == 1 and self.text.startswith("\ufeff") else 0

    def spot(self, line: int, column: int) -> Spot:
        """The position of a character; beyond the end of its line, that end."""
        written = line_of(self.text, line)
        if written is None:
            return max(0, line - 1), 0
        width = WIDTHS[self.unit]
        return line - 1, sum(map(width, written[: column - 1 + self._mark(line)]))

    def span(self, place: Place) -> tuple[Spot, Spot]:
        """Start and end of a place; a place without extent takes in one character where it can."""
        start = self.spot(place.line, place.column)
        end = self.spot(place.end_line, place.end_column)
        if end <= start:
            end = self.spot(place.line, place.column + 1)
        return start, max(start, end)

    def place(self, line: int, character: int) -> tuple[int, int]:
        """Line and column (from 1, in characters) of a position; within a character, its start."""
        written = line_of(self.text, line + 1)
        if written is None:
            return line + 1, 1
        width, at = WIDTHS[self.unit], 0
        for number, one in enumerate(written, start=1):
            at += width(one)
            if at > character:
                return line + 1, max(1, number - self._mark(line + 1))
        return line + 1, len(written) + 1 - self._mark(line + 1)

    def end(self) -> Spot:
        """The position after the last character."""
        lines = lines_of(self.text)
        return self.spot(len(lines), len(lines[-1]) + 1)
