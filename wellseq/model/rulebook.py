"""Interlock rules with every name and unit settled: conditions over time, sentences, the book.

A condition is true or false at every instant.  Its atoms speak of one electrode, line, species or
happening; words such as `any of` have become `AnyOf`.  Values are exact, in base units (V, V/s, K,
m, counts), times in s.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from typing import Literal

from wellseq.base.place import Place
from wellseq.text.rules_tree import Relation

# Quantities


@dataclass(frozen=True, slots=True)
class Voltage:
    """Volts at an electrode."""

    electrode: str


@dataclass(frozen=True, slots=True)
class Slew:
    """How fast an electrode's voltage is moved, V/s, with its sign."""

    electrode: str


@dataclass(frozen=True, slots=True)
class Difference:
    """Volts at one electrode less those at another."""

    electrode: str
    other: str


@dataclass(frozen=True, slots=True)
class OfClouds:
    """Number, temperature (K), depth (V) or position (m) of a species' clouds; empty: of any.

    `what` is one of the keys of UNITS.
    """

    what: str
    species: str


Quantity = Voltage | Slew | Difference | OfClouds
UNITS = {"number": "", "temperature": "K", "depth": "V", "position": "m"}


# Atoms


@dataclass(frozen=True, slots=True)
class Comparison:
    """A quantity against a bound.

    `above` and `below` are strict, `beyond` compares the size (strict), `between` takes both ends
    in.  `low` is None for `below`, `high` for `above` and `beyond`.
    """

    quantity: Quantity
    relation: Relation
    low: Fraction | None
    high: Fraction | None
    unit: str
    text: str


@dataclass(frozen=True, slots=True)
class LineIn:
    """A digital line is in a state."""

    line: str
    state: str
    text: str


@dataclass(frozen=True, slots=True)
class Playing:
    """A step of this verb, or with this label, is being played."""

    verb: str
    label: str
    text: str


@dataclass(frozen=True, slots=True)
class Driven:
    """The sectors of a ring are driven; empty: of any ring."""

    ring: str
    text: str


@dataclass(frozen=True, slots=True)
class Awaiting:
    """The table waits for a trigger, up to its first row after it; empty: for any."""

    trigger: str
    text: str


@dataclass(frozen=True, slots=True)
class InBlock:
    """The rows of a block are played: of one that begins at a trigger, or of the first, `run`."""

    block: str
    text: str


Atom = Comparison | LineIn | Playing | Driven | Awaiting | InBlock


# Conditions


@dataclass(frozen=True, slots=True)
class Not:
    """True where the part is false."""

    part: Condition


@dataclass(frozen=True, slots=True)
class AllOf:
    """True where all parts are."""

    parts: tuple[Condition, ...]


@dataclass(frozen=True, slots=True)
class AnyOf:
    """True where at least one part is."""

    parts: tuple[Condition, ...]


@dataclass(frozen=True, slots=True)
class Held:
    """`C for T`: true at t where C is true at every instant from t − T to t."""

    part: Condition
    window_s: Fraction


@dataclass(frozen=True, slots=True)
class Recent:
    """`C within T`: true at t where C is true at some instant from t − T to t."""

    part: Condition
    window_s: Fraction


Condition = Atom | Not | AllOf | AnyOf | Held | Recent


# Sentences


@dataclass(frozen=True, slots=True)
class Always:
    """At no instant may `trigger` be true and `wanted` false; without a trigger, `wanted` never."""

    trigger: Condition | None
    wanted: Condition

    @property
    def breaking(self) -> Condition:
        """What must never be true."""
        unwanted = negation(self.wanted)
        return unwanted if self.trigger is None else all_of((self.trigger, unwanted))


@dataclass(frozen=True, slots=True)
class Around:
    """Just before each beginning of `event`, or just after each of its ends, `wanted` is true.

    A window of `wanted` lies before the event without its first instant, after it without its last.
    """

    side: Literal["before", "after"]
    event: Condition
    wanted: Condition


@dataclass(frozen=True, slots=True)
class AtEnd:
    """`wanted` is true after the last row."""

    wanted: Condition


@dataclass(frozen=True, slots=True)
class Counted:
    """`event` begins at most `most` times, in all or within any time of `window_s`."""

    event: Condition
    most: int
    window_s: Fraction | None


Sentence = Always | Around | AtEnd | Counted


@dataclass(frozen=True, slots=True)
class Rule:
    """One rule; `house` says that it comes with wellseq and not from the laboratory.

    `lacking` says what the trap file lacks for a rule of the house to apply; empty when it applies.
    """

    name: str
    sentence: Sentence | None
    never_waivable: bool
    house: bool
    text: str
    comment: str
    place: Place
    lacking: str = ""


@dataclass(frozen=True, slots=True)
class RulesFile:
    """A rules file of the house: its name in a published folder and its exact bytes."""

    name: str
    content: bytes


@dataclass(frozen=True, slots=True)
class Rulebook:
    """All rules for one trap, those of the house first; the files that these stand in.

    `own_files` are the shown names of the laboratory's files.
    """

    rules: tuple[Rule, ...] = ()
    house_files: tuple[RulesFile, ...] = ()
    own_files: tuple[str, ...] = ()


def negation(condition: Condition) -> Condition:
    """The opposite; two of them leave a condition as it was."""
    return condition.part if isinstance(condition, Not) else Not(condition)


def all_of(parts: tuple[Condition, ...]) -> Condition:
    """All of these, in one level."""
    flat = tuple(
        inner for part in parts for inner in (part.parts if isinstance(part, AllOf) else (part,))
    )
    return flat[0] if len(flat) == 1 else AllOf(flat)


def any_of(parts: tuple[Condition, ...]) -> Condition:
    """At least one of these, in one level."""
    flat = tuple(
        inner for part in parts for inner in (part.parts if isinstance(part, AnyOf) else (part,))
    )
    return flat[0] if len(flat) == 1 else AnyOf(flat)


def conditions_of(sentence: Sentence) -> tuple[Condition, ...]:
    """The conditions that a sentence is made of."""
    match sentence:
        case Always(trigger, wanted):
            return (wanted,) if trigger is None else (trigger, wanted)
        case Around(_, event, wanted):
            return (event, wanted)
        case AtEnd(wanted):
            return (wanted,)
        case Counted(event):
            return (event,)


def atoms_in(condition: Condition) -> Iterator[Atom]:
    """Every atom of a condition, from left to right."""
    match condition:
        case Not(part) | Held(part) | Recent(part):
            yield from atoms_in(part)
        case AllOf(parts) | AnyOf(parts):
            for part in parts:
                yield from atoms_in(part)
        case _:
            yield condition


def windows_in(condition: Condition) -> Iterator[Fraction]:
    """Every window of a condition, s."""
    match condition:
        case Held(part, window_s) | Recent(part, window_s):
            yield window_s
            yield from windows_in(part)
        case Not(part):
            yield from windows_in(part)
        case AllOf(parts) | AnyOf(parts):
            for part in parts:
                yield from windows_in(part)
        case _:
            return
