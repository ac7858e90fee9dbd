"""Grids chosen for clouds, and radial profiles put on them."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from plasma_wells import E1, E2, E3, RADIUS_M, solved

from wellseq.clouds.grid import UNIFORM_RADII
from wellseq.clouds.layout import RadialProfile, empty_wells, grid_of, radius_of, tube_of


def chosen(example, fineness: float = 1.0, **changes):
    cloud = example.cloud(**changes)
    ends = (-example.tube_m, example.tube_m)
    wells = empty_wells(example.wall.on_axis().exact, RADIUS_M, [cloud], ends)
    return grid_of(example.wall, [cloud], wells, ends, fineness)


@pytest.mark.parametrize("example", [E1, E2, E3])
def test_the_fine_part_holds_the_cloud(example) -> None:
    grid = chosen(example)
    steps = np.diff(grid.z_face_m)
    fine = grid.z_face_m[:-1][steps < 1.0001 * steps.min()]
    at = solved(example).clouds[0]
    assert fine[0] < at.left_end_m
    assert at.right_end_m < fine[-1]
    assert grid.r_face_m[grid.uniform_rings] == pytest.approx(UNIFORM_RADII * example.radius_m)
    assert 5_000 < grid.shape[0] * grid.shape[1] < 20_000


def test_fineness_divides_every_step() -> None:
    coarse, fine = chosen(E3), chosen(E3, fineness=2.0)
    assert fine.r_face_m[1] == pytest.approx(coarse.r_face_m[1] / 2)
    sizes = [np.diff(grid.z_face_m).min() for grid in (coarse, fine)]
    assert sizes[1] == pytest.approx(sizes[0] / 2, rel=0.02)


def test_a_long_cloud_gets_slices_of_a_tenth_of_the_bore() -> None:
    long = replace(E1, edge_m=0.5, tube_m=0.6)
    assert np.diff(chosen(long).z_face_m).min() <= RADIUS_M / 10


def test_the_tube_goes_on_beyond_every_barrier() -> None:
    clouds = [
        E3.cloud(between_m=(-0.03, 0.01)),
        E3.cloud(between_m=(-0.01, 0.05)),
    ]
    assert tube_of(E3.wall, clouds) == pytest.approx((-0.03 - 6 * RADIUS_M, 0.05 + 6 * RADIUS_M))


@given(st.floats(0.3e-3, 5e-3))
def test_radius_of_a_uniform_column(radius_m: float) -> None:
    edge = np.array([0.0, 0.999999, 1.0]) * radius_m
    profile = RadialProfile(edge, np.array([1.0, 1.0, 0.0]))
    assert profile.mean_radius_m == pytest.approx(radius_m, rel=2e-3)


def test_counts_of_a_profile() -> None:
    grid = chosen(E3)
    profile = RadialProfile(np.array([0.0, 1e-3, 2e-3]), np.array([2.0, 1.0, 0.0]))
    counts = profile.counts(grid, 5e6)
    assert counts.sum() == pytest.approx(5e6, rel=1e-12)
    assert (counts[grid.r_m > 2e-3] == 0).all()
    density = counts / grid.area_m2
    assert density[0] / density[np.argmin(np.abs(grid.r_m - 1e-3))] == pytest.approx(2, rel=0.05)


def test_radius_estimated_from_rotation() -> None:
    at = solved(E3).clouds[0]
    cloud = E3.cloud(radius_m=None, pressure_V_per_m2=at.pressure_V_per_m2.value)
    guess = radius_of(cloud, E3.well(), E3.wall)
    assert guess == pytest.approx(E3.radius_m, rel=0.1)
    assert radius_of(E3.cloud(), E3.well(), E3.wall) == E3.radius_m
    assert math.isfinite(radius_of(replace(cloud, pressure_V_per_m2=1e-3), E3.well(), E3.wall))
