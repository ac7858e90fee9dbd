"""The Laplacian on rings: exact where it should be, second order elsewhere, against Fourier."""

from __future__ import annotations

import numpy as np
import pytest
from plasma_wells import E4, RADIUS_M

from wellseq.clouds.grid import CELLS_MAX, TooLarge, grid_for


def made(fineness: float = 1.0, **changes):
    spans = {"fine_m": (-0.02, 0.02), "detail_m": (-0.05, 0.05), "tube_m": (-0.1, 0.1)}
    settled = {"wall_radius_m": RADIUS_M, "cloud_radius_m": 1.5e-3, "slices": 60, "rings": 20}
    return grid_for(**(spans | settled | changes), fineness=fineness)


def test_r_squared_is_exact_in_the_equal_rings() -> None:
    grid = made()
    field = np.tile(grid.r2_m2, (grid.shape[0], 1))
    inner = slice(0, grid.uniform_rings - 1)
    laplacian = -grid.apply(field)[:, inner] / grid.volume_m3[:, inner]
    assert np.abs(laplacian / 4 - 1).max() < 1e-9
    assert (
        np.abs(-grid.apply(1.001 * field)[:, inner] / grid.volume_m3[:, inner] / 4 - 1).max() > 9e-4
    )


def test_logarithm_carries_one_flux_through_the_stretched_rings() -> None:
    grid = made()
    # Unit charge per metre on the first ring: beyond the equal rings φ is the logarithm exactly.
    from scipy.linalg import solveh_banded

    source = np.zeros(grid.shape)
    source[:, 0] = np.diff(grid.z_face_m)
    field = solveh_banded(grid.matrix(), source.ravel(), lower=True).reshape(grid.shape)
    outer = slice(grid.uniform_rings + 1, None)
    exact = np.log(RADIUS_M / grid.r_m[outer]) / (2 * np.pi)
    assert np.abs(field[:, outer] / exact - 1).max() < 1e-9


def test_the_matrix_is_the_operator() -> None:
    grid = made(slices=12, rings=6)
    nz, nr = grid.shape
    bands = grid.matrix()
    whole = np.diag(bands[0])
    for offset in (1, nr):
        lower = np.diag(bands[offset][: nz * nr - offset], -offset)
        whole += lower + lower.T
    field = np.random.default_rng(0).normal(size=grid.shape)
    assert np.abs(whole @ field.ravel() - grid.apply(field).ravel()).max() < 1e-12
    assert np.linalg.eigvalsh(whole).min() > 0


def error_V(fineness: float) -> float:
    grid = made(fineness)
    found = grid.on_axis(grid.vacuum_V(E4.wall))
    exact = E4.wall.on_axis().exact(grid.z_m)
    return float(np.abs(found - exact).max())


def test_empty_bore_against_fourier() -> None:
    coarse, fine = error_V(1.0), error_V(2.0)
    assert coarse < 0.15  # of 70 V
    # Second order; averages over cells of a wall with sharp steps blur the number a little.
    assert 2.8 < coarse / fine < 5.5


def test_a_blurred_wall_would_be_seen() -> None:
    grid = made(2.0)
    wall_V = np.interp(grid.z_m, E4.wall.corner_m + 2e-4, E4.wall.level_V)
    from scipy.linalg import solveh_banded

    field = solveh_banded(grid.matrix(), grid.wall_source(wall_V).ravel(), lower=True)
    found = grid.on_axis(field.reshape(grid.shape))
    assert np.abs(found - E4.wall.on_axis().exact(grid.z_m)).max() > 3 * error_V(2.0)


def test_constant_walls_make_a_constant() -> None:
    grid = made()
    source = grid.wall_source(np.full(grid.shape[0], 3.0))
    assert np.abs(grid.apply(np.zeros(grid.shape)) - 0).max() == 0
    # What a field of 3 V above the wall would leak is what a wall at 3 V brings in.
    assert np.abs(grid.apply(np.full(grid.shape, 3.0)) - source).max() < 1e-12


def test_volumes_fill_the_tube() -> None:
    grid = made()
    assert grid.volume_m3.sum() == pytest.approx(np.pi * RADIUS_M**2 * 0.2, rel=1e-12)
    assert grid.z_face_m[[0, -1]] == pytest.approx([-0.1, 0.1])
    steps = np.diff(grid.z_face_m)
    assert (steps > 0).all()
    assert (steps[1:] / steps[:-1]).max() < 1.25


def test_what_does_not_fit_is_refused() -> None:
    with pytest.raises(ValueError, match="fit into the bore"):
        made(cloud_radius_m=RADIUS_M)
    with pytest.raises(ValueError, match="must lie in"):
        made(detail_m=(-0.01, 0.01))
    with pytest.raises(TooLarge) as caught:
        made(slices=20_000)
    assert caught.value.cells > CELLS_MAX
