"""Operand of the tree → exact value with its kind.

Sums and differences need equal kinds, products and quotients combine them.  Everything is an exact
rational in base units (V, s, m, K, eV, T, F, u, e); nothing is rounded here.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Protocol

from wellseq.base.names import printable
from wellseq.base.place import Place
from wellseq.base.quantity import PLAIN, Kind, Quantity, QuantityError, Spread, kind_name, unit_of
from wellseq.text.tree import Binary, Name, Negative, Number, Operand, Spreading

MAGNITUDE_MAX = Fraction(10) ** 60
"""No value, in base units, may be larger than this, nor smaller than its inverse unless zero."""
BITS_MAX = 4096
"""A longer numerator or denominator comes from a runaway product, not from a laboratory."""


@dataclass(frozen=True, slots=True)
class Share(Quantity):
    """A plain number that was written in per cent; after `±` it is a share of the value before."""


@dataclass(frozen=True, slots=True)
class Unknown:
    """Stands where a mistake was already reported, so that it is reported once."""


UNKNOWN = Unknown()
Value = Quantity | Spread | Unknown


class Names(Protocol):
    """Where an expression finds the values of its names, and where its mistakes go."""

    def value_of(self, name: Name) -> Value:
        """The value behind a name; reports a name that is unknown or has no value."""

    def report(self, name: str, place: Place, message: str, hint: str = "") -> Unknown:
        """Record a mistake under the name of the bad thing."""


_UNITS: dict[str, tuple[Fraction, Kind]] = {}


def evaluate(operand: Operand, names: Names) -> Value:
    """The value of an operand, or UNKNOWN when a mistake was reported instead.

    Recursion is as deep as the parentheses of the text; chains of operators are walked in a loop.
    """
    if isinstance(operand, Number):
        return _literal(operand, names)
    if isinstance(operand, Name):
        return names.value_of(operand)
    if isinstance(operand, Binary):
        return _chain(operand, names)
    if isinstance(operand, Negative):
        inner = evaluate(operand.operand, names)
        if isinstance(inner, Spread):
            return Spread(-inner.value, inner.half_width, inner.kind)
        return _like(inner, -inner.value) if isinstance(inner, Quantity) else inner
    if isinstance(operand, Spreading):
        return _spread(operand, names)
    return names.report("unit-mismatch", operand.place, "a value with its unit is needed here")


def spoken(value: Quantity | Spread) -> str:
    """A value in base units as it is written in a message, `-4500 V` or `80000 ± 24000`."""
    unit = "" if value.kind == PLAIN else " " + kind_name(value.kind)
    if isinstance(value, Spread) and value.half_width:
        return f"{float(value.value):.6g} ± {float(value.half_width):.6g}{unit}"
    return f"{float(value.value):.6g}{unit}"


def _literal(number: Number, names: Names) -> Quantity | Unknown:
    unit = _UNITS.get(number.unit)
    if unit is None:
        try:
            unit = unit_of(number.unit)
        except QuantityError as error:
            return names.report(
                "unit-mismatch", number.place, printable(str(error)), printable(error.hint)
            )
        if len(_UNITS) < 1000:
            _UNITS[number.unit] = unit
    factor, kind = unit
    value = number.value * factor
    made = Share(value) if number.unit == "%" else Quantity(value, kind)
    return _bounded(made, number.place, names)


def _bounded(value: Quantity, place: Place, names: Names) -> Quantity | Unknown:
    exact = value.value
    size = max(exact.numerator.bit_length(), exact.denominator.bit_length())
    if size <= 190 or not exact:  # surely within the bounds, without comparing rationals
        return value
    if size > BITS_MAX or not 1 / MAGNITUDE_MAX <= abs(exact) <= MAGNITUDE_MAX:
        return names.report("too-large", place, "this value is beyond what can be calculated with")
    return value


def _like(old: Quantity, value: Fraction) -> Quantity:
    return Share(value) if isinstance(old, Share) else Quantity(value, old.kind)


def _chain(operand: Binary, names: Names) -> Quantity | Unknown:
    """Evaluate `a op b op c …` from the left; every right operand is looked at, whatever failed."""
    pending = []
    node: Operand = operand
    while isinstance(node, Binary):
        pending.append(node)
        node = node.left
    left, left_place = _single(node, names), node.place
    for step in reversed(pending):
        right = _single(step.right, names)
        if isinstance(left, Quantity) and isinstance(right, Quantity):
            left = _combine(step, left, right, left_place, names)
        else:
            left = UNKNOWN
        left_place = step.place
    return left


def _single(operand: Operand, names: Names) -> Quantity | Unknown:
    """A value without a spread: only such values can be added or multiplied."""
    value = evaluate(operand, names)
    if isinstance(value, Spread):
        return names.report(
            "unit-mismatch",
            operand.place,
            "a value with ± cannot be calculated with",
            "write the result with its own ±",
        )
    return value


def _combine(
    step: Binary, left: Quantity, right: Quantity, left_place: Place, names: Names
) -> Quantity | Unknown:
    if step.op in "+-":
        if left.kind != right.kind:
            return names.report(
                "unit-mismatch",
                step.right.place,
                f"this is in {kind_name(right.kind)}, and the value before it in "
                f"{kind_name(left.kind)}",
                "only values of one kind can be added or subtracted",
            )
        value = left.value + right.value if step.op == "+" else left.value - right.value
        both = isinstance(left, Share) and isinstance(right, Share)
        made = Share(value) if both else Quantity(value, left.kind)
    elif step.op == "*":
        kind = tuple(a + b for a, b in zip(left.kind, right.kind, strict=True))
        share = kind == PLAIN and (isinstance(left, Share) or isinstance(right, Share))
        made = (
            Share(left.value * right.value) if share else Quantity(left.value * right.value, kind)
        )
    elif not right.value:
        return names.report(
            "unit-mismatch", step.right.place, "this is zero, and nothing can be divided by it"
        )
    else:
        kind = tuple(a - b for a, b in zip(left.kind, right.kind, strict=True))
        share = kind == PLAIN and isinstance(left, Share) and not isinstance(right, Share)
        made = (
            Share(left.value / right.value) if share else Quantity(left.value / right.value, kind)
        )
    return _bounded(made, left_place.to(step.right.place), names)


def _spread(operand: Spreading, names: Names) -> Spread | Unknown:
    centre = _single(operand.value, names)
    half = _single(operand.spread, names)
    if not (isinstance(centre, Quantity) and isinstance(half, Quantity)):
        return UNKNOWN
    place = operand.spread.place
    if half.value < 0:
        return names.report("unit-mismatch", place, "a spread cannot be negative")
    if isinstance(half, Share):
        return Spread(centre.value, abs(centre.value) * half.value, centre.kind)
    if half.kind != centre.kind:
        return names.report(
            "unit-mismatch",
            place,
            f"this spread is in {kind_name(half.kind)}, and its value in {kind_name(centre.kind)}",
            f"write it in {kind_name(centre.kind)} or in per cent",
        )
    return Spread(centre.value, half.value, centre.kind)


def needs(
    value: Quantity | Spread, kind: Kind, sign: str, place: Place, what: str, names: Names
) -> bool:
    """Whether a value has the kind and sign that are needed; reports it where not.

    A spread must not reach below zero where its value may not.
    """
    if value.kind != kind:
        names.report(
            "unit-mismatch",
            place,
            f"{what} needs {KINDS.get(kind_name(kind), kind_name(kind))}, and this is "
            f"{spoken(value)}",
            f"write for example {sample(kind)}",
        )
        return False
    lowest = value.value - value.half_width if isinstance(value, Spread) else value.value
    if sign == "positive" and value.value <= 0:
        names.report(
            "unit-mismatch", place, f"{what} needs a value above zero, and this is {spoken(value)}"
        )
        return False
    if sign != "any" and lowest < 0:
        names.report(
            "unit-mismatch", place, f"{what} cannot be below zero, and this is {spoken(value)}"
        )
        return False
    return True


KINDS: Mapping[str, str] = {
    "V": "a voltage (V)",
    "s": "a time (s)",
    "Hz": "a frequency (Hz)",
    "m": "a length (m)",
    "K": "a temperature (K)",
    "eV": "an energy (eV)",
    "1/m3": "a density (/cm3)",
    "/m3": "a density (/cm3)",
    "u": "a mass (u)",
    "e": "a charge (e)",
    "plain number": "a plain number",
}
"""How a kind is spoken of, by its name in base units."""

_SAMPLES = {
    "V": "'12 V'",
    "s": "'20 ms'",
    "Hz": "'0.4 MHz'",
    "plain number": "'12'",
    "/m3": "'1e8 /cm3'",
}


def sample(kind: Kind) -> str:
    """A value of a kind, for a hint."""
    word = kind_name(kind)
    return _SAMPLES.get(word, f"'12 {word}'")
