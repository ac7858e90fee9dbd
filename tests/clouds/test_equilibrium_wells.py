"""Random clouds in random wells: converged, or refused for a reason; never wrong unawares.

The yardstick is the same solution on a finer grid.  The intervals were chosen over 500 clouds drawn
like these; COUNT and COMPARED may be raised at will.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np
import pytest

from wellseq.clouds.at_rest import AtRest
from wellseq.clouds.cheap import CheapDepth, cheap_depth
from wellseq.clouds.constants import ELECTRON_MASS_KG, PROTON_MASS_KG
from wellseq.clouds.equilibrium import equilibrium
from wellseq.clouds.figures import Figure
from wellseq.clouds.layout import Cloud, empty_wells, grid_of, tube_of
from wellseq.clouds.wall import Wall, wall_of_steps

COUNT, COMPARED = 12, 3


@dataclass(frozen=True)
class Case:
    """A cloud between two rings of unequal voltage and length, and the field."""

    wall: Wall
    cloud: Cloud
    field_T: float


def cases(count: int):
    """Bores of 8 to 25 mm, wells of 1 to 140 V, 1e3 to 1e9 particles at 4 K to 20,000 K."""
    random = np.random.default_rng(5)
    for _ in range(count):
        bore = random.uniform(8e-3, 25e-3)
        half, side = bore * random.uniform(0.25, 3), bore * random.uniform(0.7, 5)
        sign = int(random.choice([-1, 1]))
        left_V, right_V = sign * random.uniform(1, 140, 2)
        edges = [-side - half, -half, half, half + side * random.uniform(0.5, 1.5)]
        cloud = Cloud(
            charge_e=sign,
            mass_kg=ELECTRON_MASS_KG if random.random() < 0.7 else PROTON_MASS_KG,
            number=float(10 ** random.uniform(3, 9)),
            temperature_K=float(10 ** random.uniform(0.6, 4.3)),
            between_m=((edges[0] + edges[1]) / 2, (edges[2] + edges[3]) / 2),
            radius_m=float(bore * 10 ** random.uniform(-1.7, -0.6)),
        )
        wall = wall_of_steps(edges, [0.0, left_V, 0.0, right_V, 0.0], bore, 0.05 * bore)
        yield Case(wall, cloud, float(random.uniform(0.5, 6)))


def at_rest(case: Case, fineness: float = 1.0) -> AtRest:
    grid = None
    if fineness != 1.0:
        ends = tube_of(case.wall, [case.cloud])
        axis_V = case.wall.on_axis().exact
        wells = empty_wells(axis_V, case.wall.radius_m, [case.cloud], ends)
        grid = grid_of(case.wall, [case.cloud], wells, ends, fineness)
    found = equilibrium(
        wall=case.wall, clouds=[case.cloud], magnetic_field_T=case.field_T, grid=grid
    )
    return found.clouds[0]


def cheap(case: Case) -> CheapDepth:
    cloud = case.cloud
    ends = tube_of(case.wall, [cloud])
    well = empty_wells(case.wall.on_axis().exact, case.wall.radius_m, [cloud], ends)[0]
    return cheap_depth(
        well=well,
        charge_e=cloud.charge_e,
        number=cloud.number,
        temperature_K=cloud.temperature_K,
        radius_m=cloud.radius_m,
        wall_radius_m=case.wall.radius_m,
    )


@cache
def solved() -> list[tuple[Case, AtRest]]:
    return [(case, at_rest(case)) for case in cases(COUNT)]


def held() -> list[tuple[Case, AtRest]]:
    return [(case, found) for case, found in solved() if not found.outside]


def test_every_case_is_solved_or_refused_for_a_reason() -> None:
    refused = {reason.quantity for _, found in solved() for reason in found.outside}
    assert refused <= {
        "vacuum depth",
        "space charge of a full well",
        "share at the edge of the well",
        "depth left",
        "share of the Brillouin density",
        "coupling",
    }
    assert COUNT / 2 < len(held()) < COUNT


def inside(value: float, figure: Figure) -> bool:
    return figure.low <= value <= figure.high


@pytest.mark.parametrize("number", range(COMPARED))
def test_a_finer_grid_stays_within_the_intervals(number: int) -> None:
    case, found = held()[2 * number]
    finer = at_rest(case, fineness=1.4)
    assert finer.outside == ()
    for name in ("depth_eV", "density_per_m3", "length_m", "pressure_V_per_m2"):
        assert inside(getattr(finer, name).value, getattr(found, name)), name
    assert not inside(1.01 * finer.depth_eV.value + 0.01, found.depth_eV)


def test_the_cheap_interval_holds_the_full_depth() -> None:
    for case, found in held():
        assert inside(found.depth_eV.value, cheap(case).depth_eV)
    case, found = held()[1]
    wider = 0.03 * found.vacuum_depth_eV
    assert not all(inside(f.depth_eV.value + wider, cheap(c).depth_eV) for c, f in held())
