"""A cloud while the ledger is kept: its figures now, and where missing ones went missing.

Quantities: number, temperature (K), radius (m).  Places in m, times in s of the block.
"""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from dataclasses import dataclass, field
from fractions import Fraction

from wellseq.base.quantity import Spread
from wellseq.clouds.figures import NOT_KNOWN, Figure
from wellseq.model.sequence import CloudDeclared
from wellseq.model.species import ELEMENTARY_CHARGE_C
from wellseq.wells.wells import Held

KEPT = ("number", "temperature", "radius")


@dataclass(slots=True, eq=False)
class Being:
    """One living cloud.

    `figures` of `KEPT`; `lost` says in words where a missing one went missing.  `energy_eV` is that
    of a bunch without a temperature.  `at_s` is how far its ledger is kept in `block`.  `lowered`:
    an evaporation has lowered its well to so many V, until it is raised again.  `locked`: the
    density (1/m3) that a drive holds, with the voltages, number and radius for which that is so.
    `came`: block and instant (s) at which it was placed or caught.
    """

    name: str
    declared: CloudDeclared
    block: int
    at_s: Fraction
    figures: dict[str, Figure]
    lost: dict[str, str] = field(default_factory=dict)
    lowered_V: float | None = None
    gap: dict[str, int] = field(default_factory=dict)
    locked: tuple[Figure, bytes, Figure, Figure] | None = None
    came: tuple[int, Fraction] = (-1, Fraction(0))

    @property
    def charge_e(self) -> float:
        """Charge in elementary charges, with its sign."""
        return self.declared.species.charge_C / ELEMENTARY_CHARGE_C

    @property
    def mass_kg(self) -> float:
        """Mass of one particle, kg."""
        return self.declared.species.mass_kg

    @property
    def complete(self) -> bool:
        """Whether number, temperature and radius are known."""
        return all(self.figures[quantity].known for quantity in KEPT)

    def cites(self) -> str:
        """Where what is missing went missing, in words."""
        return "; ".join(dict.fromkeys(self.lost[one] for one in KEPT if one in self.lost))

    def know(self, quantity: str, figure: Figure) -> None:
        """A quantity is known from here on."""
        self.figures[quantity] = figure
        self.lost.pop(quantity, None)
        self.gap.pop(quantity, None)


def figure_of(spread: Spread | None) -> Figure:
    """What the author declared; no figure where nothing was."""
    if spread is None:
        return NOT_KNOWN
    value, half = float(spread.value), float(spread.half_width)
    return Figure(value, value - half, value + half)


def being_of(declared: CloudDeclared, block: int, at_s: Fraction) -> Being:
    """A cloud as declared, from an instant (s) of a block on."""
    figures = {quantity: figure_of(getattr(declared, quantity)) for quantity in KEPT}
    lost = {
        quantity: f"the {quantity} of {declared.name} is not declared"
        for quantity, figure in figures.items()
        if not figure.known
    }
    return Being(declared.name, declared, block, at_s, figures, lost, came=(block, at_s))


class Homes:
    """Where clouds are held: lookups in what the wells' floor proved."""

    def __init__(self, held: tuple[Held, ...]) -> None:
        self._held: dict[str, list[Held]] = {}
        self._keys: dict[str, list[tuple[int, Fraction]]] = {}
        self._hot = {(one.cloud, one.block, one.number) for one in held if one.energetic}
        for one in sorted(held, key=lambda one: (one.block, one.start_s, one.end_s)):
            if not one.energetic:
                self._held.setdefault(one.cloud, []).append(one)
                self._keys.setdefault(one.cloud, []).append((one.block, one.start_s))

    def at(self, cloud: str, block: int, time_s: Fraction) -> Held | None:
        """The stretch that ends at an instant or holds it; the one that begins there else."""
        index = bisect_left(self._keys.get(cloud, []), (block, time_s)) - 1
        for found in (index, index + 1):
            held = self._held.get(cloud, [])[found : found + 1] if found >= 0 else []
            for one in held:
                if one.block == block and one.start_s <= time_s <= one.end_s:
                    return one
        return None

    def place_m(self, cloud: str, block: int, time_s: Fraction) -> float | None:
        """Where the cloud's minimum is at an instant, m; None when it is not held then."""
        one = self.at(cloud, block, time_s)
        if one is None:
            return None
        if one.end_s == time_s:
            return one.to_m
        return one.from_m if one.start_s == time_s else (one.from_m + one.to_m) / 2

    def least(self, cloud: str, block: int, start_s: Fraction, end_s: Fraction) -> Held | None:
        """The stretch of least certified depth between two instants."""
        keys = self._keys.get(cloud, [])
        first = max(bisect_right(keys, (block, start_s)) - 1, 0)
        last = bisect_left(keys, (block, end_s))
        within = [
            one
            for one in self._held.get(cloud, [])[first:last]
            if one.block == block and one.end_s > start_s
        ]
        return min(within, key=lambda one: one.certified_V, default=None)

    def hot(self, cloud: str, block: int, number: int) -> bool:
        """Whether the cloud is a bunch without a temperature during a step."""
        return (cloud, block, number) in self._hot

    def together(self, one: Held, other: Held | None) -> bool:
        """Whether two stretches are of one well."""
        return (
            other is not None
            and one.charge_sign == other.charge_sign
            and one.well_m == other.well_m
        )
