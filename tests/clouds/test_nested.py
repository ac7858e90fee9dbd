"""Nested wells: the worked example with and without visitors, filling, and the sums of energies."""

from __future__ import annotations

import math
from dataclasses import replace
from functools import cache

import pytest
from plasma_wells import FIELD_T, RADIUS_M

from wellseq.clouds.constants import ELECTRON_MASS_KG, PROTON_MASS_KG
from wellseq.clouds.layout import Cloud
from wellseq.clouds.nested import ETA_MIN, FINDINGS, GAP_DEBYE_MIN, Nest, arrival_eV, nested
from wellseq.clouds.wall import wall_of_steps

EDGES_M = [-75e-3, -45e-3, -15e-3, 15e-3, 45e-3, 75e-3]
WALL = wall_of_steps(EDGES_M, [0.0, -14.0, 9.0, 0.0, 9.0, -14.0, 0.0], RADIUS_M, 1e-3)
PLASMA = Cloud(
    charge_e=1,
    mass_kg=ELECTRON_MASS_KG,
    number=3e6,
    temperature_K=60.0,
    between_m=(-25.8e-3, 25.8e-3),
    radius_m=0.7e-3,
)
VISITOR = Cloud(
    charge_e=-1,
    mass_kg=PROTON_MASS_KG,
    number=3e4,
    temperature_K=300.0,
    between_m=(-62.1e-3, 0.0),
    radius_m=0.7e-3,
)


@cache
def nest(number: float = 3e6, visitors: float = 0.0) -> Nest:
    return nested(
        wall=WALL,
        plasma=replace(PLASMA, number=number),
        visitors=[replace(VISITOR, number=visitors)] if visitors else [],
        magnetic_field_T=FIELD_T,
        tube_m=(-0.18, 0.18),
    )


def misses(found: Nest) -> set[str]:
    """Figures outside 1 % of the worked example (derived)."""
    rows = {
        "vacuum": (found.vacuum_depth_eV, 4.337),
        "depth": (found.depth_eV.value, 2.556),
        "plasma": (found.plasma_V, 3.580),
        "side": (found.left.maximum_V, 6.136),
        "place": (found.right.maximum_m, 25.9e-3),
        "outer": (found.left.outer_eV.value, 16.45),
    }
    return {name for name, (got, want) in rows.items() if abs(got / want - 1) > 0.01}


def test_worked_example() -> None:
    found = nest()
    assert found.outside == ()
    assert misses(found) == set()
    # The printed gap is the printed maximum less half the length, both to 0.1 mm: 1.2 %.
    assert found.right.gap_m == pytest.approx(17.6e-3, rel=0.012)
    assert found.eta == pytest.approx(found.depth_eV.value / PLASMA.thermal_eV)
    assert found.eta > ETA_MIN
    assert found.gap_debye > GAP_DEBYE_MIN


def test_one_volt_on_an_electrode_would_be_seen() -> None:
    spoiled = wall_of_steps(EDGES_M, [0.0, -14.0, 9.1, 0.0, 9.1, -14.0, 0.0], RADIUS_M, 1e-3)
    found = nested(wall=spoiled, plasma=PLASMA, magnetic_field_T=FIELD_T, tube_m=(-0.18, 0.18))
    assert {"depth", "side"} <= misses(found)


def test_both_sides_are_alike() -> None:
    found = nest()
    assert found.left.depth_eV.value == pytest.approx(found.right.depth_eV.value, abs=1e-6)
    assert found.left.maximum_m == pytest.approx(-found.right.maximum_m, abs=1e-9)
    assert found.left.outer_eV.value == pytest.approx(found.right.outer_eV.value, abs=1e-6)
    assert found.left.gap_m > found.left.clear_gap_m > 0


# Antiprotons in the left side well lower the depth there (derived; 1 %).
@pytest.mark.parametrize(
    ("visitors", "left", "right"), [(3e4, 2.4975, 2.5563), (1e5, 2.3936, 2.5571)]
)
def test_visitors_lower_their_own_side(visitors: float, left: float, right: float) -> None:
    found = nest(visitors=visitors)
    assert found.outside == ()
    assert found.left.depth_eV.value == pytest.approx(left, rel=0.01)
    assert found.right.depth_eV.value == pytest.approx(right, rel=0.01)
    lowered = found.right.depth_eV.value - found.left.depth_eV.value
    assert lowered == pytest.approx(right - left, rel=0.02)
    assert found.visitors[0].centre_m == pytest.approx(-25.70e-3, rel=2e-3)
    # One number: what keeps the plasma is what the visitor must climb.
    climb = found.visitors[0].depth_right_eV.value
    assert climb == pytest.approx(found.left.climb_eV.value, abs=2e-3)
    assert found.left.outer_eV.value == pytest.approx(
        found.visitors[0].depth_left_eV.value, abs=2e-3
    )


def test_cheap_space_charge_of_the_visitors_is_no_match() -> None:
    # W (1 + 2 ln(Rw/rp)) for 3e4 over 10 mm says 32 mV where the solution says 58 mV (derived).
    found = nest(visitors=3e4)
    solved = nest().left.depth_eV.value - found.left.depth_eV.value
    cheap = 1.43996e-9 * 3e4 / 0.01 * (1 + 2 * math.log(RADIUS_M / 0.7e-3))
    assert cheap == pytest.approx(0.032, abs=1e-3)
    assert solved == pytest.approx(0.058, abs=2e-3)


def test_filling_up() -> None:
    assert nest(8e6).depth_eV.value == pytest.approx(0.918, rel=0.012)
    # At 1.2e7 a few kT are left (derived): 0.013 eV.
    found = nest(1.2e7)
    assert {FINDINGS[reason.quantity] for reason in found.outside} == {"well-overfull"}
    assert not found.depth_eV.known
    assert math.isnan(found.eta)
    assert math.isnan(found.left.gap_m)


def test_energy_on_arrival() -> None:
    # Negative charges gain what the plasma lies above their launch.
    assert arrival_eV(charge_e=-1, plasma_V=3.58, launch_V=3.5) == pytest.approx(0.08)
    assert arrival_eV(charge_e=-1, plasma_V=3.5, launch_V=3.58) == pytest.approx(-0.08)
    assert arrival_eV(charge_e=2, plasma_V=1.0, launch_V=3.0, start_eV=0.5) == pytest.approx(4.5)


def test_equal_signs_are_no_nest() -> None:
    with pytest.raises(ValueError, match="opposite signs"):
        nested(
            wall=WALL,
            plasma=PLASMA,
            visitors=[replace(VISITOR, charge_e=1)],
            magnetic_field_T=FIELD_T,
        )
