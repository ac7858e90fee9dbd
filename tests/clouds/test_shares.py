"""Shares of a cloud: sums, and the convex part of a change in both of its forms."""

from __future__ import annotations

import numpy as np
import pytest
from plasma_wells import E3, solved

from wellseq.clouds.shares import Charges, Shares


def made(**changes) -> Shares:
    found = solved(E3)
    settled = {
        "charge_e": 1,
        "number": E3.number,
        "thermal_eV": 0.5,
        "first": 20,
        "last": found.grid.shape[0] - 20,
        "rings": found.grid.uniform_rings,
        "mean_r2_m2": E3.radius_m**2 / 2,
    }
    item = Shares(Charges(**(settled | changes)), found.grid, found.vacuum_V)
    item.update(found.solved.own_V, 3e5)
    return item


def profiled() -> Shares:
    counts = np.linspace(2.0, 0.0, solved(E3).grid.uniform_rings)
    return made(mean_r2_m2=None, profile=counts * E3.number / counts.sum())


def test_shares_sum_to_one() -> None:
    assert made().values.sum() == pytest.approx(1.0, abs=1e-13)
    assert made().held.sum() == pytest.approx(E3.number, rel=1e-12)
    assert profiled().values.sum(axis=0) == pytest.approx(1.0, abs=1e-13)
    assert profiled().held.sum() == pytest.approx(E3.number, rel=1e-12)


@pytest.mark.parametrize("item", [made(), profiled()], ids=["whole", "by radius"])
def test_both_forms_of_the_convex_part_agree(item: Shares) -> None:
    wave = np.cos(np.arange(item.values.size)).reshape(item.values.shape)
    axis = None if item.cloud.profile is None else 0
    wave -= (item.values * wave).sum(axis=axis, keepdims=True)
    wave /= np.abs(wave).max()
    below, above = item.convex_part_eV(0.4999 * wave), item.convex_part_eV(0.5001 * wave)
    # Quadratic in the move to leading order: 8e-4 between the two, no jump where the form changes.
    assert above / below == pytest.approx(1 + 8e-4, abs=2e-4)
    assert below > 0
    tiny = item.convex_part_eV(1e-9 * wave)
    variance = (item.counts * (item.values * wave**2).sum(axis=axis)).sum() / 2
    assert tiny == pytest.approx(0.5 * variance * 1e-18, rel=1e-6)


def test_columns_and_weights() -> None:
    item = profiled()
    kept = (item.counts > 0).sum()
    columns = item.columns()
    assert columns.shape == (*item.values.shape, kept)
    assert columns.sum(axis=(0, 1)) == pytest.approx(1.0)
    assert item.weights() @ np.ones(kept) == pytest.approx(E3.number / 0.5)
    assert made(charge_e=-2).weights() == pytest.approx(4 * E3.number / 0.5)


def test_a_move_has_no_mean() -> None:
    item = made()
    move = item.move(np.cos(solved(E3).vacuum_V), 1e4)
    assert (item.values * move).sum() == pytest.approx(0.0, abs=1e-12)
    assert np.abs(move).max() > 0.01
