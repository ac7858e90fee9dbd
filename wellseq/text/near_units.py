"""A word after a number that is no unit → the unit its author meant, if that can be told."""

from __future__ import annotations

from difflib import get_close_matches

from wellseq.base.names import RESERVED
from wellseq.base.quantity import UNITS

_SPELLED_OUT = {
    "V": "volt volts",
    "kV": "kilovolt kilovolts",
    "mV": "millivolt millivolts",
    "uV": "microvolt microvolts",
    "s": "sec secs second seconds",
    "ms": "msec msecs millisec millisecond milliseconds",
    "us": "usec usecs microsec microsecond microseconds",
    "ns": "nsec nsecs nanosec nanosecond nanoseconds",
    "min": "mins minute minutes",
    "m": "meter meters metre metres",
    "cm": "centimeter centimeters centimetre centimetres",
    "mm": "millimeter millimeters millimetre millimetres",
    "um": "micron microns micrometer micrometers micrometre micrometres",
    "Hz": "hertz",
    "kHz": "kilohertz",
    "MHz": "megahertz",
    "GHz": "gigahertz",
    "K": "kelvin kelvins",
    "mK": "millikelvin",
    "eV": "electronvolt electronvolts",
    "keV": "kiloelectronvolt",
    "T": "tesla",
    "mT": "millitesla",
    "pF": "picofarad picofarads",
    "nF": "nanofarad nanofarads",
    "u": "amu dalton daltons",
    "%": "percent",
}
_LONG = {word: unit for unit, words in _SPELLED_OUT.items() for word in words.split()}
_SHORT = {unit.lower(): unit for unit in reversed(UNITS)}
_MICRO = str.maketrans({"µ": "u", "μ": "u"})


def near_unit(word: str) -> str | None:
    """The unit that a word such as `sec`, `kv`, `Volts` or `V/usec` was meant for, or None.

    None also for words that a statement may well have after a number, such as `smoothly`.
    """
    word = word.translate(_MICRO)
    if word in RESERVED:
        return None
    top, slash, bottom = word.partition("/")
    if not slash:
        return _near(word)
    units = [part if part in UNITS else _near(part) for part in (top, bottom)]
    return None if None in units else "/".join(str(unit) for unit in units)


def _near(word: str) -> str | None:
    folded = word.lower()
    known = _SHORT.get(folded) or _LONG.get(folded)
    if known or not 5 <= len(word) <= 20:
        return known
    close = get_close_matches(folded, _LONG, n=1, cutoff=0.85)
    return _LONG[close[0]] if close else None
