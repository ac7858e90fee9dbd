"""Operands of one statement → the value of one field of a step, as its `Takes` demands."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from wellseq.base.names import nearest, normal, printable
from wellseq.base.place import Place
from wellseq.base.quantity import Quantity, Spread, kind_of
from wellseq.model.patterns import electrodes, read_pattern
from wellseq.model.scope import Defined, Names
from wellseq.model.step import Level, PatternVolts, Takes
from wellseq.model.values import UNKNOWN, Unknown, Value, evaluate, needs
from wellseq.text.tree import Name, Operand, String

DURATION_MAX_s = Fraction(10) ** 7
"""The longest single duration (116 days), so that ticks of any clock stay countable."""


@dataclass(frozen=True, slots=True)
class Slot:
    """One field of a step: its word as written, what it takes, and where it stands.

    `exact` fields keep the exact rational, others become floats.  `choices` are the words of a
    choice.
    """

    field: str
    word: str
    takes: Takes
    required: bool
    subject: bool
    exact: bool
    choices: tuple[str, ...] = ()

    @property
    def spoken(self) -> str:
        """What the field takes, in words."""
        if self.takes.what in ("quantity", "spread"):
            return _SPOKEN.get(self.takes.unit, "a value") if not self.takes.by else "a value"
        return _SPOKEN.get(self.takes.what, f"a {self.takes.what}")


_SPOKEN = {
    "V": "a voltage",
    "s": "a time",
    "Hz": "a frequency",
    "electrode": "an electrode",
    "electrodes": "one or more electrodes",
    "line": "a digital line",
    "text": "a text in quotes",
    "label": "a label in quotes",
    "choice": "a quantity",
    "level": "a voltage or a converter output",
}
Chosen = Mapping[str, object]
"""What the fields before this one turned out to be."""


def settle(slot: Slot, operands: tuple[Operand, ...], names: Names, chosen: Chosen) -> object:
    """The value of a field, or UNKNOWN when a mistake was reported.

    `operands` has one member, except for a list of electrodes.
    """
    return _SETTLERS[slot.takes.what](slot, operands, names, chosen)


def _said(slot: Slot) -> str:
    return f"`{slot.word}`" if not slot.subject else f"the {slot.word}"


def _unit(slot: Slot, chosen: Chosen) -> str | None:
    if not slot.takes.by:
        return slot.takes.unit
    return dict(slot.takes.units).get(str(chosen.get(slot.takes.by)))


def _checked(slot: Slot, operand: Operand, names: Names, chosen: Chosen) -> Value:
    value = evaluate(operand, names)
    unit = _unit(slot, chosen)
    if isinstance(value, Unknown) or unit is None:
        return UNKNOWN
    sound = needs(value, kind_of(unit), slot.takes.sign, operand.place, _said(slot), names)
    return value if sound else UNKNOWN


def _no_spread(slot: Slot, operand: Operand, names: Names) -> Unknown:
    return names.report("unit-mismatch", operand.place, f"{_said(slot)} takes a value without ±")


def _quantity(slot: Slot, operands: tuple[Operand, ...], names: Names, chosen: Chosen) -> object:
    operand = operands[0]
    value = _checked(slot, operand, names, chosen)
    if isinstance(value, Spread):
        return _no_spread(slot, operand, names)
    if isinstance(value, Unknown):
        return value
    if _unit(slot, chosen) == "s" and value.value > DURATION_MAX_s:
        limit = f"at most {int(DURATION_MAX_s):,} s can be played in one step"
        return names.report("too-large", operand.place, "this time is too long", limit)
    return value.value if slot.exact else float(value.value)


def _spread(slot: Slot, operands: tuple[Operand, ...], names: Names, chosen: Chosen) -> object:
    value = _checked(slot, operands[0], names, chosen)
    return Spread(value.value, Fraction(0), value.kind) if isinstance(value, Quantity) else value


def _named(sort: str) -> Callable[[Slot, tuple[Operand, ...], Names, Chosen], object]:
    def settler(slot: Slot, operands: tuple[Operand, ...], names: Names, chosen: Chosen) -> object:
        found = names.thing(operands[0], sort)
        return found if isinstance(found, Unknown) else found.name

    return settler


def _electrodes(
    slot: Slot, operands: tuple[Operand, ...], names: Names, chosen: Chosen
) -> tuple[str, ...] | Unknown:
    listed: dict[str, None] = {}
    sound = True
    for operand in operands:
        found = electrodes(operand, names)
        sound &= found is not None
        for name in found or ():
            if name in listed:
                names.report("name-reused", operand.place, f"'{name}' is given twice here")
                sound = False
            listed[name] = None
    return tuple(listed) if sound else UNKNOWN


def _pattern(
    slot: Slot, operands: tuple[Operand, ...], names: Names, chosen: Chosen
) -> PatternVolts | Unknown:
    return read_pattern(operands[0], names)


def _level(slot: Slot, operands: tuple[Operand, ...], names: Names, chosen: Chosen) -> object:
    operand = operands[0]
    if isinstance(operand, Name):
        found = names.find(operand.text)
        if found is None or (isinstance(found, Defined) and found.sort != "let"):
            output = names.thing(operand, "output")
            return output if isinstance(output, Unknown) else Level(output.name)
    value = evaluate(operand, names)
    if isinstance(value, Unknown):
        return UNKNOWN
    if isinstance(value, Spread):
        return _no_spread(slot, operand, names)
    sound = needs(value, kind_of("V"), "any", operand.place, _said(slot), names)
    return Level(float(value.value)) if sound else UNKNOWN


def _state(slot: Slot, operands: tuple[Operand, ...], names: Names, chosen: Chosen) -> object:
    operand = operands[0]
    if not isinstance(operand, Name):
        return names.report("unknown-name", operand.place, "the name of a state is needed here")
    return operand.text


def _text(slot: Slot, operands: tuple[Operand, ...], names: Names, chosen: Chosen) -> object:
    operand = operands[0]
    if not isinstance(operand, String):
        return names.report("syntax", operand.place, f"{_said(slot)} takes a text in quotes")
    if not operand.text.strip():
        return names.report("syntax", operand.place, f"{_said(slot)} says nothing")
    return normal(operand.text) if slot.takes.what == "label" else operand.text


def _choice(slot: Slot, operands: tuple[Operand, ...], names: Names, chosen: Chosen) -> object:
    operand = operands[0]
    if isinstance(operand, Name) and operand.text in slot.choices:
        return operand.text
    said = f"'{printable(operand.text)}'" if isinstance(operand, Name) else "this"
    return names.report(
        "unknown-name",
        operand.place,
        f"{said} is no quantity that can be named here",
        nearest(said.strip("'"), slot.choices, "quantities"),
    )


_SETTLERS: Mapping[str, Callable[[Slot, tuple[Operand, ...], Names, Chosen], Any]] = {
    "quantity": _quantity,
    "spread": _spread,
    "electrode": _named("electrode"),
    "electrodes": _electrodes,
    "cloud": _named("cloud"),
    "pattern": _pattern,
    "line": _named("line"),
    "state": _state,
    "trigger": _named("trigger"),
    "level": _level,
    "text": _text,
    "label": _text,
    "choice": _choice,
}


def place_of(operands: tuple[Operand, ...]) -> Place:
    """Where a list of operands stands."""
    return operands[0].place.to(operands[-1].place)
