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
class _Brace:
    """A brace, where its line's first word stands and how far in; `leads`: it is that word."""

    opens: bool
    spot: Spot
    line_begins: Spot
    indent: int

    @property
    def leads(self) -> bool:
        return self.spot == self.line_begins


def repairs_by_layout(source: str) -> Repairs:
    """Read the braces of a text again with an eye on the indentation of their lines.

    Empty when the layout tells nothing, or less than counting does.
    """
    braces = list(_braces(source))
    surplus = sum(1 if brace.opens else -1 for brace in braces)
    repairs = Repairs()
    if surplus > 0:
        repairs = _unclosed(braces)
    elif surplus < 0:
        repairs = _needless(braces)
    return repairs if repairs.count == abs(surplus) else Repairs()


def _braces(source: str) -> Iterator[_Brace]:
    for number, line in enumerate(_LINE_END.split(source), start=1):
        if "{" not in line and "}" not in line:
            continue
        match = _INDENT.match(line)
        begins = match.end() if match else 0
        indent = len(line[:begins].expandtabs())
        for match in _BRACE.finditer(line):
            if match[0] in ("{", "}"):
                spot = (number, match.start() + 1)
                yield _Brace(match[0] == "{", spot, (number, begins + 1), indent)


def _unclosed(braces: list[_Brace]) -> Repairs:
    """Blocks that lack their `}`: a later brace stands too far out for them to be open still."""
    repairs, open_ones = Repairs(), []
    for brace in braces:
        first_of_line = brace.leads or brace.opens
        while first_of_line and len(open_ones) > (0 if brace.opens else 1):
            inner = open_ones[-1]
            same_line = inner.spot[0] == brace.spot[0]
            outside = inner.indent >= brace.indent if brace.opens else inner.indent > brace.indent
            if same_line or not outside:
                break
            open_ones.pop()
            repairs.close_before(brace.line_begins)
        if brace.opens:
            open_ones.append(brace)
        elif open_ones:
            open_ones.pop()
    repairs.count += len(open_ones)
    return repairs


def _needless(braces: list[_Brace]) -> Repairs:
    """Closing braces that fit no open block: too far in, or at the end of another block's line."""
    repairs, open_ones = Repairs(), []
    for brace in braces:
        if brace.opens:
            open_ones.append(brace)
            continue
        inner = open_ones[-1] if open_ones else None
        if inner is None or (
            brace.indent > inner.indent if brace.leads else brace.spot[0] != inner.spot[0]
        ):
            repairs.extra.add(brace.spot)
            repairs.count += 1
        else:
            open_ones.pop()
    repairs.count += len(open_ones)
    return repairs
