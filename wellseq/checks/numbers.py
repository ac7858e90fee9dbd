"""Numbers with units, as people write them."""

from __future__ import annotations

import math

_STEPS = ((1e9, "G"), (1e6, "M"), (1e3, "k"), (1.0, ""), (1e-3, "m"), (1e-6, "u"), (1e-9, "n"))
_PREFIXED = frozenset({"V", "s", "m", "Hz", "V/s", "eV", "K", "T", "J", "V/V"})


def amount(value: float, unit: str) -> str:
    """Write a value in its unit with a prefix and four figures; `not known` for NaN."""
    if math.isnan(value):
        return "not known"
    if math.isinf(value):
        return "without bound"
    if unit not in _PREFIXED:
        return f"{_figures(value)} {unit}".rstrip()
    if value == 0:
        return f"0 {unit}"
    size = abs(value)
    if unit == "s" and size >= 1:
        # Nobody counts in kiloseconds.
        return f"{value:.6g} s"
    scale, prefix = next((step for step in _STEPS if size >= step[0] * 0.99995), _STEPS[-1])
    return f"{_figures(value / scale)} {prefix}{unit}"


def _figures(value: float) -> str:
    text = f"{value:.4g}"
    return f"{value:.0f}" if "e" in text and 1 <= abs(value) < 1e9 else text


def stretch(start_s: float, end_s: float) -> str:
    """Write a stretch of time (s): when it begins, to the nanosecond, and how long it lasts."""
    first, last = sorted((start_s, end_s))
    begin = f"{first:.9f}".rstrip("0").rstrip(".") if first else "0"
    return f"{begin} s" if first == last else f"{begin} s, for {amount(last - first, 's')}"
