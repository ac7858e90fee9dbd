"""Voltages that change under a cloud → whether that is slow, and what it does to its temperature.

The path of the well is sampled between breakpoints; the frequency is the lesser of the vacuum one
and of the thermal bounce of a plasma, w = min(w_vac, pi v_th/L).  The law of adiabatic.after_ramp
at the best values gives the ratio of the temperatures, with its margin; the ratio is applied to the
whole interval.  Collisions during the ramp: density and temperature at its two ends, least and
greatest.

Units: s, m, K, V, kg.  Shapes: samples of a stretch (SAMPLES,).
Source: adiabatic.py.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise
from typing import TYPE_CHECKING, Any

import numpy as np

from wellseq.clouds.beings import Being
from wellseq.clouds.columns import Column, Filling, column, vacuum_rad_per_s
from wellseq.clouds.figures import Figure, Outside
from wellseq.clouds.intervals import times
from wellseq.clouds.rest import filling
from wellseq.clouds.voltages import Vector, Voltages
from wellseq.timeline.timeline import Shape

if TYPE_CHECKING:
    from wellseq.clouds.ledger import Ledger

SAMPLES = 17
STILL_LOG, STILL_M = 1e-4, 1e-6
"""Changes of ln w and of the place that are none."""
TEMPERATURES = (0.25, 0.5, 1.0, 2.0, 4.0)
RATIO_MARGIN = 0.03
"""Of the ratio of temperatures: the log column's length before and after."""


@dataclass(frozen=True, slots=True)
class Motion:
    """Instants (s) between two of a block, at which something begins or ends to move."""

    volts: Voltages
    times_s: tuple[Fraction, ...]
    sudden: tuple[Fraction, ...]

    @classmethod
    def between(cls, volts: Voltages, start_s: Fraction, end_s: Fraction) -> Motion:
        """What moves between two instants of a block."""
        found = {start_s, end_s}
        for piece in volts.block.pieces:
            if piece.end_s > start_s and piece.start_s < end_s:
                found |= {max(piece.start_s, start_s), min(piece.end_s, end_s)}
        sudden = {edge.end_s for edge in volts.block.edges if start_s < edge.end_s <= end_s}
        sudden |= {
            piece.end_s
            for piece in volts.block.pieces
            if piece.shape is Shape.EDGE and start_s < piece.end_s <= end_s
        }
        return cls(volts, tuple(sorted(found | sudden)), tuple(sorted(sudden)))

    @property
    def moves(self) -> bool:
        """Whether any voltage differs between two of the instants."""
        first = self.volts.at(self.times_s[0])
        return any(not np.array_equal(first, self.volts.at(time)) for time in self.times_s[1:])

    def vectors(self) -> list[tuple[float, Vector]]:
        """Time from the start (s) and volts (electrodes,) at all instants that are sampled."""
        found = []
        for before, after in pairwise(self.times_s):
            if np.array_equal(self.volts.at(before), self.volts.at(after)):
                continue
            for index in range(SAMPLES):
                time = before + (after - before) * Fraction(index, SAMPLES - 1)
                found.append((float(time - self.times_s[0]), self.volts.at(time)))
        return found


def ramped(ledger: Ledger, being: Being, motion: Motion) -> None:
    """Let a cloud follow its well through a motion that ends where its ledger now stands."""
    start_s, end_s = motion.times_s[0], motion.times_s[-1]
    place = ledger.homes.place_m(being.name, ledger.block, start_s)
    if place is None:
        return
    company = ledger.company(being, end_s)
    question: list[object] = ["ramp", being.name, place, being.mass_kg, being.charge_e]
    for time_s in motion.times_s:
        question += [float(time_s - start_s), motion.volts.at(time_s).tobytes()]
    question += [tuple(float(time - start_s) for time in motion.sudden)]
    shapes = {
        (piece.shape.value, float(piece.start_s - start_s), float(piece.end_s - start_s))
        for piece in motion.volts.block.pieces
        if piece.end_s > start_s and piece.start_s < end_s
    }
    question += [tuple(sorted(shapes))]
    question += [end for one in company for fig in one.figures.values() for end in _ends(fig)]
    told = ledger.memory.answer(question, lambda: _answer(ledger, being, motion, place, company))
    _apply(ledger, being, told)


def _apply(ledger: Ledger, being: Being, told: dict[str, Any]) -> None:
    if told["eps"] is not None:
        ledger.measure(
            "ramp-not-adiabatic",
            being,
            told["eps"],
            told["eps"],
            "",
            f"the well of {being.name} changes by {{value}} of its frequency in a swing",
            hint="take longer, or ramp `smoothly`",
        )
    if told["narrower"] != 1.0:
        share = told["narrower"]
        being.figures["radius"] = times(being.figures["radius"], Figure(share, share, share))
    if told["outside"]:
        reasons = [Outside(*one) for one in told["outside"]]
        told_by = "ramp-not-adiabatic" if any("eps" in one.quantity for one in reasons) else ""
        ledger.lose(being, ["temperature"], reasons, told_by)
    elif told["ratio"] is not None:
        ratio = Figure(*told["ratio"])
        being.figures["temperature"] = times(being.figures["temperature"], ratio)


