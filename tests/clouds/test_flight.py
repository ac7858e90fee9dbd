"""Flights of test particles: speeds, energy kept, edges, who leaves when, and how fast it goes."""

from __future__ import annotations

from math import pi, sqrt
from time import process_time

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tanh_tubes import EV, LIGHT_KG, MASS_KG, lined_up, ramp, tubes

from wellseq.clouds import flight
from wellseq.clouds.flight import Flown, fly, plain_speed, segments, speed_of
from wellseq.clouds.forces import ForceTable
from wellseq.clouds.waveforms import Waveforms, still

FLAT = lined_up([-0.15, -0.05, 0.05, 0.15], (-0.35, 0.35))
FLAT_V = [-10.0, 0.0, -10.0]
WELL = lined_up([-0.08, -0.012, 0.012, 0.036, 0.4], (-0.25, 0.57))
WELL_V = [-25.0, 0.0, -14.0, 12.0]


def antiprotons(table: ForceTable, waves: Waveforms, z_m: list[float], **more: object) -> Flown:
    """Fly antiprotons from rest, unless `speed` (m/s) says otherwise, in steps of 5 ns."""
    speed = np.array(more.pop("speed", [0.0] * len(z_m)))
    settings: dict[str, object] = {"start_s": 0.0, "end_s": 1e-5, "step_s": 5e-9} | more
    return fly(
        table=table,
        waves=waves,
        mass_kg=MASS_KG,
        charge_e=-1,
        z_m=np.array(z_m),
        speed_m_per_s=speed,
        **settings,  # type: ignore[arg-type]
    )


# (id, energy eV, mass, what to compare, value, tolerance)
SPEEDS = [
    # J01, from memory: electron speed coefficient sqrt(2e/m); Plasma Formulary (2007 ed.).
    ("J01", 1.0, LIGHT_KG, "speed", 593_000.0, 500.0),
    # J02, derived: relativistic, CODATA 2018 masses, Rev. Mod. Phys. 93, 025010 (2021).
    ("J02", 5e3, MASS_KG, "speed", 978_700.0, 300.0),
    # J03, derived: 5 keV antiproton, round trip of a 0.25 m trap.
    ("J03", 5e3, MASS_KG, 0.5, 510.9e-9, 0.5e-9),
    # J04, derived: 100 eV positron over 1 m.
    ("J04", 100.0, LIGHT_KG, 1.0, 168.6e-9, 0.2e-9),
    # J05, derived: 1 eV proton.
    ("J05", 1.0, MASS_KG, "speed", 13_840.0, 20.0),
    # J06, printed in a worked example: 30 eV electron.
    ("J06", 30.0, LIGHT_KG, "speed", 3.25e6, 1e4),
]


@pytest.mark.parametrize(("name", "energy", "mass", "what", "value", "near"), SPEEDS)
def test_published_speeds(
    name: str, energy: float, mass: float, what: str | float, value: float, near: float
) -> None:
    def told(energy_eV: float) -> float:
        speed = speed_of(energy_eV, mass)
        return speed if isinstance(what, str) else what / speed

    assert told(energy) == pytest.approx(value, abs=near), name
    assert told(energy * 1.02) != pytest.approx(value, abs=near), name


def test_newton_s_speed_is_the_relativistic_one_while_slow() -> None:
    energy = np.array([1.0, 30.0, 500.0])
    exact = [speed_of(one, LIGHT_KG) for one in energy]
    assert plain_speed(energy, LIGHT_KG) == pytest.approx(exact, rel=8e-4)
    # Too fast by 3/4 of the share of the rest energy.
    assert plain_speed(np.array([2555.0]), LIGHT_KG)[0] / speed_of(2555.0, LIGHT_KG) == (
        pytest.approx(1.00373, abs=1e-4)
    )


def test_small_bounces_have_the_frequency_of_the_curvature() -> None:
    potential = WELL.potential(WELL_V, -1)
    basin = potential.basin(0.0)
    assert basin is not None
    h = 1e-4
    bend = (potential.at(basin.bottom_m + h) + potential.at(basin.bottom_m - h)) / h**2
    bend -= 2 * potential.at(basin.bottom_m) / h**2
    period = 2 * pi / sqrt(EV * float(bend) / MASS_KG)
    flown = antiprotons(
        WELL, still(WELL_V), [basin.bottom_m + 2e-4], end_s=period / 4, step_s=period / 1600
    )
    assert flown.z_m[0] == pytest.approx(basin.bottom_m, abs=3e-6)
    late = antiprotons(
        WELL, still(WELL_V), [basin.bottom_m + 2e-4], end_s=period / 3.8, step_s=period / 1600
    )
    assert late.z_m[0] != pytest.approx(basin.bottom_m, abs=3e-6)


