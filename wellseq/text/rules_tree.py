"""The tree of a rules file: what was written, where, and nothing decided yet.

A rule has a name, one sentence, and the comment that stands directly above it.  Conditions are kept
as written; which names there are and what a value must be in is not known here.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from wellseq.base.finding import Mistake
from wellseq.base.place import Place
from wellseq.text.tree import Name, Number, Span

Relation = Literal["above", "below", "beyond", "between"]
Form = Literal[
    "while_require",
    "while_forbid",
    "require",
    "forbid",
    "forbid_while",
    "before",
    "after",
    "at_end_require",
    "at_end_forbid",
    "counted",
]
Happening = Literal["step", "label", "drive", "awaiting", "block"]


@dataclass(frozen=True, slots=True)
class Electrodes:
    """`C3`, `any of C3, C5..C8`, `all of …`, or `any hazardous` (no names)."""

    how: Literal["one", "any", "all", "hazardous"]
    names: tuple[Name | Span, ...]
    place: Place


@dataclass(frozen=True, slots=True)
class Quantity:
    """What is compared: `voltage` or `slew` of electrodes, `difference` of two, or of a cloud.

    `kind` is then number, temperature, depth or position; `name` a species, or None for any cloud.
    """

    kind: str
    place: Place
    electrodes: Electrodes | None = None
    name: Name | None = None
    other: Name | None = None


@dataclass(frozen=True, slots=True)
class Value:
    """A literal with its sign."""

    number: Number
    negative: bool
    place: Place


@dataclass(frozen=True, slots=True)
class Compared:
    """`quantity above value`; two values for `between`."""

    quantity: Quantity
    relation: Relation
    values: tuple[Value, ...]
    place: Place


@dataclass(frozen=True, slots=True)
class InState:
    """`valve open`: a digital line and its state; `quoted` when the state stands in quotes."""

    line: Name
    state: Name
    quoted: bool
    place: Place


@dataclass(frozen=True, slots=True)
class EverySafe:
    """`every door safe`: all lines of that role."""

    role: Name
    place: Place


@dataclass(frozen=True, slots=True)
class Happens:
    """A step by its verb or label, a drive (on a ring), a wait (for a trigger), a block."""

    kind: Happening
    name: Name | None
    place: Place


@dataclass(frozen=True, slots=True)
class Negated:
    """`not` before a condition."""

    condition: Condition
    place: Place


@dataclass(frozen=True, slots=True)
class Joined:
    """Two or more conditions with the same word between them."""

    word: Literal["and", "or"]
    parts: tuple[Condition, ...]
    place: Place


@dataclass(frozen=True, slots=True)
class Lasting:
    """`condition for T`, `condition within T`."""

    condition: Condition
    word: Literal["for", "within"]
    duration: Number
    place: Place


Condition = Compared | InState | EverySafe | Happens | Negated | Joined | Lasting


@dataclass(frozen=True, slots=True)
class Sentence:
    """The shape of a rule: its form, its conditions in the order written.

    `count` and `window` belong to `at most N times within T`.
    """

    form: Form
    conditions: tuple[Condition, ...]
    count: Number | None = None
    window: Number | None = None


@dataclass(frozen=True, slots=True)
class RuleText:
    """One rule; `text` is its source on one line, `comment` what stands directly above it."""

    name: Name
    never_waivable: bool
    sentence: Sentence
    text: str
    comment: str
    place: Place


@dataclass(frozen=True, slots=True)
class RulesTree:
    """A whole rules file: its rules in order, and every mistake that kept a rule out."""

    file: str
    rules: tuple[RuleText, ...]
    mistakes: tuple[Mistake, ...]
