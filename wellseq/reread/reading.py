"""JSON of a published folder, read with suspicion: every value is asked for by kind and range.

Whatever is not as it must be raises `Unsound`, which becomes a finding; nothing else escapes.
Numbers become exact rationals (`Fraction`), so that later comparisons do not round.
"""

from __future__ import annotations

import json
import math
import re
from collections.abc import Iterator
from fractions import Fraction

EXACT = re.compile(r"-?(?:0|[1-9][0-9]{0,39})(?:/[1-9][0-9]{0,39})?")


class Unsound(Exception):
    """Something in a published file is not as it must be; `name` is the finding's."""

    def __init__(self, name: str, file: str, message: str, line: int = 1) -> None:
        super().__init__(message)
        self.name = name
        self.file = file
        self.message = message
        self.line = line


def parse(content: bytes, file: str, name: str) -> Part:
    """The JSON object that a file holds; it must be written in the one canonical way.

    Raises Unsound for anything that is not UTF-8 JSON with unique keys and finite numbers.
    """
    try:
        text = content.decode("utf-8")
        document = json.loads(text, object_pairs_hook=_unique, parse_constant=_no_constant)
    except (ValueError, RecursionError) as error:
        raise Unsound(name, file, f"this is not the JSON that wellseq writes: {error}") from error
    if not isinstance(document, dict):
        raise Unsound(name, file, "this holds no JSON object")
    if canonical(document) != content:
        raise Unsound(name, file, "this was not written in the order and spacing of wellseq")
    return Part(document, file, name)


def canonical(document: object) -> bytes:
    """The bytes of a JSON document as wellseq writes it: sorted keys, indent 1, a new line."""
    try:
        text = json.dumps(document, indent=1, sort_keys=True, ensure_ascii=False, allow_nan=False)
        return f"{text}\n".encode()
    except ValueError:
        # An infinite number or half a character: never written, so never equal to what was read.
        return b""


def _unique(pairs: list[tuple[str, object]]) -> dict[str, object]:
    found = dict(pairs)
    if len(found) != len(pairs):
        raise ValueError("a key is given twice")
    return found


def _no_constant(word: str) -> object:
    raise ValueError(f"{word} is not a number")


class Part:
    """One JSON object and where it stands, for sentences that name the place."""

    def __init__(self, values: dict[str, object], file: str, name: str, path: str = "") -> None:
        self.values = values
        self.file = file
        self.name = name
        self.path = path

    def wrong(self, key: str, wanted: str) -> Unsound:
        """The complaint that the value at `key` is not what is wanted."""
        return Unsound(self.name, self.file, f"'{self.path}{key}' is not {wanted}")

    def text(self, key: str) -> str:
        """A text."""
        value = self.values.get(key)
        if not isinstance(value, str):
            raise self.wrong(key, "a text")
        return value

    def word(self, key: str, *words: str) -> str:
        """One of a few words."""
        value = self.text(key)
        if value not in words:
            raise self.wrong(key, " or ".join(words))
        return value

    def flag(self, key: str) -> bool:
        """True or false."""
        value = self.values.get(key)
        if not isinstance(value, bool):
            raise self.wrong(key, "true or false")
        return value

    def whole(self, key: str, least: int = 0, most: int = 2**62) -> int:
        """A whole number within bounds."""
        value = self.values.get(key)
        if isinstance(value, bool) or not isinstance(value, int) or not least <= value <= most:
            raise self.wrong(key, f"a whole number from {least} to {most}")
        return value

    def number(self, key: str) -> Fraction:
        """A finite number, as the exact rational that its float stands for."""
        return self._number(key, self.values.get(key))

    def number_or_none(self, key: str) -> Fraction | None:
        """A finite number, or None where it is not known."""
        return None if self.values.get(key, "") is None else self.number(key)

    def exact(self, key: str, *, positive: bool = False) -> Fraction:
        """An exact rational written as text, `1/3`."""
        value = self.text(key)
        if not EXACT.fullmatch(value):
            raise self.wrong(key, "an exact number such as 1/3")
        number = Fraction(value)
        if positive and number <= 0:
            raise self.wrong(key, "positive")
        return number

    def part(self, key: str) -> Part:
        """An object within this one."""
        value = self.values.get(key)
        if not isinstance(value, dict):
            raise self.wrong(key, "an object")
        return Part(value, self.file, self.name, f"{self.path}{key}.")

    def parts(self, key: str) -> Iterator[Part]:
        """The objects of a list."""
        for index, value in enumerate(self.items(key)):
            if not isinstance(value, dict):
                raise self.wrong(f"{key}[{index}]", "an object")
            yield Part(value, self.file, self.name, f"{self.path}{key}[{index}].")

    def items(self, key: str) -> list[object]:
        """A list."""
        value = self.values.get(key)
        if not isinstance(value, list):
            raise self.wrong(key, "a list")
        return value

    def texts(self, key: str) -> tuple[str, ...]:
        """A list of texts, each once."""
        found = [value for value in self.items(key) if isinstance(value, str)]
        if len(found) != len(self.items(key)) or len(set(found)) != len(found):
            raise self.wrong(key, "a list of different texts")
        return tuple(found)

    def numbers(self, key: str, count: int | None = None) -> tuple[Fraction, ...]:
        """A list of finite numbers, of so many where `count` says so."""
        values = self.items(key)
        if count is not None and len(values) != count:
            raise self.wrong(key, f"a list of {count} numbers")
        return tuple(self._number(key, value) for value in values)

    def _number(self, key: str, value: object) -> Fraction:
        if isinstance(value, bool) or not isinstance(value, (int, float)):
            raise self.wrong(key, "a number")
        if not math.isfinite(value):
            raise self.wrong(key, "a finite number")
        return Fraction(value)