def worst_drift(step_s: float, steps: int, looks: int = 60) -> float:
    """Greatest change of energy over the depth, of particles at 6.1 eV and others, at `looks`."""
    potential = FLAT.potential(FLAT_V, -1)
    basin = potential.basin(0.0)
    assert basin is not None
    above = np.append(np.linspace(0.2, 0.97, 5) * basin.depth_V, 6.10)
    z_m, speed = np.full(6, basin.bottom_m), plain_speed(above, MASS_KG)
    worst = 0.0
    for _ in range(looks):
        flown = fly(
            table=FLAT,
            waves=still(FLAT_V),
            mass_kg=MASS_KG,
            charge_e=-1,
            z_m=z_m,
            speed_m_per_s=speed,
            start_s=0.0,
            end_s=step_s * steps / looks,
            step_s=step_s,
        )
        z_m, speed = flown.z_m, flown.speed_m_per_s
        change = flown.energy_eV - basin.bottom_V - above
        worst = max(worst, float(np.abs(change).max()) / basin.depth_V)
    return worst


def test_energy_is_kept() -> None:
    # A 6.1 eV antiproton bounces in about 6.6 us here: 200 and 600 steps per bounce, 20,000 steps.
    assert worst_drift(33e-9, 20_000) < 1e-3
    assert worst_drift(11e-9, 20_000) < 1e-4
    # Companion: steps that are too long are seen.
    assert worst_drift(150e-9, 2_000) > 1e-3


def test_energy_does_not_creep_away_over_a_hundred_thousand_steps() -> None:
    assert worst_drift(40e-9, 100_000, 20) < 1e-3


def test_a_particle_deep_in_a_tube_rides_with_its_volts() -> None:
    long = tubes([(-0.3, 0.3)], (-0.6, 0.6))
    flown = antiprotons(long, ramp(1e-6, 3e-6, [0.0], [-500.0]), [0.0], speed=[2000.0], end_s=4e-6)
    kinetic = MASS_KG * 2000.0**2 / 2 / EV
    assert flown.energy_eV[0] == pytest.approx(500.0 + kinetic, abs=1e-6)
    assert flown.speed_m_per_s[0] == pytest.approx(2000.0, abs=1e-6)
    half = antiprotons(long, ramp(1e-6, 3e-6, [0.0], [-500.0]), [0.0], end_s=2e-6)
    assert half.energy_eV[0] == pytest.approx(250.0, abs=1e-6)


def test_a_jump_takes_no_time() -> None:
    long = tubes([(-0.3, 0.3)], (-0.6, 0.6))
    waves = Waveforms(np.array([1e-6, 1e-6]), np.array([[0.0], [-80.0]]))
    assert antiprotons(long, waves, [0.0], end_s=2e-6).energy_eV[0] == pytest.approx(80.0)
    assert antiprotons(long, waves, [0.0], end_s=0.9e-6).energy_eV[0] == pytest.approx(0.0)


def test_flights_can_be_taken_back() -> None:
    # Kick-drift-kick is its own inverse when time runs backwards, edges and all (derived).
    there = Waveforms(
        np.array([0.0, 1e-6, 1.2e-6, 3e-6, 4e-6]),
        np.array([WELL_V, WELL_V, [-25, 0, -9, 12], [-30, 5, -9, 12], [-25, 0, -20, 12]]),
    )
    back = Waveforms(4e-6 - there.times_s[::-1], there.volts[::-1])
    z_m = [-0.004, 0.001, 0.006]
    out = antiprotons(WELL, there, z_m, end_s=4e-6)
    home = antiprotons(WELL, back, list(out.z_m), speed=-out.speed_m_per_s, end_s=4e-6)
    assert home.z_m == pytest.approx(z_m, abs=1e-10)
    assert home.speed_m_per_s == pytest.approx(0.0, abs=1e-4)
    # Companion: the same way back through other edges does not lead home.
    other = antiprotons(WELL, there, list(out.z_m), speed=-out.speed_m_per_s, end_s=4e-6)
    assert other.z_m != pytest.approx(z_m, abs=1e-5)


def test_who_leaves_leaves_on_time() -> None:
    speed = np.array([-3000.0, 4000.0, 100.0])
    flown = antiprotons(
        FLAT, still([0.0] * 3), [-0.2, 0.1, 0.0], speed=speed, end_s=5e-5, leave_m=(-0.25, 0.2)
    )
    assert flown.side.tolist() == [-1, 1, 0]
    assert flown.left_s[:2] == pytest.approx([0.05 / 3000.0, 0.1 / 4000.0], rel=1e-9)
    assert np.isnan(flown.left_s[2])
    assert flown.energy_eV == pytest.approx(MASS_KG * speed**2 / 2 / EV)
    assert flown.z_m[2] == pytest.approx(0.005)


def test_beyond_the_table_particles_drift_on() -> None:
    flown = antiprotons(FLAT, still(FLAT_V), [1.0], speed=[-10_000.0], end_s=2.5e-4, step_s=2e-8)
    # Too slow for the barrier at 10 V it comes back; free flight outside conserves its speed.
    assert flown.speed_m_per_s[0] == pytest.approx(10_000.0, rel=1e-6)
    assert flown.z_m[0] > 0.35


