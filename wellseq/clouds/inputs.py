"""Numbers that no model can work with → the reasons why there is no figure.

Every model asks here first, so that a cloud without particles, at 0 K, or with a number that is not
known ends in a sentence and not in an endless solve.  Units are those in the names.  The bounds are
far outside of any laboratory: they only keep the arithmetic from overflowing.
"""

from __future__ import annotations

from wellseq.clouds.figures import Outside

_UNITS = ("rad", "Hz", "T", "K", "m", "s", "kg", "V", "eV")
_LEAST = 1e-30
_MOST = {"K": 1e12, "T": 1e3, "m": 1e3, "s": 1e15, "kg": 1e-15, "eV": 1e9, "": 1e20}
_MOST_ELSE = 1e30


def unusable(model: str, **quantities: float) -> tuple[Outside, ...]:
    """What is not a number above zero, and of this world, among `quantities`: `what_unit`, SI.

    A mass may be as small as particles are; anything else is at least 1e-30.
    """
    found: tuple[Outside, ...] = ()
    for name, value in quantities.items():
        least = 0.0 if name.endswith("_kg") else _LEAST
        found += _beyond(model, name, value) or _below(model, name, value, least)
    return found


def negative(model: str, **quantities: float) -> tuple[Outside, ...]:
    """What is not a number of at least zero, and of this world, among `quantities`, SI."""
    found: tuple[Outside, ...] = ()
    for name, value in quantities.items():
        reason = _beyond(model, name, value)
        if not reason and not value >= 0.0:
            reason = (Outside(model, _words(name), value, 0.0, unit_of(name), "at least"),)
        found += reason
    return found


def _below(model: str, name: str, value: float, least: float) -> tuple[Outside, ...]:
    if value > least:
        return ()
    return (Outside(model, _words(name), value, 0.0, unit_of(name), "above"),)


def _beyond(model: str, name: str, value: float) -> tuple[Outside, ...]:
    unit = unit_of(name)
    most = _MOST.get(unit, _MOST_ELSE)
    return (Outside(model, _words(name), value, most, unit),) if value > most else ()


def unit_of(name: str) -> str:
    """The unit at the end of a name: `K/s` for heating_K_per_s, `1/m3` for density_per_m3."""
    words = name.split("_")
    if "per" in words:
        at = words.index("per")
        above = words[at - 1] if words[at - 1] in _UNITS else "1"
        return f"{above}/{words[at + 1]}"
    return words[-1] if len(words) > 1 and words[-1] in _UNITS else ""


def _words(name: str) -> str:
    words = name.split("_")
    if "per" in words:
        at = words.index("per")
        words = words[: at - 1] if words[at - 1] in _UNITS else words[:at]
    elif unit_of(name):
        bare = words[:-1]
        words = bare if words[-1] != "K" or "temperature" in bare else [*bare, "temperature"]
    return " ".join(words)
