"""Columns in wells: the worked examples, what A and B miss, monotony, and refusals."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from plasma_wells import E1, E2, E3, E4, RADIUS_M, Example

from wellseq.clouds.cheap import bessel_column, cheap_depth, cheap_is_enough, log_column

WELLS = {example: example.well() for example in (E1, E2, E3, E4)}


def given_to(example: Example, **changes):
    settled = {
        "well": WELLS[example],
        "charge_e": example.charge_e,
        "number": example.number,
        "temperature_K": example.temperature_K,
        "radius_m": example.radius_m,
        "wall_radius_m": RADIUS_M,
    }
    return settled | changes


# Worked examples (derived, a prototype's numbers): vacuum depth 0.1 %, A and B 0.3 %.
ROWS = [
    (E1, 69.857, 58.195, 58.228),
    (E2, 2.6303, 2.5307, 2.5532),
    (E3, 7.5469, 6.2783, 6.3269),
    (E4, 49.086, 26.154, 27.074),
]


@pytest.mark.parametrize(("example", "vacuum", "log", "bessel"), ROWS)
def test_worked_examples(example: Example, vacuum: float, log: float, bessel: float) -> None:
    assert WELLS[example].depth_eV == pytest.approx(vacuum, rel=1e-3)
    assert log_column(**given_to(example)).depth_eV == pytest.approx(log, rel=3e-3)
    assert bessel_column(**given_to(example)).depth_eV == pytest.approx(bessel, rel=3e-3)


@pytest.mark.parametrize(("example", "vacuum", "log", "bessel"), ROWS[:1] + ROWS[3:])
def test_five_percent_more_particles_would_be_seen(
    example: Example, vacuum: float, log: float, bessel: float
) -> None:
    more = given_to(example, number=1.05 * example.number)
    assert log_column(**more).depth_eV != pytest.approx(log, rel=3e-3)
    assert bessel_column(**more).depth_eV != pytest.approx(bessel, rel=3e-3)


# E4 filled further; model A, eV (derived).  Within 0.1 % of the vacuum depth: near full the
# difference of two large numbers has no better relative accuracy.
@pytest.mark.parametrize(
    ("number", "log"),
    [
        (6e7, 19.383),
        (8e7, 13.518),
        (1e8, 8.293),
        (1.1e8, 5.873),
        (1.2e8, 3.565),
        (1.4e8, -0.758),
        (1.8e8, -8.40),
    ],
)
def test_filled_further(number: float, log: float) -> None:
    found = log_column(**given_to(E4, number=number))
    assert found.depth_eV == pytest.approx(log, abs=0.05)
    assert found.filling == pytest.approx(1 - log / 49.086, abs=2e-3)
    assert log_column(**given_to(E4, number=1.01 * number)).depth_eV != pytest.approx(log, abs=0.05)


def test_radius_moves_space_charge_as_it_should() -> None:
    # A factor 2 in rp: 2 ln2/(1 + 2 ln(Rw/rp)), less what the length gives back.
    for radius_m, share in ((0.5e-3, 0.17), (1e-3, 0.20), (2e-3, 0.26)):
        narrow = 1 + 2 * math.log(RADIUS_M / radius_m)
        wide = 1 + 2 * math.log(RADIUS_M / (2 * radius_m))
        assert 1 - wide / narrow == pytest.approx(share, abs=0.006)


number = st.floats(1e3, 2e8)
temperature = st.floats(4.0, 2000.0)
radius = st.floats(0.2e-3, 5e-3)
factor = st.floats(1.01, 3.0)


@settings(max_examples=40)
@given(number, temperature, radius, factor)
def test_monotone(n: float, kelvin: float, rp: float, more: float) -> None:
    """More particles leave less depth, a wider cloud more; a hotter one is longer."""
    base = given_to(E1, number=n, temperature_K=kelvin, radius_m=rp)
    for model in (log_column, bessel_column):
        here = model(**base)
        assert model(**base | {"number": more * n}).depth_eV < here.depth_eV
        assert model(**base | {"radius_m": more * rp}).depth_eV > here.depth_eV
        assert model(**base | {"temperature_K": more * kelvin}).length_m > here.length_m


@settings(max_examples=40)
@given(number, temperature, radius)
def test_the_interval_holds_both_models(n: float, kelvin: float, rp: float) -> None:
    found = cheap_depth(**given_to(E1, number=n, temperature_K=kelvin, radius_m=rp))
    for column in (found.log, found.bessel):
        assert found.depth_eV.low < column.depth_eV < found.depth_eV.high
    assert found.depth_eV.value == found.log.depth_eV


def test_fill_rule_is_met() -> None:
    found = log_column(**given_to(E3))
    level = found.space_charge_eV / 2 + E3.cloud().thermal_eV
    assert WELLS[E3].ends_m()(level) == pytest.approx((found.left_m, found.right_m), abs=1e-9)
    assert found.length_m == pytest.approx(found.right_m - found.left_m)


def test_ions_count_their_charge_twice() -> None:
    single = log_column(**given_to(E3))
    # A well of the same energy in eV: four times the space charge energy.
    double = log_column(**given_to(E3, charge_e=2, number=E3.number / 4))
    assert double.depth_eV == pytest.approx(single.depth_eV, rel=1e-12)


def test_when_the_cheap_depth_decides() -> None:
    clear = cheap_depth(**given_to(E1))
    assert cheap_is_enough(clear, E1.temperature_K)
    assert cheap_is_enough(clear, E1.temperature_K, demanded_eV=57.0)
    assert not cheap_is_enough(clear, E1.temperature_K, demanded_eV=58.0)
    full = cheap_depth(**given_to(E4, number=1.1e8))
    assert not cheap_is_enough(full, E4.temperature_K)
    # 2.5 eV left, but 20 kT at 1500 K are 2.6 eV.
    assert cheap_is_enough(cheap_depth(**given_to(E2)), 1400.0)
    assert not cheap_is_enough(cheap_depth(**given_to(E2)), 1500.0)


BAD = [
    ({"number": 0.0}, "number of particles"),
    ({"number": math.nan}, "number of particles"),
    ({"number": 1e14}, "level filled"),
    ({"temperature_K": 0.0}, "temperature"),
    ({"temperature_K": math.inf}, "temperature"),
    ({"temperature_K": 1e7}, "thermal energy"),
    ({"radius_m": RADIUS_M}, "radius"),
    ({"radius_m": -1.0}, "radius"),
    ({"well": replace(WELLS[E1], left_eV=WELLS[E1].bottom_eV)}, "thermal energy"),
]


@pytest.mark.parametrize(("changes", "quantity"), BAD)
def test_bad_input_has_no_figure(changes, quantity: str) -> None:
    found = cheap_depth(**given_to(E1, **changes))
    assert quantity in {reason.quantity for reason in found.outside}
    assert not found.depth_eV.known
    assert math.isnan(found.log.length_m)
    assert not cheap_is_enough(found, 100.0)
