"""Numbers that no model can work with."""

from __future__ import annotations

import math

import pytest

from wellseq.clouds.figures import Outside
from wellseq.clouds.inputs import negative, unit_of, unusable


def test_good_numbers_pass() -> None:
    assert unusable("m", number=1.0, start_K=1e-9) == ()
    assert negative("m", heating_K_per_s=0.0) == ()


@pytest.mark.parametrize("value", [0.0, -1.0, math.inf, math.nan])
def test_a_bad_number_is_named(value: float) -> None:
    (reason,) = unusable("m", start_K=value)
    assert (reason.model, reason.quantity, reason.unit) == ("m", "start temperature", "K")
    assert reason.value == value or math.isnan(value)
    assert unusable("m", temperature_K=value)[0].quantity == "temperature"


def test_numbers_of_another_world_are_named() -> None:
    (reason,) = unusable("m", magnetic_field_T=1e300)
    assert (reason.quantity, reason.limit, reason.side) == ("magnetic field", 1e3, "at most")
    assert unusable("m", magnetic_field_T=1e2, mass_kg=9.1e-31) == ()
    assert negative("m", heating_K_per_s=1e99)


def test_below_zero_is_named() -> None:
    assert negative("m", heating_K_per_s=-1.0) == (
        Outside("m", "heating", -1.0, 0.0, "K/s", "at least"),
    )


@pytest.mark.parametrize(
    ("name", "unit"),
    [
        ("density_per_m3", "1/m3"),
        ("heating_K_per_s", "K/s"),
        ("rotation_rad_per_s", "rad/s"),
        ("magnetic_field_T", "T"),
        ("number", ""),
    ],
)
def test_units_of_names(name: str, unit: str) -> None:
    assert unit_of(name) == unit
