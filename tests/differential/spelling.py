"""Exact values → the many ways in which a file may write them, chosen at random."""

from __future__ import annotations

from dataclasses import dataclass, field
from fractions import Fraction
from random import Random

_POWERS = {
    "V": {"V": 0, "mV": -3, "kV": 3, "uV": -6, "µV": -6, "μV": -6},
    "s": {"s": 0, "ms": -3, "us": -6, "µs": -6, "μs": -6, "ns": -9},
    "Hz": {"Hz": 0, "kHz": 3, "MHz": 6, "GHz": 9},
    "": {"": 0, "%": -2},
}
DIGITS_MAX = 12


def decimal(number: Fraction, power: int) -> str | None:
    """number / 10^power, not negative, as a decimal; None when that would be long or endless."""
    rest, twos, fives = number.denominator, 0, 0
    while rest % 2 == 0:
        rest, twos = rest // 2, twos + 1
    while rest % 5 == 0:
        rest, fives = rest // 5, fives + 1
    digits = max(twos, fives) + power
    if rest != 1 or digits > DIGITS_MAX:
        return None
    text = str(int(number * 10 ** max(twos, fives))) + "0" * -digits
    if digits <= 0:
        return text
    text = text.rjust(digits + 1, "0")
    return f"{text[:-digits]}.{text[-digits:].rstrip('0')}".rstrip(".")


@dataclass
class Speller:
    """Writes values; `lets` are names that stand for known values, by unit."""

    rng: Random
    lets: dict[str, dict[str, Fraction]] = field(default_factory=dict)
    used: set[str] = field(default_factory=set)

    def literal(self, value: Fraction, unit: str) -> str:
        """One number with its unit, in one of the units that write it without end."""
        fitting = [
            (word, written)
            for word, power in _POWERS[unit].items()
            if (written := decimal(abs(value), power)) and len(written) < 14
        ]
        if not fitting:
            return self._quotient(value, unit)
        word, written = self.rng.choice(fitting)
        if self.rng.random() < 0.15:
            written = self._exponent(written)
        gap = self.rng.choice(["", " ", " ", " "]) if word else ""
        sign = self.rng.choice("-−") if value < 0 else ""
        return f"{sign}{written}{gap}{word}"

    def _exponent(self, written: str) -> str:
        """The same number with an exponent."""
        whole, _, part = written.partition(".")
        shift = self.rng.randint(1, 3)
        part = part.ljust(shift, "0")
        moved = f"{whole}{part[:shift]}.{part[shift:]}".rstrip(".")
        return f"{moved}{self.rng.choice('eE')}{self.rng.choice('-−')}{shift}"

    def _quotient(self, value: Fraction, unit: str) -> str:
        """A value without a finite decimal, as a literal divided by a whole number."""
        divisor = value.denominator
        while divisor % 2 == 0 or divisor % 5 == 0:
            divisor //= 2 if divisor % 2 == 0 else 5
        return f"({self.literal(value * divisor, unit)} / {divisor})"

    def value(self, value: Fraction, unit: str, depth: int = 2) -> str:
        """An expression that has exactly this value."""
        rng = self.rng
        if depth == 0 or rng.random() < 0.5:
            return self.literal(value, unit)
        form = rng.randrange(7)
        if form == 0:
            part = Fraction(rng.randint(1, 40), 4) * self._size(unit)
            sign = rng.choice("+-")
            rest = value - part if sign == "+" else value + part
            return f"{self.value(rest, unit, depth - 1)} {sign} {self.literal(part, unit)}"
        if form == 1:
            times = rng.choice([2, 4, 5, 8])
            factor = self.value(Fraction(times), "", 0)
            return f"{factor} * {self.literal(value / times, unit)}"
        if form == 2:
            by = rng.choice([2, 4, 5, 3])
            return f"{self.literal(value * by, unit)} / {by}"
        if form == 3:
            return f"({self.value(value, unit, depth - 1)})"
        if form == 4 and unit != "":
            return f"-({self.value(-value, unit, depth - 1)})"
        if form == 5 and unit in ("s", "Hz") and value > 0:
            return f"1 / {self.literal(1 / value, 'Hz' if unit == 's' else 's')}"
        return self._with_let(value, unit)

    def _size(self, unit: str) -> Fraction:
        return {"V": Fraction(1), "s": Fraction(1, 1000), "Hz": Fraction(10**5)}.get(
            unit, Fraction(1)
        )

    def _with_let(self, value: Fraction, unit: str) -> str:
        known = self.lets.get(unit)
        if not known:
            return self.literal(value, unit)
        name = self.rng.choice(sorted(known))
        self.used.add(name)
        rest = value - known[name]
        if rest == 0:
            return name
        sign = "+" if rest > 0 else "-"
        return f"{name} {sign} {self.literal(abs(rest), unit)}"