def _answer(
    ledger: Ledger, being: Being, motion: Motion, place_m: float, company: list[Being]
) -> dict[str, Any]:
    nothing: dict[str, Any] = {"eps": None, "narrower": 1.0, "outside": [], "ratio": None}
    sign = 1 if being.charge_e > 0 else -1
    path = []
    for time_s, vector in motion.vectors():
        well = ledger.bench.trough(sign, vector, place_m)
        if well is None:
            return nothing
        place_m = well.bottom_m
        path.append((time_s, well))
    if not path:
        return nothing
    before, after = path[0][1], path[-1][1]
    wall_m = ledger.field.radius_m
    first = column(before, filling(company), wall_m)
    last = column(after, filling(company), wall_m)
    if first.outside or last.outside:
        return nothing
    field = ledger.trap.field
    narrower = math.sqrt(abs(field.at(before.bottom_m) / field.at(after.bottom_m)))
    slow = _slowness(being, path, first, motion)
    if slow is None:
        return {**nothing, "narrower": narrower}
    from wellseq.clouds.adiabatic import after_ramp

    kelvin = being.figures["temperature"].value
    found = after_ramp(
        perpendicular_K=kelvin,
        parallel_K=kelvin,
        length_m=first.length_m.value,
        length_after_m=_lengths(after, company, wall_m, kelvin),
        exchanges=_exchanges(ledger, being, motion, (first, last)),
        slow=slow,
        mass_kg=being.mass_kg,
    )
    ratio = None
    if not found.outside:
        ends = _ends(found.temperature_K)
        margin = (1.0, 1.0 - RATIO_MARGIN, 1.0 + RATIO_MARGIN)
        ratio = [end / kelvin * share for end, share in zip(ends, margin, strict=True)]
    return {
        "eps": max(slow.eps, slow.eps_move),
        "narrower": narrower,
        "outside": [
            [one.model, one.quantity, one.value, one.limit, one.unit, one.side]
            for one in found.outside
        ],
        "ratio": ratio,
    }


def _slowness(being: Being, path: list[Any], first: Column, motion: Motion) -> Any:
    """How slow the motion is; None when the cloud does not feel it."""
    from wellseq.clouds.adiabatic import Slowness, Stretch, plasma_frequency_cap_rad_per_s, slowness

    length_m = first.length_m.value
    frequency = np.array(
        [
            plasma_frequency_cap_rad_per_s(
                vacuum_rad_per_s=vacuum_rad_per_s(well, being.mass_kg, being.charge_e),
                temperature_K=being.figures["temperature"].value,
                length_m=length_m,
                mass_kg=being.mass_kg,
            )
            for _, well in path
        ]
    )
    empty = np.array([vacuum_rad_per_s(well, being.mass_kg, being.charge_e) for _, well in path])
    places = np.array([well.bottom_m for _, well in path])
    if np.ptp(np.log(empty)) < STILL_LOG and np.ptp(places) < STILL_M:
        return None
    if motion.sudden:
        jump = float(np.ptp(np.log(empty)))
        return Slowness(jump, 0.0, float(np.ptp(places)) / length_m, 0.0, 0.0)
    seconds = np.array([time_s for time_s, _ in path])
    stretches = [
        Stretch(seconds[part], frequency[part], places[part])
        for part in (slice(start, start + SAMPLES) for start in range(0, len(path), SAMPLES))
    ]
    return slowness(stretches, length_m)


def _lengths(after: Any, company: list[Being], wall_m: float, kelvin: float) -> Any:
    """The column's length in the new well as a function of the temperature in K."""
    charges = filling(company)
    logs, lengths = [], []
    for share in TEMPERATURES:
        warm = Figure(*(kelvin * share,) * 3)
        found = column(after, Filling(_best(charges.number), _best(charges.radius_m), warm), wall_m)
        if not found.outside:
            logs.append(math.log(kelvin * share))
            lengths.append(math.log(found.length_m.value))
    return lambda at_K: math.exp(float(np.interp(math.log(at_K), logs, lengths)))


def _best(figure: Figure) -> Figure:
    return Figure(figure.value, figure.value, figure.value)


def _exchanges(ledger: Ledger, being: Being, motion: Motion, ends: tuple[Column, Column]) -> Figure:
    """nu times the duration, from density and temperature at both ends of the motion."""
    from wellseq.clouds.collisions import anisotropy_rate_per_s

    seconds = float(motion.times_s[-1] - motion.times_s[0])
    number, radius = being.figures["number"], being.figures["radius"]
    kelvin = being.figures["temperature"]
    place = ledger.homes.place_m(being.name, ledger.block, motion.times_s[-1]) or 0.0
    field_T = abs(ledger.trap.field.at(place))
    found = []
    for one in ends:
        for count, wide, warm in (
            (number.value, radius.value, kelvin.value),
            (number.low, radius.high, kelvin.high),
            (number.high, radius.low, kelvin.low),
        ):
            rate = anisotropy_rate_per_s(
                density_per_m3=count / (math.pi * wide**2 * one.length_m.value),
                temperature_K=warm,
                magnetic_field_T=field_T,
                mass_kg=being.mass_kg,
                charge_e=abs(being.charge_e),
            )
            found.append(rate * seconds)
    return Figure(found[0], min(found), max(found))


def _ends(figure: Figure) -> tuple[float, float, float]:
    return figure.value, figure.low, figure.high
