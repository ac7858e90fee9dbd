"""Numbers that no model can work with → the reasons why there is no figure.

Every model asks here first, so that a cloud without particles, at 0 K, or with a number that is not
known ends in a sentence and not in an endless solve.  Units are those in the names.
"""

from __future__ import annotations

import math

from wellseq.clouds.figures import Outside

_UNITS = {"per": "", "T": "T", "K": "K", "m": "m", "s": "s", "kg": "kg", "V": "V", "eV": "eV"}


def unusable(model: str, **quantities: float) -> tuple[Outside, ...]:
    """What is not a finite number above zero among `quantities`, named `what_unit`, SI."""
    return tuple(
        Outside(model, _words(name), value, 0.0, unit_of(name), "above")
        for name, value in quantities.items()
        if not (math.isfinite(value) and value > 0.0)
    )


def negative(model: str, **quantities: float) -> tuple[Outside, ...]:
    """What is not a finite number of at least zero among `quantities`, named `what_unit`, SI."""
    return tuple(
        Outside(model, _words(name), value, 0.0, unit_of(name), "at least")
        for name, value in quantities.items()
        if not (math.isfinite(value) and value >= 0.0)
    )


def unit_of(name: str) -> str:
    """The unit at the end of a name: `K/s` for heating_K_per_s, `1/m3` for density_per_m3."""
    words = name.split("_")
    if "per" in words:
        at = words.index("per")
        above = words[at - 1] if words[at - 1] in _UNITS else "1"
        return f"{above}/{words[at + 1]}"
    return _UNITS.get(words[-1], "")


def _words(name: str) -> str:
    words = name.split("_")
    if "per" in words:
        at = words.index("per")
        words = words[: at - 1] if words[at - 1] in _UNITS else words[:at]
    elif len(words) > 1 and words[-1] in _UNITS:
        words = [*words[:-1], "temperature"] if words[-1] == "K" else words[:-1]
    return " ".join(words)