@settings(max_examples=15, deadline=None)
@given(scale=st.floats(0.2, 3.0), at=st.floats(-0.05, 0.05))
def test_faster_by_the_root_of_volts_over_mass(scale: float, at: float) -> None:
    # z(t; V, m) depends on t sqrt(V/m) alone (derived).
    first = antiprotons(FLAT, still(FLAT_V), [at], end_s=4e-6)
    volts = [scale * one for one in FLAT_V]
    second = antiprotons(
        FLAT, still(volts), [at], end_s=4e-6 / sqrt(scale), step_s=5e-9 / sqrt(scale)
    )
    assert second.z_m == pytest.approx(first.z_m, abs=1e-9)


def test_two_charges_are_like_two_volts() -> None:
    one = fly_ion(-2.0, FLAT_V)
    two = fly_ion(-1.0, [2 * volts for volts in FLAT_V])
    assert one.z_m == pytest.approx(two.z_m, abs=1e-12)
    assert one.energy_eV == pytest.approx(two.energy_eV)
    assert fly_ion(-1.0, FLAT_V).z_m != pytest.approx(two.z_m, abs=1e-6)


def fly_ion(charge_e: float, volts: list[float]) -> Flown:
    return fly(
        table=FLAT,
        waves=still(volts),
        mass_kg=MASS_KG,
        charge_e=charge_e,
        z_m=np.array([0.03]),
        speed_m_per_s=np.zeros(1),
        start_s=0.0,
        end_s=3e-6,
        step_s=5e-9,
    )


def test_every_edge_is_stepped_through() -> None:
    waves = Waveforms(np.array([0.0, 1e-9, 5e-6, 5e-6 + 3e-9]), np.array([[0.0], [1], [1], [0]]))
    parts = list(segments(waves, 0.0, 1e-5, 1e-6))
    assert [part.steps for part in parts] == [1, 5, 1, 5]
    assert [part.step_s <= 1e-6 for part in parts] == [True] * 4
    assert parts[0].to_V.tolist() == [1.0]
    assert parts[-1].end_s == 1e-5


def test_no_figures_for_too_much_work_or_too_much_speed() -> None:
    many = antiprotons(FLAT, still(FLAT_V), [0.0], end_s=1.0, step_s=1e-9)
    assert many.outside[0].quantity == "steps"
    assert many.outside[0].limit == flight.STEPS_MAX
    assert np.isnan(many.energy_eV).all()
    fast = antiprotons(FLAT, still(FLAT_V), [0.0], speed=[3.1e7])
    assert [one.quantity for one in fast.outside] == ["kinetic over rest energy"]
    assert not antiprotons(FLAT, still(FLAT_V), [0.0], speed=[2.9e7]).outside


def test_no_figures_when_particles_become_too_fast() -> None:
    flown = fly(
        table=FLAT,
        waves=still([0.0, 4000.0, 0.0]),
        mass_kg=LIGHT_KG,
        charge_e=-1,
        z_m=np.array([-0.1]),
        speed_m_per_s=np.array([2e7]),
        start_s=0.0,
        end_s=3e-9,
        step_s=1e-11,
    )
    assert flown.outside
    assert np.isnan(flown.z_m).all()


def test_shapes_must_match() -> None:
    with pytest.raises(ValueError, match="same electrodes"):
        antiprotons(FLAT, still([0.0]), [0.0])
    with pytest.raises(ValueError, match="one length"):
        antiprotons(FLAT, still(FLAT_V), [0.0], speed=[0.0, 1.0])


def test_the_same_flight_is_the_same_to_the_last_bit() -> None:
    first = antiprotons(WELL, ramp(0, 1e-5, WELL_V, [-25, 0, 3, 12]), [0.0, 0.003])
    again = antiprotons(WELL, ramp(0, 1e-5, WELL_V, [-25, 0, 3, 12]), [0.0, 0.003])
    assert first.z_m.tobytes() == again.z_m.tobytes()
    assert first.energy_eV.tobytes() == again.energy_eV.tobytes()


def test_fifteen_million_particle_steps_per_second() -> None:
    z_m = np.linspace(-0.005, 0.005, 4000)
    waves = ramp(0.0, 2e-6, WELL_V, [-25, 0, 3, 12])
    best = 0.0
    for _ in range(3):
        before = process_time()
        flown = fly(
            table=WELL,
            waves=waves,
            mass_kg=MASS_KG,
            charge_e=-1,
            z_m=z_m,
            speed_m_per_s=np.zeros(4000),
            start_s=0.0,
            end_s=2e-6,
            step_s=5e-9,
            leave_m=(-0.08, 0.08),
        )
        best = max(best, flown.particle_steps / (process_time() - before))
    assert flown.particle_steps == 4000 * 400
    assert best > 1.5e7
