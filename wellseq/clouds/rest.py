"""A cloud, its company and the voltages → its row: depth left, length, density, frequencies.

The log column (columns.py) decides where the depth left is clearly above a tenth of the vacuum
depth and 20 kT; nearer than that all clouds of the well are solved in full (equilibrium.py), at the
best values and at the two corners where most and least depth is left.  Full solutions are kept by
content (memory.py).  Bunches that have no temperature yet are not counted as company.

Units: m, V (eV per elementary charge), K, T, Hz.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from wellseq.clouds.beings import Being
from wellseq.clouds.cheap import CLEAR_SHARE, CLEAR_THERMAL, LOG_MODEL
from wellseq.clouds.columns import Column, Filling, Trough, column, frequencies, shape, trough
from wellseq.clouds.constants import THERMAL_EV_PER_K
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.clouds.intervals import times
from wellseq.clouds.memory import Memory
from wellseq.clouds.voltages import Vector
from wellseq.fields.field import Field
from wellseq.model.trap import Trap
from wellseq.wells.wells import Held

FULL_MODEL = "thermal equilibrium"
SHAPE = ("length", "density", "bounce", "rotation", "drift")


@dataclass(frozen=True, slots=True)
class Settled:
    """One cloud at rest: figures of a row, n over the Brillouin density, kT left, and reasons.

    `kT_left` is the depth left over kT; it reaches down to 0 where a corner is overfull.
    `certified_V` is the vacuum depth with everything taken off that can be wrong with voltages.
    """

    figures: dict[str, Figure]
    brillouin_share: Figure
    kT_left: Figure
    model: str
    certified_V: float
    outside: tuple[Outside, ...] = ()


class Bench:
    """What every cloud is settled on: the trap's field and the answers kept."""

    def __init__(self, trap: Trap, field: Field, memory: Memory) -> None:
        self.trap, self.field, self.memory = trap, field, memory
        self._troughs: dict[tuple[bytes, int, float], Trough | None] = {}

    def trough(self, sign: int, vector: Vector, near_m: float) -> Trough | None:
        """The well at a place (m) at voltages (electrodes,) in V."""
        key = (vector.tobytes(), sign, near_m)
        if key not in self._troughs:
            self._troughs[key] = trough(self.field, sign, vector, near_m)
        return self._troughs[key]

    def column(self, well: Trough, company: Sequence[Being]) -> Column:
        """The log column of all clouds of a well."""
        return column(well, filling(company), self.field.radius_m)

    def settle(
        self, being: Being, company: Sequence[Being], vector: Vector, place_m: float, held: Held
    ) -> Settled:
        """One cloud among its company (itself included) at voltages (electrodes,) V."""
        losses_V = held.left.losses.total_V, held.right.losses.total_V
        question = ["row", *self._facts(being, company, vector, place_m), *losses_V]
        told = self.memory.answer(
            question, lambda: _plain(self._settled(being, company, vector, place_m, losses_V))
        )
        return _settled(told)

    def locked(self, being: Being, found: Settled, density: Figure, place_m: float) -> Settled:
        """The same with the density (1/m3) that a drive holds, and what follows from it."""
        field_T = self.trap.field.at(place_m)
        turned = turning(density, being, field_T, self.field.radius_m)
        return replace(
            found,
            figures={**found.figures, "density": density, **turned[0]},
            brillouin_share=turned[1],
        )

    def _facts(
        self, being: Being, company: Sequence[Being], vector: Vector, place_m: float
    ) -> list[object]:
        facts: list[object] = [being.name, vector.tobytes(), place_m]
        for one in company:
            facts += [one.name, one.charge_e, one.mass_kg]
            facts += [end for figure in one.figures.values() for end in _ends(figure)]
        return facts

    def _settled(
        self,
        being: Being,
        company: Sequence[Being],
        vector: Vector,
        place_m: float,
        losses_V: tuple[float, float],
    ) -> Settled:
        sign = 1 if being.charge_e > 0 else -1
        well = self.trough(sign, vector, place_m)
        if well is None:
            reason = Outside(LOG_MODEL, "depth of the well", 0.0, 0.0, "V", "above")
            return nothing((reason,), math.nan)
        certified = min(well.left_V - losses_V[0], well.right_V - losses_V[1])
        sides_V = certified, well.depth_V
        found = self.column(well, company)
        theta = _theta(being)
        if not found.outside:
            margin = found.margin_V
            phi = found.space_charge_V
            left = Figure(
                min(sides_V) - phi.value,
                sides_V[0] - phi.high - margin,
                sides_V[1] - phi.low + margin,
            )
            clear = max(CLEAR_SHARE * well.depth_V, CLEAR_THERMAL * theta.high)
            if left.low > clear:
                return self._row(being, well, found.length_m, phi, left, certified)
        from wellseq.clouds.rest_in_full import in_full

        return in_full(self, being, company, vector, well, sides_V)

    def _row(
        self,
        being: Being,
        well: Trough,
        length_m: Figure,
        phi_V: Figure,
        left_V: Figure,
        certified_V: float,
    ) -> Settled:
        shaped = shape(
            well=well,
            length_m=length_m,
            number=being.figures["number"],
            radius_m=being.figures["radius"],
            temperature_K=being.figures["temperature"],
            mass_kg=being.mass_kg,
            charge_e=being.charge_e,
            magnetic_field_T=self.trap.field.at(well.bottom_m),
            wall_m=self.field.radius_m,
        )
        figures = {
            "length": shaped.length_m,
            "density": shaped.density_per_m3,
            "bounce": shaped.bounce_Hz,
            "rotation": shaped.rotation_Hz,
            "drift": shaped.drift_Hz,
            "space_charge": phi_V,
            "depth_left": left_V,
        }
        left = kT_left(left_V, being)
        return Settled(figures, shaped.brillouin_share, left, LOG_MODEL, certified_V)


