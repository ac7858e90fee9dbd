"""Near an edge: all clouds of a well solved in full at three corners → one cloud's row.

The corner with most particles, least radius and least temperature leaves the least depth, the
opposite one the most; figures span the three.  What the wells' floor has certified of the vacuum
depth comes off as well.  Units: V (eV per elementary charge), m, K, T, Hz.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

from wellseq.clouds.at_rest import FINDINGS, FULL_WELL, MODEL, AtRest
from wellseq.clouds.beings import Being
from wellseq.clouds.cheap import LEVEL_FILLED
from wellseq.clouds.columns import Filling, Trough, column, shape
from wellseq.clouds.equilibrium import equilibrium
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.clouds.intervals import hull
from wellseq.clouds.layout import Cloud
from wellseq.clouds.rest import Settled, filling, kT_left, nothing
from wellseq.clouds.voltages import Vector
from wellseq.clouds.wall import wall_of

if TYPE_CHECKING:
    from wellseq.clouds.rest import Bench

HOPELESS_SHARE = 1.15
"""A column that has this many times the well's depth spills: the full solution leaves nothing."""
CORNERS = (("value", "value"), ("high", "low"), ("low", "high"))
"""Ends of (number; radius and temperature): best, least depth left, most depth left."""


def in_full(
    bench: Bench,
    being: Being,
    company: Sequence[Being],
    vector: Vector,
    well: Trough,
    sides_V: tuple[float, float],
) -> Settled:
    """One cloud among its company at voltages (electrodes,) V; `sides_V`: certified, wished."""
    charges = filling(company)
    least = Filling(
        _only(charges.number.low), _only(charges.radius_m.high), _only(charges.temperature_K.low)
    )
    emptiest = column(well, least, bench.field.radius_m)
    filled = [reason.quantity for reason in emptiest.outside] == [LEVEL_FILLED]
    most_V = emptiest.space_charge_V.low
    if filled or most_V > HOPELESS_SHARE * well.depth_V:
        # More potential of its own than the whole well is deep: it spills, no solution is needed.
        phi_V = most_V if most_V > 0.0 else 2.0 * well.depth_V
        full = Outside(MODEL, FULL_WELL, phi_V, well.depth_V, "V")
        return nothing((full,), sides_V[0], Figure(0.0, 0.0, 0.0))
    names = bench.field.electrodes
    wall = wall_of(bench.trap.electrodes, dict(zip(names, map(float, vector), strict=True)))
    field_T = abs(bench.trap.field.at(well.bottom_m))
    index = list(company).index(being)
    between = (well.left_barrier_m, well.right_barrier_m)
    solved: list[AtRest] = []
    for number, rest in CORNERS:
        clouds = [_cloud(one, number, rest, between) for one in company]
        try:
            found = equilibrium(wall=wall, clouds=clouds, magnetic_field_T=field_T)
        except ValueError as error:
            reason = Outside(MODEL, f"grid ({error})", math.nan, 0.0, "", "above")
            return nothing((reason,), sides_V[0])
        solved.append(found.clouds[index])
    return _joined(bench, being, well, solved, sides_V)


def _only(value: float) -> Figure:
    return Figure(value, value, value)


def _cloud(one: Being, number: str, rest: str, between_m: tuple[float, float]) -> Cloud:
    return Cloud(
        charge_e=round(one.charge_e),
        mass_kg=one.mass_kg,
        number=getattr(one.figures["number"], number),
        temperature_K=getattr(one.figures["temperature"], rest),
        between_m=between_m,
        radius_m=getattr(one.figures["radius"], rest),
    )


def _joined(
    bench: Bench,
    being: Being,
    well: Trough,
    solved: list[AtRest],
    sides_V: tuple[float, float],
) -> Settled:
    charges = abs(being.charge_e)
    taken_V = max(solved[0].vacuum_depth_eV / charges - sides_V[0], 0.0)
    reasons = tuple(dict.fromkeys(reason for one in solved for reason in one.outside))
    if reasons:
        full = all(FINDINGS.get(reason.quantity) == "well-overfull" for reason in reasons)
        known = [one.depth_eV for one in solved if not one.outside]
        most = max((one.high / charges for one in known), default=0.0)
        left = Figure(0.0, 0.0, most) if full else NOT_KNOWN
        kept = kT_left(left, being) if full else NOT_KNOWN
        return nothing(_first_of_each(reasons), sides_V[0], kept)
    left = hull([Figure(*(end / charges for end in _ends(one.depth_eV))) for one in solved])
    left = Figure(left.value - taken_V, left.low - taken_V, left.high)
    phi = [one.space_charge_eV / charges for one in solved]
    length = hull([one.length_m for one in solved])
    shaped = shape(
        well=well,
        length_m=length,
        number=being.figures["number"],
        radius_m=being.figures["radius"],
        temperature_K=being.figures["temperature"],
        mass_kg=being.mass_kg,
        charge_e=being.charge_e,
        magnetic_field_T=bench.trap.field.at(well.bottom_m),
        wall_m=bench.field.radius_m,
    )
    turn = hull([one.rotation_rad_per_s for one in solved])
    rotation = Figure(*(end / (2.0 * math.pi) for end in _ends(turn)))
    shares = [one.brillouin_share for one in solved]
    figures = {
        "length": length,
        "density": hull([one.density_per_m3 for one in solved]),
        "bounce": shaped.bounce_Hz,
        "rotation": rotation,
        "drift": Figure(
            *(
                end * (radius / bench.field.radius_m) ** 2
                for end, radius in zip(_ends(rotation), _ends(being.figures["radius"]), strict=True)
            )
        ),
        "space_charge": Figure(phi[0], min(phi), max(phi)),
        "depth_left": left,
    }
    share = Figure(shares[0], min(shares), max(shares))
    return Settled(figures, share, kT_left(left, being), MODEL, sides_V[0])


def _ends(figure: Figure) -> tuple[float, float, float]:
    return figure.value, figure.low, figure.high


def _first_of_each(reasons: Sequence[Outside]) -> tuple[Outside, ...]:
    kept: dict[str, Outside] = {}
    for reason in reasons:
        kept.setdefault(reason.quantity, reason)
    return tuple(kept.values())
