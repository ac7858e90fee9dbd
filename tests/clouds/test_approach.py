"""Tracks of a bunch through a trap that stands still."""

from __future__ import annotations

import numpy as np
import pytest
from tanh_tubes import EV, MASS_KG, tubes

from wellseq.clouds.approach import WAY_M, Tracks, approach
from wellseq.clouds.flight import fly, plain_speed
from wellseq.clouds.waveforms import still

TABLE = tubes([(-0.025, 0.025), (0.475, 0.525)], (-0.25, 0.75))
VOLTS = np.array([0.0, -5000.0])
ENERGY = np.array([50.0, 700.0, 3000.0, 4500.0])


def tracks(early_s: float = 1e-7, volts: np.ndarray = VOLTS, **changed: float) -> Tracks:
    gates = {"near_m": 0.0, "far_m": 0.5} | changed
    return approach(
        table=TABLE,
        volts=volts,
        mass_kg=MASS_KG,
        charge_e=-1,
        energy_eV=ENERGY,
        early_s=early_s,
        **gates,
    )


def test_a_free_particle_passes_the_gate_at_time_nought() -> None:
    found = tracks()
    speed = plain_speed(ENERGY, MASS_KG)
    before = found.since_s < 0.0
    free = found.z_m - speed * found.since_s
    assert np.abs(free[before]).max() < 1e-6
    assert (found.since_s[0] <= -1e-7).all()
    assert (found.z_m[0] <= TABLE.start_m).all()
    assert len(set(found.z_m[0].tolist())) == ENERGY.size


def test_all_come_out_again_with_their_energy() -> None:
    found = tracks()
    assert (found.z_m[-1] < 0.0).all()
    assert (found.speed_m_per_s[-1] < 0.0).all()
    last = MASS_KG * found.speed_m_per_s[-1] ** 2 / 2 / EV
    assert last == pytest.approx(ENERGY, rel=1e-4)


def test_the_track_is_a_flight() -> None:
    found, at = tracks(), 150
    for column in range(ENERGY.size):
        flown = fly(
            table=TABLE,
            waves=still(list(VOLTS)),
            mass_kg=MASS_KG,
            charge_e=-1,
            z_m=found.z_m[0, [column]],
            speed_m_per_s=found.speed_m_per_s[0, [column]],
            start_s=0.0,
            end_s=float(found.since_s[at, column] - found.since_s[0, column]),
            step_s=WAY_M / found.speed_m_per_s[0, column] / 4,
        )
        assert flown.z_m[0] == pytest.approx(found.z_m[at, column], abs=2e-5)
        assert flown.z_m[0] != pytest.approx(found.z_m[at + 1, column], abs=2e-5)


def test_from_the_right() -> None:
    mirrored = tracks(volts=VOLTS[::-1].copy(), near_m=0.5, far_m=0.0)
    assert mirrored.z_m == pytest.approx(0.5 - tracks().z_m, abs=1e-6)


def test_tracks_begin_early_enough() -> None:
    found = tracks(early_s=3e-6)
    assert (found.since_s[0] <= -3e-6).all()


def test_who_gets_over_the_far_gate_ends_the_track() -> None:
    found = tracks(volts=np.array([0.0, -100.0]))
    assert (found.z_m[-1, 1:] > 0.5).all()
    assert found.z_m.shape[0] < 2000
