"""Quantities: exact numbers with a kind, and the one closed table of units.

Every number of a sequence or trap file is an exact rational until it leaves this floor, so that
`20 us` is twenty whole microseconds.  `energy` (eV), `temperature` (K) and `potential` (V) are
kinds of their own and never mix.  SI prefixes: BIPM, The International System of Units, 9th ed.,
2019.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from fractions import Fraction

BASES = ("V", "s", "m", "K", "eV", "T", "F", "u", "e")
Kind = tuple[int, ...]
"""Exponents of BASES, in that order."""

PLAIN: Kind = (0,) * len(BASES)
NUMBER = r"[0-9]+(?:\.[0-9]*)?(?:[eE][+-]?[0-9]+)?"
DIGITS_MAX = 60
EXPONENT_MAX = 40


def _kind(**powers: int) -> Kind:
    return tuple(powers.get(base, 0) for base in BASES)


def _prefixed(symbol: str, powers: Kind, prefixes: str) -> dict[str, tuple[Fraction, Kind]]:
    scale = {"": 0, "G": 9, "M": 6, "k": 3, "c": -2, "m": -3, "u": -6, "n": -9, "p": -12}
    names = ["", *prefixes]
    return {name + symbol: (Fraction(10) ** scale[name], powers) for name in names}


UNITS: dict[str, tuple[Fraction, Kind]] = {
    **_prefixed("V", _kind(V=1), "kmu"),
    **_prefixed("s", _kind(s=1), "mun"),
    "min": (Fraction(60), _kind(s=1)),
    **_prefixed("m", _kind(m=1), "cmu"),
    **_prefixed("Hz", _kind(s=-1), "kMG"),
    **_prefixed("K", _kind(K=1), "m"),
    **_prefixed("eV", _kind(eV=1), "km"),
    **_prefixed("T", _kind(T=1), "m"),
    "pF": (Fraction(1, 10**12), _kind(F=1)),
    "nF": (Fraction(1, 10**9), _kind(F=1)),
    "u": (Fraction(1), _kind(u=1)),
    "e": (Fraction(1), _kind(e=1)),
    "%": (Fraction(1, 100), PLAIN),
    "/cm3": (Fraction(10**6), _kind(m=-3)),
    "/m3": (Fraction(1), _kind(m=-3)),
}
"""Unit word → (factor to the base units V, s, m, K, eV, T, F, u, e; kind)."""

RESERVED_UNIT_WORDS = frozenset(word for word in UNITS if word.isalpha())
_MICRO = str.maketrans({"µ": "u", "μ": "u"})
_LITERAL = re.compile(rf"\s*([+\-−]?)\s*({NUMBER})\s*([^\s±]*)\s*")


class QuantityError(ValueError):
    """A text is not the quantity that was asked for; `hint` says what would be right."""

    def __init__(self, message: str, hint: str = "") -> None:
        super().__init__(message)
        self.hint = hint


@dataclass(frozen=True, slots=True)
class Quantity:
    """An exact value in base units together with its kind (exponents of BASES)."""

    value: Fraction
    kind: Kind = PLAIN

    def __float__(self) -> float:
        return float(self.value)


@dataclass(frozen=True, slots=True)
class Spread:
    """A value with the half-width of its declared interval; both in base units, same kind."""

    value: Fraction
    half_width: Fraction
    kind: Kind = PLAIN


def read_number(text: str) -> Fraction:
    """Turn an ASCII decimal literal into an exact rational.

    Raises QuantityError for more than DIGITS_MAX digits or an exponent beyond EXPONENT_MAX, before
    anything large is built.
    """
    if not re.fullmatch(NUMBER, text):
        raise QuantityError(f"'{text}' is not a number", "digits 0 to 9, a point, an exponent")
    mantissa, _, exponent = text.lower().partition("e")
    if sum(char.isdigit() for char in mantissa) > DIGITS_MAX:
        raise QuantityError(f"a number of more than {DIGITS_MAX} digits")
    digits = exponent.lstrip("+-").lstrip("0")
    if len(digits) > 4 or (digits and int(digits) > EXPONENT_MAX):
        raise QuantityError(
            f"'{text}' is out of range", f"exponents go from -{EXPONENT_MAX} to {EXPONENT_MAX}"
        )
    return Fraction(text)


def unit_of(word: str) -> tuple[Fraction, Kind]:
    """Look up a unit word or a quotient such as `V/us`; the empty word is a plain number.

    Returns the factor to base units and the kind.  Raises QuantityError for an unknown word.
    """
    word = word.translate(_MICRO)
    if not word:
        return Fraction(1), PLAIN
    if word in UNITS:
        return UNITS[word]
    numerator, slash, denominator = word.partition("/")
    if slash and numerator in UNITS and denominator in UNITS:
        top, top_kind = UNITS[numerator]
        bottom, bottom_kind = UNITS[denominator]
        return top / bottom, tuple(a - b for a, b in zip(top_kind, bottom_kind, strict=True))
    raise QuantityError(f"'{word}' is not a unit", f"units: {unit_list()}")


def unit_list() -> str:
    """All unit words, in one line for a hint."""
    return " ".join(UNITS)


def kind_of(unit: str) -> Kind:
    """The kind of a unit word, for example kind_of('V/us') is potential per time."""
    return unit_of(unit)[1]


def kind_name(kind: Kind) -> str:
    """Write a kind in base units, `V/s` for (1, -1, 0, …); `plain number` when it has none."""
    if kind == kind_of("Hz"):
        return "Hz"
    top = [_power(base, n) for base, n in zip(BASES, kind, strict=True) if n > 0]
    bottom = [_power(base, -n) for base, n in zip(BASES, kind, strict=True) if n < 0]
    if not top and not bottom:
        return "plain number"
    return " ".join(top) + ("/" + "/".join(bottom) if bottom else "")


def _power(base: str, exponent: int) -> str:
    return base if exponent == 1 else f"{base}{exponent}"


def read_quantity(text: str, unit: str) -> Fraction:
    """Read a text such as `12 V/us` that must be of the kind of `unit`; base units come back.

    Raises QuantityError naming what was wanted.
    """
    match = _LITERAL.fullmatch(text)
    if not match:
        raise QuantityError(
            f"'{text}' is not a value with a unit", f"write for example {_sample(unit)}"
        )
    return _signed(match, text, unit)


def read_spread(text: str, unit: str) -> Spread:
    """Read `1.0003 ± 0.0001`, `8e4 ± 30 %` or a bare value (half-width 0) of the kind of `unit`.

    Raises QuantityError naming what was wanted.
    """
    centre_text, mark, half_text = text.replace("+-", "±").partition("±")
    centre = read_quantity(centre_text, unit)
    if not mark:
        return Spread(centre, Fraction(0), kind_of(unit))
    if half_text.rstrip().endswith("%"):
        half = abs(centre) * read_quantity(half_text, "%")
    else:
        half = read_quantity(half_text, unit)
    if half < 0:
        raise QuantityError("a spread cannot be negative")
    return Spread(centre, half, kind_of(unit))


def _signed(match: re.Match[str], text: str, unit: str) -> Fraction:
    sign, number, word = match.groups()
    factor, kind = unit_of(word)
    if kind != kind_of(unit):
        raise QuantityError(
            f"'{text.strip()}' is in {kind_name(kind)}, {kind_name(kind_of(unit))} is needed",
            f"write for example {_sample(unit)}",
        )
    value = read_number(number) * factor
    return -value if sign in ("-", "−") else value


def _sample(unit: str) -> str:
    return f"'12 {unit}'" if unit else "'12'"
