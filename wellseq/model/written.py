"""How each kind of value is written in a trap file: a TOML value → an SI value of a model's field.

A quantity is a text with its unit; a bare TOML number where a unit is needed is refused.  Code that
builds models itself hands over numbers in base units (V, s, m, K, T, F) instead; the context
WRITTEN tells the two apart.  A fault is raised as a pydantic error whose context holds the name of
the bad thing, a sentence and a hint, so that it can be shown at the key's place.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable
from fractions import Fraction
from typing import TypeVar

from pydantic import AfterValidator, BeforeValidator, PlainValidator, ValidationInfo
from pydantic_core import PydanticCustomError

from wellseq.base.names import RESERVED, nearest, normal, printable
from wellseq.base.quantity import (
    NUMBER,
    RESERVED_UNIT_WORDS,
    QuantityError,
    read_quantity,
    read_spread,
)
from wellseq.model.bounds import Bounds, bounds
from wellseq.text.mistakes import quoted
from wellseq.text.near_units import near_unit
from wellseq.text.odd import begins_a_name, decimal_comma, goes_on_a_word

WRITTEN = "written"
"""The validation context of values that come from a trap file."""
FAULT = "trap_fault"
"""The pydantic error type of every fault raised here."""
QUANTITY_LENGTH_MAX = 100
NAME_LENGTH_MAX = 64
TEXT_LENGTH_MAX = 4000

Number = int | float | Fraction
T = TypeVar("T")


def fault(name: str, message: str, hint: str = "") -> PydanticCustomError:
    """An error for one value: the name of the bad thing, a sentence, what would be right."""
    return PydanticCustomError(
        "trap_fault", "{message}", {"name": name, "message": message, "hint": hint}
    )


def shown(value: object) -> str:
    """A written value for a message: short, harmless to a terminal, never a whole table."""
    if isinstance(value, str):
        return quoted(value)
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, Number):
        return quoted(str(value))[1:-1]
    kinds = {dict: "a table", list: "a list", type(None): "nothing"}
    return kinds.get(type(value), "a date or a time")


def exact(unit: str, within: Bounds) -> PlainValidator:
    """An exact quantity of the kind of `unit`: Fraction in base units."""

    def read(value: object, info: ValidationInfo) -> Fraction:
        return _admitted(_quantity(value, unit, info), within, value)

    return PlainValidator(read)


def real(unit: str, within: Bounds) -> PlainValidator:
    """A quantity of the kind of `unit` rounded once to a float in base units."""

    def read(value: object, info: ValidationInfo) -> float:
        return float(_admitted(_quantity(value, unit, info), within, value))

    return PlainValidator(read)


def plain(within: Bounds) -> PlainValidator:
    """A number without a unit, written bare (`10`, `2.5`)."""

    def read(value: object, info: ValidationInfo) -> float:
        if isinstance(value, str) and _is_number(value):
            raise fault("syntax", f"{shown(value)} is a text", "write the number without quotes")
        return float(_admitted(_number(value), within, value))

    return PlainValidator(read)


def whole(within: Bounds) -> PlainValidator:
    """A whole number, written bare (`16`)."""

    def read(value: object, info: ValidationInfo) -> int:
        if isinstance(value, bool) or not isinstance(value, int):
            raise fault("syntax", f"{shown(value)} is not a whole number", f"{within}, no quotes")
        _admitted(Fraction(value), within, value)
        return value

    return PlainValidator(read)


def spread(unit: str, within: Bounds) -> PlainValidator:
    """A value with the half-width of its declared interval, both floats in base units.

    Both ends of the interval must lie within the bounds.
    """

    def read(value: object, info: ValidationInfo) -> tuple[float, float]:
        if isinstance(value, tuple) and info.context != WRITTEN and len(value) == 2:
            centre, half = _number(value[0]), _number(value[1])
        else:
            centre, half = _spread(value, unit, info)
        for end in (centre - half, centre + half):
            _admitted(end, within, value)
        return float(centre), float(half)

    return PlainValidator(read)


def flag() -> PlainValidator:
    """`true` or `false`."""

    def read(value: object) -> bool:
        if not isinstance(value, bool):
            raise fault("syntax", f"{shown(value)} is neither", "write true or false, no quotes")
        return value

    return PlainValidator(read)


def text(most: int = TEXT_LENGTH_MAX) -> PlainValidator:
    """A free text of at most `most` characters, without control characters but line ends."""

    def read(value: object) -> str:
        string = _string(value)
        if len(string) > most:
            raise fault("too-large", "this text is too long", f"at most {most} characters")
        bare = string.translate({ord("\n"): " ", ord("\t"): " "})
        if printable(bare) != bare:
            raise fault("syntax", "this text holds control characters", "plain letters and signs")
        return string

    return PlainValidator(read)


def name() -> PlainValidator:
    """A name that a sequence can use: a letter or `_`, then letters, marks, digits, `_`."""

    def read(value: object) -> str:
        word = word_of(value)
        if word in RESERVED or word == "others":
            raise fault("name-reused", f"'{word}' is a word of the language", "take another name")
        if word.translate({0xB5: "u", 0x3BC: "u"}) in RESERVED_UNIT_WORDS:
            raise fault("name-reused", f"'{word}' is a unit", "take another name")
        return word

    return PlainValidator(read)


def state() -> PlainValidator:
    """A state of a line: spelled like a name, but any word may be one (`on`)."""
    return PlainValidator(word_of)


def mention() -> PlainValidator:
    """The name of something else of the trap file; whether that exists is looked at later."""
    return PlainValidator(lambda value: normal(_string(value)))


def level() -> PlainValidator:
    """A level of a switch: volts, or the name of a converter output."""

    def read(value: object, info: ValidationInfo) -> float | str:
        if isinstance(value, str) and is_name(normal(value)):
            return normal(value)
        return float(_admitted(_quantity(value, "V", info), VOLTS, value))

    return PlainValidator(read)


def choice(*words: str, refused: dict[str, str] | None = None) -> PlainValidator:
    """One of a few words; `refused` are words with the reason why they are not understood yet."""

    def read(value: object) -> str:
        word = _string(value)
        if refused and word in refused:
            raise fault("trap-not-sound", refused[word])
        if word not in words:
            raise fault("unknown-name", f"{shown(word)} is not known here", nearest(word, words))
        return word

    return PlainValidator(read)


def listing(least: int, most: int, example: str) -> BeforeValidator:
    """A list of so many values, told by an example; what its elements are is said by the field."""

    def read(value: object) -> object:
        if not isinstance(value, (list, tuple)):
            raise fault("syntax", f"{shown(value)} is not a list", f"write for example {example}")
        if not least <= len(value) <= most:
            count = f"{least}" if least == most else f"{least} to {most}"
            hint = f"{count} values, for example {example}"
            raise fault("syntax", f"this list has {len(value)} values", hint)
        return value

    return BeforeValidator(read)


def sound(test: Callable[[T], bool], message: str, hint: str = "") -> AfterValidator:
    """A demand on a value as read; what does not meet it is no sound trap."""

    def read(value: T) -> T:
        if not test(value):
            raise fault("trap-not-sound", message, hint)
        return value

    return AfterValidator(read)


def is_name(word: str) -> bool:
    """Whether a word (in NFC) is spelled like a name: letters of any script, marks, digits, `_`."""
    return (
        0 < len(word) <= NAME_LENGTH_MAX
        and begins_a_name(word[0])
        and all(goes_on_a_word(char) for char in word)
    )


def word_of(value: object) -> str:
    """The word in NFC; raises the fault of a value that is not spelled like a name."""
    word = normal(_string(value))
    if not is_name(word):
        hint = f"a letter, then letters, digits and _; at most {NAME_LENGTH_MAX}, no blanks"
        raise fault("syntax", f"{shown(word)} is not a name", hint)
    return word


VOLTS = bounds("V", least="-1e6", most="1e6")


def _string(value: object) -> str:
    if not isinstance(value, str):
        raise fault("syntax", f"{shown(value)} is not a text", "write it in quotes")
    return value


def _number(value: object) -> Fraction:
    if isinstance(value, bool) or not isinstance(value, Number):
        raise fault("syntax", f"{shown(value)} is not a number")
    if isinstance(value, float) and not math.isfinite(value):
        raise fault("trap-not-sound", f"{value} is not a finite number")
    return Fraction(value)


def _is_number(value: str) -> bool:
    return re.fullmatch(rf"[+-]?{NUMBER}", value.strip()[:QUANTITY_LENGTH_MAX]) is not None


def _admitted(value: Fraction, within: Bounds, written: object) -> Fraction:
    if not within.admit(value):
        raise fault("trap-not-sound", f"{shown(written)} is out of range", str(within))
    return value


def _quantity(value: object, unit: str, info: ValidationInfo) -> Fraction:
    if info.context != WRITTEN and isinstance(value, Number):
        return _number(value)
    return _parsed(value, unit, read_quantity)


def _spread(value: object, unit: str, info: ValidationInfo) -> tuple[Fraction, Fraction]:
    if isinstance(value, Number) and (info.context != WRITTEN or not unit):
        return _number(value), Fraction(0)
    read = _parsed(value, unit, read_spread)
    return read.value, read.half_width


def _parsed(value: object, unit: str, read: Callable[[str, str], T]) -> T:
    """Read a quantity in a text; says what is wrong with anything else."""
    if isinstance(value, Number) and not isinstance(value, bool):
        hint = f'write it in quotes with its unit, for example "{shown(value)} {unit or "± 0"}"'
        raise fault("unit-mismatch", f"{shown(value)} has no unit", hint)
    if not isinstance(value, str):
        raise fault("syntax", f"{shown(value)} is not a quantity", f'for example "12 {unit}"')
    if len(value) > QUANTITY_LENGTH_MAX:
        raise fault("too-large", "this quantity is too long", f'for example "12 {unit}"')
    try:
        return read(value, unit)
    except QuantityError as error:
        raise _quantity_fault(value, unit, error, read) from None


def _quantity_fault(
    value: str, unit: str, error: QuantityError, read: Callable[[str, str], T]
) -> PydanticCustomError:
    if re.search(r"[0-9],[0-9]", value):
        return fault("unit-mismatch", *decimal_comma(value.strip()))
    try:
        read(re.sub(NUMBER, "1", value), unit)
    except QuantityError:
        word = re.search(r"'(\S+)' is not a unit", str(error))
        near = near_unit(word.group(1)) if word else None
        hint = f"the unit is '{near}'" if near else printable(error.hint)
        return fault("unit-mismatch", printable(str(error)), hint)
    # With small numbers in its place it reads well, so the number itself is what is wrong.
    return fault("too-large", printable(str(error)), printable(error.hint))
