"""The tree of a sequence file: what was written, where, and nothing decided yet.

A statement is a shape: an optional label, a verb, operands, clauses that each begin with a reserved
word, bare words, allowances.  Which of them a verb takes is not known here.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction

from wellseq.base.finding import Mistake
from wellseq.base.place import Place


@dataclass(frozen=True, slots=True)
class Number:
    """A literal: the exact number as written and its unit word ('' for a plain number, u for µ)."""

    value: Fraction
    unit: str
    place: Place


@dataclass(frozen=True, slots=True)
class Name:
    """A name, NFC-normalised; its place points at the source as it was written."""

    text: str
    place: Place


@dataclass(frozen=True, slots=True)
class String:
    """The text between two double quotes; there are no escapes."""

    text: str
    place: Place


@dataclass(frozen=True, slots=True)
class Negative:
    """A value with a minus sign before it."""

    operand: Operand
    place: Place


@dataclass(frozen=True, slots=True)
class Binary:
    """`left op right`, op one of + - * /."""

    op: str
    left: Operand
    right: Operand
    place: Place


@dataclass(frozen=True, slots=True)
class Spreading:
    """`value ± spread`; the spread may be in per cent of the value."""

    value: Operand
    spread: Operand
    place: Place


@dataclass(frozen=True, slots=True)
class Span:
    """`C4..C8`: everything from the first to the last electrode, in order along the axis."""

    first: Name
    last: Name
    place: Place


@dataclass(frozen=True, slots=True)
class Call:
    """`lift(60 V)`: a procedure with its arguments, in a definition or after `do`."""

    name: Name
    arguments: tuple[Operand, ...]
    place: Place


@dataclass(frozen=True, slots=True)
class Assignment:
    """`C3, C9 = -wall`, `others = 0 V`, `others keep` (value None): one line of a pattern."""

    targets: tuple[Name | Span, ...]
    value: Operand | None
    place: Place


@dataclass(frozen=True, slots=True)
class Block:
    """`{ … }`: the statements and assignments between two braces."""

    items: tuple[Statement | Assignment, ...]
    place: Place


Operand = Number | Name | String | Negative | Binary | Spreading | Span | Call | Block


@dataclass(frozen=True, slots=True)
class Clause:
    """A reserved word and the operands after it: `between G1 and G2` is two clauses."""

    word: Name
    operands: tuple[Operand, ...]
    place: Place


@dataclass(frozen=True, slots=True)
class Allowance:
    """`allow ramp-not-adiabatic because "reason"`."""

    name: Name
    reason: String
    place: Place


@dataclass(frozen=True, slots=True)
class Statement:
    """One statement, in the order it was written.

    `verb` is None for a line of clauses inside braces.  `operands` are what follows the verb and
    what stands beside a clause's operands without being a bare word, as the value in `assume
    temperature of bunch 140 K`; a block is the operand it stands as.  `value` is what follows `=`
    in `let wall = 90 V`.
    `words` are bare names beside a complete operand (`smoothly`, the state in `set mcp_bias off`).
    """

    verb: Name | None
    operands: tuple[Operand, ...]
    clauses: tuple[Clause, ...]
    words: tuple[Name, ...]
    allowances: tuple[Allowance, ...]
    value: Operand | None
    label: String | None
    place: Place

    def block(self) -> Block | None:
        """The statement's first block, if it has one."""
        return next((item for item in self.operands if isinstance(item, Block)), None)


@dataclass(frozen=True, slots=True)
class Tree:
    """A whole file: its statements in order, and every mistake that kept a statement out.

    `unread` are the names that statements kept out would have defined: what they stand for is not
    known, but that they are there is.
    """

    file: str
    source: str
    statements: tuple[Statement | Assignment, ...]
    mistakes: tuple[Mistake, ...]
    unread: frozenset[str] = frozenset()

    def lines(self) -> Iterator[str]:
        """The source line by line, without line ends (LF, CRLF, CR)."""
        yield from self.source.replace("\r\n", "\n").replace("\r", "\n").split("\n")
