"""A text whose braces do not match → which brace is the wrong one, told from the layout.

Layout decides nothing in a text that is right: this is asked only after the braces have turned out
not to match.  It is believed only when it explains the imbalance with as few braces as can be.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field

Spot = tuple[int, int]
"""Line and column, both from 1."""

_LINE_END = re.compile(r"\r\n|\r|\n")
_BRACE = re.compile(r'"[^"\r\n]*+"?|#[^\r\n]*+|[{}]')
_INDENT = re.compile(r"[ \t]*+")


@dataclass(slots=True)
class Repairs:
    """`extra`: closing braces to pass over; `closes`: how many blocks end before a spot."""

    extra: set[Spot] = field(default_factory=set)
    closes: dict[Spot, int] = field(default_factory=dict)
    count: int = 0

    def close_before(self, spot: Spot) -> None:
        """One more block ends before the token at the spot."""
        self.closes[spot] = self.closes.get(spot, 0) + 1
        self.count += 1


@dataclass(frozen=True, slots=True)
class _Mark:
    """A brace, or with `kind` empty the beginning of a line; `indent` is that of its line."""

    kind: str
    spot: Spot
    indent: int
    leads: bool
    line_has_brace: bool


def repairs_by_layout(source: str) -> Repairs:
    """Read the braces of a text again with an eye on the indentation of their lines.

    Empty when the layout tells nothing, or less than counting does.
    """
    marks = list(_marks(source))
    surplus = sum({"{": 1, "}": -1}.get(mark.kind, 0) for mark in marks)
    guesses: list[Repairs] = []
    if surplus > 0:
        with_braces = [mark for mark in marks if mark.line_has_brace]
        guesses = [_unclosed(marks), _unclosed(with_braces)]
    elif surplus < 0:
        guesses = [_needless(marks)]
    return next((guess for guess in guesses if guess.count == abs(surplus)), Repairs())


def _marks(source: str) -> Iterator[_Mark]:
    for number, line in enumerate(_LINE_END.split(source), start=1):
        match = _INDENT.match(line)
        begins = match.end() if match else 0
        if line[begins : begins + 1] in ("", "#"):
            continue
        indent = len(line[:begins].expandtabs())
        braces = [match for match in _BRACE.finditer(line) if match[0] in ("{", "}")]
        if line[begins] != "}":
            yield _Mark("", (number, begins + 1), indent, True, bool(braces))
        for match in braces:
            column = match.start() + 1
            yield _Mark(match[0], (number, column), indent, column == begins + 1, True)


def _unclosed(marks: list[_Mark]) -> Repairs:
    """Blocks that lack their `}`: a later line stands too far out for them to be open still."""
    repairs = Repairs()
    open_ones: list[_Mark] = []
    for mark in marks:
        if mark.kind == "":
            while open_ones and open_ones[-1].indent >= mark.indent:
                open_ones.pop()
                repairs.close_before(mark.spot)
        elif mark.kind == "{":
            open_ones.append(mark)
        else:
            while mark.leads and len(open_ones) > 1 and open_ones[-1].indent > mark.indent:
                open_ones.pop()
                repairs.close_before(mark.spot)
            del open_ones[-1:]
    repairs.count += len(open_ones)
    return repairs


def _needless(marks: list[_Mark]) -> Repairs:
    """Closing braces that fit no open block: too far in, or at the end of another block's line."""
    repairs = Repairs()
    open_ones: list[_Mark] = []
    for mark in marks:
        if mark.kind == "{":
            open_ones.append(mark)
        if mark.kind != "}":
            continue
        inner = open_ones[-1] if open_ones else None
        if inner is None or (
            mark.indent > inner.indent if mark.leads else mark.spot[0] != inner.spot[0]
        ):
            repairs.extra.add(mark.spot)
            repairs.count += 1
        else:
            open_ones.pop()
    repairs.count += len(open_ones)
    return repairs
