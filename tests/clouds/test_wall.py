"""Wall potentials: averages against dense sums, gaps as the field's rule has them."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.clouds.wall import wall_of, wall_of_steps

NAMES = ("A", "B", "C")
STACK = [
    SimpleNamespace(name=name, from_m=0.02 * i, to_m=0.02 * i + 0.019, radius_m=0.015)
    for i, name in enumerate(NAMES)
]


def dense(wall, low: float, high: float) -> float:
    """The average by a hundred thousand points."""
    place = low + (high - low) * (np.arange(100_000) + 0.5) / 100_000
    return float(np.interp(place, wall.corner_m, wall.level_V).mean())


@given(st.floats(-0.08, 0.07), st.floats(1e-4, 0.05), st.floats(-100, 100), st.floats(-100, 100))
def test_averages_are_exact(low: float, width: float, left_V: float, mid_V: float) -> None:
    wall = wall_of_steps([-0.03, 0.02], [left_V, mid_V, 5.0], 0.015, 2e-3)
    found = wall.averages_V(np.array([low, low + width]))
    assert found[0] == pytest.approx(dense(wall, low, low + width), abs=2e-3 + 1e-4 * abs(mid_V))


def test_averages_add_up() -> None:
    wall = wall_of_steps([-0.03, 0.02], [-7.0, 3.0, 5.0], 0.015, 2e-3)
    faces = np.sort(np.random.default_rng(1).uniform(-0.1, 0.1, 50))
    parts = wall.averages_V(faces) @ np.diff(faces)
    whole = wall.averages_V(faces[[0, -1]])[0] * (faces[-1] - faces[0])
    assert parts == pytest.approx(whole, abs=1e-15)


def test_electrodes_with_gaps() -> None:
    wall = wall_of(STACK, {"B": 10.0})
    # Halfway across the gap half the voltage; a cell inside the electrode has all of it.
    middle = wall.averages_V(np.array([0.0195 - 1e-9, 0.0195 + 1e-9]))[0]
    assert middle == pytest.approx(5.0, abs=1e-3)
    assert wall.averages_V(np.array([0.022, 0.037]))[0] == pytest.approx(10.0)
    # A gap of 1 mm changes over 1.1027 mm: just outside the true gap there is still a slope.
    edge = wall.averages_V(np.array([0.01896 - 1e-9, 0.01896 + 1e-9]))[0]
    assert edge == pytest.approx(10.0 * (0.01896 - 0.0195 + 0.55135e-3) / 1.1027e-3, abs=1e-3)
    assert wall.averages_V(np.array([-1.0, -0.9, 0.06, 0.07]))[[0, 2]] == pytest.approx([0, 0])


def test_ends_of_the_stack_are_steps() -> None:
    wall = wall_of(STACK, {"A": 4.0})
    assert wall.averages_V(np.array([-0.001, 0.0, 0.001])) == pytest.approx([0.0, 4.0])


def test_what_is_no_wall_is_refused() -> None:
    with pytest.raises(ValueError, match="no electrode 'D'"):
        wall_of(STACK, {"D": 1.0})
    with pytest.raises(ValueError, match="overlap"):
        wall_of_steps([0.0, 0.001], [0.0, 1.0, 0.0], 0.015, 2e-3)
    with pytest.raises(ValueError, match="one level more"):
        wall_of_steps([0.0], [0.0], 0.015, 1e-3)


def on_axis_V(wall, place_m: float) -> float:
    """A wide ring by its own integral: V(0) = (1/π) ∫ F(k)/I0(ka) cos(kz) dk over the corners."""
    a = wall.radius_m
    k = (np.arange(40_000) + 0.5) * (40.0 / a / 40_000)
    slope = np.diff(wall.level_V) / np.diff(wall.corner_m)
    # φ'' on the wall is a sum of jumps of the slope at the corners.
    jump = np.diff(np.concatenate(([0.0], slope, [0.0])))
    table = -jump[:, None] * np.cos(k * (place_m - wall.corner_m[:, None])) / k**2
    return float((table.sum(axis=0) / np.i0(k * a)).sum() * (k[1] - k[0]) / np.pi)


def test_on_axis_against_its_integral() -> None:
    wall = wall_of_steps([-0.03, 0.02], [0.0, 12.0, 0.0], 0.015, 2e-3)
    curve = wall.on_axis()
    for place in (-0.05, -0.03, 0.0, 0.011):
        assert curve.exact(np.array([place]))[0] == pytest.approx(on_axis_V(wall, place), abs=1e-6)
    assert curve.exact(np.array([0.0]))[0] != pytest.approx(on_axis_V(wall, 1e-5), abs=1e-6)


def test_levels_at_the_ends_go_on() -> None:
    wall = wall_of_steps([-0.012, 0.012], [-70.0, 0.0, -70.0], 0.018, 1e-3)
    far = wall.on_axis().exact(np.array([-0.2, 0.2]))
    assert far == pytest.approx([-70.0, -70.0], abs=1e-6)