def turning(
    density: Figure, being: Being, field_T: float, wall_m: float
) -> tuple[dict[str, Figure], Figure]:
    """Rotation and drift (Hz) at a density (1/m3), and its share of the Brillouin density."""
    rotation, drift, share = frequencies(
        density=density,
        radius_m=being.figures["radius"],
        mass_kg=being.mass_kg,
        charge_e=being.charge_e,
        magnetic_field_T=field_T,
        wall_m=wall_m,
    )
    return {"rotation": rotation, "drift": drift}, share


def filling(company: Sequence[Being]) -> Filling:
    """The charges of a well: summed, with radius and temperature of the most numerous cloud."""
    charges = [_scaled(one.figures["number"], abs(one.charge_e)) for one in company]
    most = max(range(len(company)), key=lambda index: charges[index].value)
    number = Figure(
        sum(one.value for one in charges),
        sum(one.low for one in charges),
        sum(one.high for one in charges),
    )
    chief = company[most].figures
    return Filling(number, chief["radius"], chief["temperature"])


def kT_left(left_V: Figure, being: Being, temperature_K: Figure | None = None) -> Figure:
    """Depth left (V) in units of the cloud's kT/q, at its temperature or another one (K)."""
    theta = _theta(being, temperature_K)
    low = left_V.low / (theta.high if left_V.low > 0.0 else theta.low)
    high = left_V.high / (theta.low if left_V.high > 0.0 else theta.high)
    return Figure(left_V.value / theta.value, low, high)


def _theta(being: Being, temperature_K: Figure | None = None) -> Figure:
    """kT/q in V."""
    share = THERMAL_EV_PER_K / abs(being.charge_e)
    return _scaled(temperature_K or being.figures["temperature"], share)


def _scaled(figure: Figure, factor: float) -> Figure:
    return times(figure, Figure(factor, factor, factor))


def nothing(reasons: tuple[Outside, ...], certified_V: float, kT: Figure = NOT_KNOWN) -> Settled:
    """No figures, and why; `kT` is what is known of the depth left, in kT."""
    names = (*SHAPE, "space_charge", "depth_left")
    blank = dict.fromkeys(names, NOT_KNOWN)
    return Settled(blank, NOT_KNOWN, kT, FULL_MODEL, certified_V, reasons)


def _ends(figure: Figure) -> tuple[float, float, float]:
    return figure.value, figure.low, figure.high


def _plain(found: Settled) -> list[object]:
    return [
        {name: _ends(figure) for name, figure in found.figures.items()},
        _ends(found.brillouin_share),
        _ends(found.kT_left),
        found.model,
        found.certified_V,
        [reason_plain(reason) for reason in found.outside],
    ]


def _settled(told: list) -> Settled:  # type: ignore[type-arg]
    figures, share, left, model, certified_V, reasons = told
    return Settled(
        {name: Figure(*ends) for name, ends in figures.items()},
        Figure(*share),
        Figure(*left),
        model,
        certified_V,
        tuple(Outside(*reason) for reason in reasons),
    )


def reason_plain(reason: Outside) -> list[object]:
    """A reason as a plain list, to be kept."""
    return [reason.model, reason.quantity, reason.value, reason.limit, reason.unit, reason.side]
