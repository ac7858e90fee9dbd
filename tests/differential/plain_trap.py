"""A trap file → the few facts that an interpreter of sequences needs; read by tomllib alone.

Everything exact is a Fraction in base units (V, s); nothing here comes from the package.
"""

from __future__ import annotations

import re
import tomllib
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from math import gcd, lcm
from pathlib import Path

_PREFIX = {"": 0, "k": 3, "M": 6, "G": 9, "m": -3, "u": -6, "n": -9, "p": -12, "c": -2}
_WORDS = {
    "V": "kmu",
    "s": "mun",
    "m": "mcu",
    "Hz": "kMG",
    "K": "m",
    "eV": "mk",
    "T": "m",
    "F": "pn",
}
POWERS: dict[str, tuple[Fraction, dict[str, int]]] = {
    prefix + word: (Fraction(10) ** _PREFIX[prefix], {word: 1})
    for word, prefixes in _WORDS.items()
    for prefix in ("", *prefixes)
}
POWERS |= {name: (scale, {"s": -1}) for name, (scale, _) in POWERS.items() if name.endswith("Hz")}
POWERS |= {
    "": (Fraction(1), {}),
    "%": (Fraction(1, 100), {}),
    "min": (Fraction(60), {"s": 1}),
    "u": (Fraction(1), {"u": 1}),
    "e": (Fraction(1), {"e": 1}),
    "/m3": (Fraction(1), {"m": -3}),
    "/cm3": (Fraction(10**6), {"m": -3}),
}
_WRITTEN = re.compile(r"\s*(-?[0-9.]+(?:[eE][+-]?[0-9]+)?)\s*([A-Za-z/%]\S*)?\s*")


@dataclass(frozen=True)
class Value:
    """A number in base units and the powers of its units."""

    number: Fraction
    powers: tuple[tuple[str, int], ...] = ()


def with_unit(number: Fraction, unit: str) -> Value:
    """A number and its unit word, or a quotient of two, as a value in base units."""
    if unit in POWERS:
        scale, powers = POWERS[unit]
        return Value(number * scale, tuple(sorted(powers.items())))
    top, bottom = unit.split("/")
    return quotient(with_unit(number, top), with_unit(Fraction(1), bottom))


def product(one: Value, other: Value, sign: int = 1) -> Value:
    """one · other, or with sign -1 one / other."""
    powers = dict(one.powers)
    for word, power in other.powers:
        powers[word] = powers.get(word, 0) + sign * power
    kept = tuple(sorted((word, power) for word, power in powers.items() if power))
    return Value(one.number * other.number**sign, kept)


def quotient(one: Value, other: Value) -> Value:
    """one / other."""
    return product(one, other, -1)


def read(text: str) -> Fraction:
    """The centre of a text such as `1.0003 ± 0.0001` or `12 V/us`, in base units."""
    match = _WRITTEN.fullmatch(text.split("±")[0])
    assert match, text
    number, unit = match.groups()
    return with_unit(Fraction(number), unit or "").number


@dataclass(frozen=True)
class Converter:
    """A converter output; low and high are nominal volts."""

    name: str
    low: Fraction
    high: Fraction
    bits: int
    clock: Fraction
    line: bool
    gain: Fraction
    offset: Fraction
    rest: Fraction

    def electrode_V(self, code: Fraction) -> Fraction:
        """Volts at the electrode for a code, which need not be whole."""
        nominal = self.low + code * (self.high - self.low) / (2**self.bits - 1)
        return self.gain * nominal + self.offset

    @cached_property
    def zero_V(self) -> Fraction:
        """Electrode volts for code 0."""
        return self.electrode_V(Fraction(0))

    @cached_property
    def code_V(self) -> Fraction:
        """Electrode volts from one code to the next."""
        return self.electrode_V(Fraction(1)) - self.zero_V


@dataclass(frozen=True)
class Switch:
    """A two-level output; a level is volts or the name of a converter."""

    name: str
    levels: tuple[Fraction | str, ...]
    edge: Fraction
    delay: Fraction
    clock: Fraction
    rest: int


@dataclass(frozen=True)
class PlainTrap:
    """A trap file: electrodes in order → output; outputs, lines and triggers by name."""

    electrodes: dict[str, str]
    sectors: dict[str, int]
    converters: dict[str, Converter]
    switches: dict[str, Switch]
    lines: dict[str, dict]
    triggers: dict[str, dict]
    staircase: Fraction
    field_sign: int

    @property
    def clocks(self) -> list[Fraction]:
        """The clocks of all outputs, s."""
        return [out.clock for out in (*self.converters.values(), *self.switches.values())]

    @cached_property
    def beat(self) -> Fraction:
        """The least common multiple of the clocks of all outputs, s."""
        common = lcm(*(clock.denominator for clock in self.clocks))
        return Fraction(lcm(*(int(clock * common) for clock in self.clocks)), common)

    @cached_property
    def tick(self) -> Fraction:
        """The greatest common divisor of all clocks, those of lines too, s."""
        clocks = [*self.clocks, *(read(line["clock"]) for line in self.lines.values())]
        common = lcm(*(clock.denominator for clock in clocks))
        return Fraction(gcd(*(int(clock * common) for clock in clocks)), common)

    def line_clock(self, line: str) -> Fraction:
        """The clock of a digital line, s."""
        return read(self.lines[line]["clock"])


def load(path: Path) -> PlainTrap:
    """Read a trap file that is known to be sound."""
    raw = tomllib.loads(path.read_text(encoding="utf-8"))
    electrodes = {item["name"]: item["output"] for item in raw["electrode"]}
    rests = {electrodes.get(key, key): value for key, value in raw.get("rest", {}).items()}
    outputs = raw["output"]
    converters = [_converter(item, rests) for item in outputs if item.get("kind") != "switch"]
    names = {item.name for item in converters}
    switches = [_switch(item, names, rests) for item in outputs if item.get("kind") == "switch"]
    along = raw["field"].get("along")
    uniform = along[0][1] if along else raw["field"]["uniform"]
    return PlainTrap(
        electrodes,
        {item["name"]: item.get("sectors", 1) for item in raw["electrode"]},
        {item.name: item for item in converters},
        {item.name: item for item in switches},
        {item["name"]: item for item in raw.get("line", [])},
        {item["name"]: item for item in raw.get("trigger", [])},
        read(raw["margins"]["staircase"]),
        1 if read(uniform) > 0 else -1,
    )


def _converter(item: dict, rests: dict) -> Converter:
    low, high = (read(end) for end in item["range"])
    return Converter(
        item["name"],
        low,
        high,
        item["bits"],
        read(item["clock"]),
        item.get("between_rows", "hold") == "line",
        read(item.get("gain", "1")),
        read(item.get("offset", "0 V")),
        read(rests.get(item["name"], "0 V")),
    )


def _switch(item: dict, converters: set[str], rests: dict) -> Switch:
    def level(text: str) -> Fraction | str:
        return text if text in converters else read(text)

    levels = tuple(level(text) for text in item["levels"])
    rest = rests.get(item["name"])
    return Switch(
        item["name"],
        levels,
        read(item["edge"]),
        read(item.get("delay", "0 s")),
        read(item["clock"]),
        0 if rest is None else levels.index(level(rest)),
    )
