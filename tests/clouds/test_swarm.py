"""Particles of a bunch and of a cloud: evenly spread, and the same ones every time."""

from __future__ import annotations

from math import erf, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tanh_tubes import EV, LIGHT_KG, MASS_KG, lined_up

from wellseq.clouds.constants import THERMAL_EV_PER_K
from wellseq.clouds.swarm import Spreading, even_points, thermal

TABLE = lined_up([-0.05, -0.015, 0.015, 0.05, 0.4], (-0.25, 0.6))


def test_points_are_even() -> None:
    # Of 1000 even points every box holds its share within 0.01; of chance points it does not.
    points = even_points(1000, 2)
    chance = np.random.default_rng(5).random((2, 1000))

    def worst(sample: np.ndarray) -> float:
        boxes = [(a / 9, b / 9) for a in range(1, 10) for b in range(1, 10)]
        inside = [((sample[0] < a) & (sample[1] < b)).mean() - a * b for a, b in boxes]
        return float(np.abs(inside).max())

    assert worst(points) < 0.01
    assert worst(chance) > 0.01
    assert even_points(1000, 2).tobytes() == points.tobytes()


def test_one_dimension_goes_by_the_golden_ratio() -> None:
    assert even_points(3, 1)[0] == pytest.approx([0.5, 0.11803398875, 0.7360679775])


@settings(max_examples=40, deadline=None)
@given(
    middle=st.floats(-1e3, 1e3),
    width=st.floats(1e-3, 1e3),
    shape=st.sampled_from(("uniform", "normal")),
)
def test_quantiles_are_where_their_share_is_below(middle: float, width: float, shape: str) -> None:
    spread = Spreading(middle, width, shape)  # type: ignore[arg-type]
    found = spread.quantiles(50)
    assert (np.diff(found) > 0.0).all()
    assert spread.below(found) == pytest.approx((np.arange(50) + 0.5) / 50, abs=1e-5)
    assert spread.below(np.array([middle]))[0] == pytest.approx(0.5, abs=1e-6)


def test_a_normal_share_against_the_error_function() -> None:
    spread = Spreading(2.0, 3.0, "normal")
    for value in (-4.0, 1.0, 6.5):
        exact = (1.0 + erf((value - 2.0) / (3.0 * sqrt(2.0)))) / 2.0
        assert spread.below(np.array(value)) == pytest.approx(exact, abs=1e-6)
    assert Spreading(2.0, 0.0).below(np.array([1.9, 2.1])).tolist() == [0.0, 1.0]
    assert Spreading(2.0, 3.0, "normal").reach == 12.0
    assert Spreading(2.0, 3.0).reach == 3.0


@pytest.mark.parametrize(("mass", "kelvin"), [(LIGHT_KG, 100.0), (MASS_KG, 300.0)])
def test_a_cloud_in_a_well_has_its_temperature(mass: float, kelvin: float) -> None:
    # <m v^2>/k = T; <z U'>/k = T as well, the virial (derived).
    potential = TABLE.potential([-70, 0, -45, 45], -1)
    basin = potential.basin(0.0)
    assert basin is not None
    z_m, speed = thermal(potential, basin, kelvin, mass, 2000)
    hot = mass * (speed**2).mean() / EV / THERMAL_EV_PER_K
    assert hot == pytest.approx(kelvin, rel=0.02)
    slope = np.interp(z_m, potential.z_m, potential.slope_V_per_m)
    virial = ((z_m - z_m.mean()) * slope).mean() / THERMAL_EV_PER_K
    assert virial == pytest.approx(kelvin, rel=0.03)
    twice = thermal(potential, basin, 2 * kelvin, mass, 2000)[1]
    assert mass * (twice**2).mean() / EV / THERMAL_EV_PER_K != pytest.approx(kelvin, rel=0.02)


def test_nobody_starts_above_the_barrier() -> None:
    potential = TABLE.potential([-70, 0, -45, 45], -1)
    basin = potential.basin(0.0)
    assert basin is not None
    z_m, speed = thermal(potential, basin, 3e5, MASS_KG, 3000)
    energy = MASS_KG * speed**2 / 2 / EV + potential.at(z_m)
    assert energy.max() < basin.barrier_V
    # Next to the top itself whole intervals leave a few out.
    assert potential.holds(z_m, energy).mean() > 0.99


def test_two_charges_feel_twice_the_volts() -> None:
    potential, double = (
        TABLE.potential([a, 0, b, 45 * c], -1) for a, b, c in ((-70, -45, 1), (-140, -90, 2))
    )
    one, two = potential.basin(0.0), double.basin(0.0)
    assert one is not None
    assert two is not None
    first = thermal(potential, one, 300.0, MASS_KG, 100, 2.0)
    second = thermal(double, two, 300.0, MASS_KG, 100, 1.0)
    assert first[0] == pytest.approx(second[0], abs=1e-12)
    assert first[1] == pytest.approx(second[1])
