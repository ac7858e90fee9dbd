"""Characters and spellings that have no meaning in a sequence → what to write in their place."""

from __future__ import annotations

import re
import unicodedata

from wellseq.base.names import RESERVED, normal, printable
from wellseq.base.quantity import QuantityError, unit_of
from wellseq.text.mistakes import quoted

CONTROL_IN_TEXT = re.compile(
    "[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\u061c\u200e\u200f\u202a-\u202e\u2066-\u2069\ud800-\udfff]"
)
"""Control characters and those that turn the direction of writing (Unicode UAX #9)."""

_JUNK = re.compile(r"""[^\w\s"#(){}=,;*/+\-−±.%\x00-\x1f\x7f-\x9f\u200b-\u206f]++""")
_INSTEAD = {
    "[": "a block stands in '{ }', a list has no brackets",
    "]": "a block stands in '{ }', a list has no brackets",
    "'": "a text stands between two '\"'",
    "`": "a text stands between two '\"'",
    "“": "a text stands between two plain '\"'",
    "”": "a text stands between two plain '\"'",
    "„": "a text stands between two plain '\"'",
    "«": "a text stands between two plain '\"'",
    "»": "a text stands between two plain '\"'",
    "‘": "a text stands between two plain '\"'",
    "’": "a text stands between two plain '\"'",
    "–": "the minus sign is '-'",
    "—": "the minus sign is '-'",
    "‐": "the minus sign is '-'",
    "‑": "the minus sign is '-'",
    "×": "multiplication is '*'",
    "·": "multiplication is '*'",
    "÷": "division is '/'",
    "^": "there are no powers; a density is written in '/cm3' or '/m3'",
    "<": "write 'below'",
    ">": "write 'above'",
    ":": "a label is a text between two '\"' before its step, without ':'",
    ".": "a number begins with a digit, 0.5; a span has two points, C4..C8",
    "…": "a span has two points, C4..C8",
    "%": "'%' stands directly after a number",
    "°": "temperatures are in K",
    "\\": "a statement goes on after ',' or before a word such as 'over'; no sign is needed",
    "&": "use 'and'",
    "→": "use 'to'",
}


def begins_a_name(char: str) -> bool:
    """Whether a name may begin with the character: a letter of any script or `_`; `""` is none."""
    return char == "_" or char.isalpha()


def goes_on_a_word(char: str) -> bool:
    """Whether a name may go on with it: letters, `_`, digits 0 to 9, combining marks."""
    if char.isascii():
        return char.isalnum() or char == "_"
    return unicodedata.category(char)[0] in "LM"


def word_end(source: str, start: int) -> int:
    """The offset after the last character of the word that begins at `start`."""
    end = start
    while end < len(source) and goes_on_a_word(source[end]):
        end += 1
    return end


def unit_in_disguise(word: str) -> str | None:
    """The unit that a word is after NFC, such as one with the Kelvin sign U+212A, or None."""
    composed = normal(word) if len(word) < 10 else word
    try:
        unit_of(composed)
    except QuantityError:
        return None
    return composed


def glued_hint(number: str, word: str) -> str:
    """What to write for a number that a word follows without a blank."""
    if word.strip("_0123456789") == "":
        return f"write the digits without '_': {quoted(number + word.replace('_', ''))}"
    if word in RESERVED:
        return f"put a blank between the number and '{word}'"
    return "no name begins with a digit; a unit stands after its number, '12 V'"


def decimal_comma(written: str) -> tuple[str, str]:
    """Message and hint for `1,5 V`: both readings when it may be a thousand."""
    message = f"{quoted(written)} has a comma in its number"
    with_point = quoted(written.replace(",", "."))
    _, _, after = written.partition(",")
    if re.match(r"[0-9]{3}(?![0-9])", after):
        without = quoted(written.replace(",", ""))
        return message, f"write {without} for a thousand, {with_point} for a fraction"
    return message, f"write {with_point}; values of a list each have a unit and a blank after ','"


def control(char: str) -> tuple[str, str]:
    """Message and hint for a character that cannot be seen or turns the text around it."""
    name = unicodedata.name(char, "")
    shown = f"U+{ord(char):04X}" + (f" ({name.lower()})" if name else "")
    return f"the invisible character {shown} stands here", "delete it"


def explain(source: str, start: int) -> tuple[int, str, str]:
    """What is wrong with the character at `start`: the offset after it, a message and a hint.

    A run of the same trouble is one mistake.
    """
    char = source[start]
    category = unicodedata.category(char)
    if category[0] in "CZ":
        return _run_of(char, source, start), *control(char)
    if category[0] == "N":
        end = start
        while end < len(source) and unicodedata.category(source[end])[0] == "N":
            end += 1
        digits = "".join(_ascii_digit(other) for other in source[start:end][:40])
        hint = f"write {quoted(digits)}" if digits.isdecimal() else "numbers have digits 0 to 9"
        return end, f"{quoted(source[start:end])} is not written with digits 0 to 9", hint
    if category[0] == "M":
        return _run_of(char, source, start), "a combining mark stands without its letter", ""
    junk = _JUNK.match(source, start)
    end = junk.end() if junk else start + 1
    message = f"{quoted(source[start:end])} has no meaning here"
    return end, message, _INSTEAD.get(char, f"'{printable(char)}' is not part of the language")


def _run_of(char: str, source: str, start: int) -> int:
    run = re.compile(re.escape(char) + "++").match(source, start)
    return run.end() if run else start + 1


def _ascii_digit(char: str) -> str:
    if char.isascii():
        return char
    value = unicodedata.digit(char, None)
    return "?" if value is None else str(value)
