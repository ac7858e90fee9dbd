"""Catching a bunch: the worked examples, the flight of every particle for itself, best times."""

from __future__ import annotations

from functools import cache
from math import isnan
from time import process_time

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tanh_tubes import EV, LIGHT_KG, MASS_KG, ramp, tubes

from wellseq.clouds.catching import MARGIN, Bunch, Catch, catch, mirror, sharp
from wellseq.clouds.flight import fly, plain_speed
from wellseq.clouds.swarm import Spreading, even_points, normal_quantiles
from wellseq.clouds.waveforms import Waveforms

# Gates 50 mm long, middles 0.5 m apart, 5 kV on antiprotons (derived; invented trap).
TABLE = tubes([(-0.025, 0.025), (0.475, 0.525)], (-0.25, 0.75))
GATE_V = -5000.0
BUNCH = Bunch(Spreading(4525.0, 4475.0), Spreading(0.8e-6, 50e-9, "normal"))


def shutting(start_s: float, rise_s: float, gate_V: float = GATE_V) -> Waveforms:
    return ramp(start_s, start_s + rise_s, [0.0, gate_V], [gate_V, gate_V])


def caught(start_s: float, rise_s: float, gate_V: float = GATE_V, **changed: object) -> Catch:
    asked: dict[str, object] = {
        "table": TABLE,
        "waves": shutting(start_s, rise_s, gate_V),
        "mass_kg": MASS_KG,
        "charge_e": -1,
        "bunch": BUNCH,
        "near_m": 0.0,
        "far_m": 0.5,
        "closing_s": start_s + rise_s / 2,
    }
    return catch(**(asked | changed))  # type: ignore[arg-type]


def sharp_share(start_s: float, rise_s: float, bunch: Bunch = BUNCH, gate_V: float = 5e3) -> float:
    return sharp(
        bunch=bunch,
        gate_V=gate_V,
        start_s=start_s,
        rise_s=rise_s,
        apart_m=0.5,
        gate_m=0.05,
        mass_kg=MASS_KG,
    )


def mirror_share(start_s: float, rise_s: float, bunch: Bunch = BUNCH, gate_V: float = 5e3) -> float:
    open_trap = TABLE.potential([0.0, -gate_V], -1)
    return mirror(
        bunch=bunch,
        open_trap=open_trap,
        gate_V=float(open_trap.crest_V.max()),
        start_s=start_s,
        rise_s=rise_s,
        near_m=0.0,
        far_m=0.5,
        mass_kg=MASS_KG,
    )


# start, rise, sharp, mirror, flight, mean energy change of the worked example (derived).
EXAMPLES = [
    (1.5e-6, 150e-9, 0.553, 0.526, 0.526, 0.0),
    (1.8e-6, 150e-9, 0.425, 0.500, 0.480, 21.0),
    (2.2e-6, 150e-9, 0.242, 0.253, 0.243, 137.0),
    (1.5e-6, 1.2e-6, 0.293, 0.297, 0.290, 126.0),
]


@pytest.mark.parametrize(("start_s", "rise_s", "cheap", "profile", "flown", "gain_eV"), EXAMPLES)
def test_worked_examples(
    start_s: float, rise_s: float, cheap: float, profile: float, flown: float, gain_eV: float
) -> None:
    assert sharp_share(start_s, rise_s) == pytest.approx(cheap, abs=0.01)
    assert mirror_share(start_s, rise_s) == pytest.approx(profile, abs=0.01)
    found = caught(start_s, rise_s)
    assert found.share.value == pytest.approx(flown, abs=0.01)
    assert found.gain_eV == pytest.approx(gain_eV, abs=max(3.0, 0.05 * gain_eV))
    assert not found.outside
    # Companion: half a microsecond later is seen.
    later = caught(start_s + 0.5e-6, rise_s, energies=160)
    assert later.share.value != pytest.approx(flown, abs=0.01)


@pytest.mark.parametrize(("start_s", "rise_s"), [one[:2] for one in EXAMPLES])
def test_cheap_forms_are_as_good_as_stated(start_s: float, rise_s: float) -> None:
    flown = caught(start_s, rise_s).share.value
    assert sharp_share(start_s, rise_s) == pytest.approx(flown, abs=0.06)
    assert mirror_share(start_s, rise_s) == pytest.approx(flown, abs=0.025)


def test_the_highest_potential_on_the_axis() -> None:
    # 0.9499 of the gate's volts for 50 mm in a bore of 18.0 mm radius (derived).
    top = float(TABLE.potential([0.0, 1.0], 1).crest_V.max())
    assert top == pytest.approx(0.9499, abs=1e-4)


@cache
def one_by_one(start_s: float, rise_s: float, count: int = 3000) -> float:
    """Share caught when every particle is flown from far outside until all is over."""
    share, when = even_points(count, 2)
    energy = 50.0 + 8950.0 * share
    arrival = 0.8e-6 + 50e-9 * normal_quantiles(when)
    speed = plain_speed(energy, MASS_KG)
    flown = fly(
        table=TABLE,
        waves=shutting(start_s, rise_s),
        mass_kg=MASS_KG,
        charge_e=-1,
        z_m=-speed * arrival,
        speed_m_per_s=speed,
        start_s=0.0,
        end_s=start_s + rise_s + 0.2e-6,
        step_s=3e-9,
    )
    potential = TABLE.potential([GATE_V, GATE_V], -1)
    stays = potential.holds(flown.z_m, flown.energy_eV) & (flown.z_m > 0) & (flown.z_m < 0.5)
    return float(stays.mean())


@pytest.mark.parametrize(("start_s", "rise_s"), [(1.8e-6, 150e-9), (0.7e-6, 1e-7)])
def test_the_map_is_the_flight_of_every_particle(start_s: float, rise_s: float) -> None:
    found = caught(start_s, rise_s)
    each = one_by_one(start_s, rise_s)
    assert found.share.value == pytest.approx(each, abs=0.005)
    assert found.share.low <= each <= found.share.high
    assert caught(start_s + 60e-9, rise_s).share.value != pytest.approx(each, abs=0.005)


def test_more_energies_change_less_than_the_margin() -> None:
    found, finer = caught(1.8e-6, 150e-9), caught(1.8e-6, 150e-9, energies=1000)
    assert found.share.value == pytest.approx(finer.share.value, abs=MARGIN / 2)
    assert finer.particle_steps > 2 * found.particle_steps


def test_shares_are_what_the_closing_time_says_elsewhere() -> None:
    # The map made for one time tells the share at another, which a second map confirms.
    late = caught(2.2e-6, 150e-9, jitter_s=0.4e-6)
    assert late.share.high == pytest.approx(caught(1.8e-6, 150e-9).share.value + MARGIN, abs=2e-3)
    assert late.share.low == pytest.approx(caught(2.6e-6, 150e-9).share.value - MARGIN, abs=2e-3)


def test_the_best_time_and_the_good_ones() -> None:
    found = caught(2.2e-6, 150e-9)
    assert found.best_share == pytest.approx(0.525, abs=0.003)
    for closing, good in (
        (found.best_closing_s, True),
        (found.good_from_s + 5e-9, True),
        (found.good_to_s - 5e-9, True),
        (found.good_from_s - 15e-9, False),
        (found.good_to_s + 15e-9, False),
    ):
        share = caught(closing - 75e-9, 150e-9).share.value
        assert (share >= 0.98 * found.best_share - 2e-3) is good
    assert found.good_from_s < found.best_closing_s < found.good_to_s


def test_early_late_and_too_energetic() -> None:
    early, good, late = (caught(start, 150e-9) for start in (0.3e-6, 1.4e-6, 2.6e-6))
    assert early.early > 0.5
    assert early.late == pytest.approx(0.0, abs=1e-3)
    assert late.late > 0.3
    assert late.early == pytest.approx(0.0, abs=0.01)
    for one in (early, good, late):
        # 4749.5 eV of 50 to 9000 eV are turned round by both gates.
        assert one.energetic == pytest.approx(1 - 4699.5 / 8950, abs=0.002)
        assert one.share.value + one.early + one.late + one.energetic == pytest.approx(1.0)
    assert good.highest_eV < 4750.0
    assert good.mean_eV == pytest.approx(2400.0, abs=10.0)


def test_nobody_is_held_by_gates_that_are_too_low() -> None:
    found = caught(1.5e-6, 150e-9, bunch=Bunch(Spreading(9000.0, 100.0), BUNCH.arrival_s))
    assert found.share.value == 0.0
    assert found.share.high == MARGIN
    assert found.energetic == 1.0
    assert isnan(found.best_closing_s)
    assert isnan(found.gain_eV)
    assert not found.outside


@settings(max_examples=10, deadline=None)
@given(start=st.floats(0.2, 3.0), rise=st.floats(0.0, 0.5), gate=st.floats(500, 9000))
def test_shares_are_shares(start: float, rise: float, gate: float) -> None:
    found = caught(start * 1e-6, rise * 1e-6, -gate, energies=60)
    parts = (found.share.value, found.early, found.late, found.energetic)
    assert all(0.0 <= part <= 1.0 for part in parts)
    assert sum(parts) == pytest.approx(1.0, abs=1e-6)
    assert found.share.low <= found.share.value <= found.share.high
    assert found.share.value <= found.best_share + 0.01


@settings(max_examples=40, deadline=None)
@given(gate=st.floats(500.0, 9000.0), more=st.floats(1.0, 2.0))
def test_a_higher_gate_shut_at_once_never_catches_fewer(gate: float, more: float) -> None:
    low, high = (sharp_share(1.9e-6, 0.0, gate_V=one) for one in (gate, gate * more))
    assert high >= low


def test_from_the_right_it_is_the_same() -> None:
    turned = Waveforms(np.array([1.8e-6, 1.95e-6]), np.array([[GATE_V, 0.0], [GATE_V, GATE_V]]))
    found = caught(1.8e-6, 150e-9, waves=turned, near_m=0.5, far_m=0.0)
    assert found.share.value == pytest.approx(caught(1.8e-6, 150e-9).share.value, abs=1e-3)


def test_two_charges_at_twice_the_energy_are_like_one() -> None:
    double = Bunch(Spreading(9050.0, 8950.0), BUNCH.arrival_s)
    found = caught(1.8e-6, 150e-9, bunch=double, charge_e=-2, mass_kg=2 * MASS_KG)
    once = caught(1.8e-6, 150e-9)
    assert found.share.value == pytest.approx(once.share.value, abs=1e-9)
    assert found.gain_eV == pytest.approx(2 * once.gain_eV)


def test_intervals_span_the_other_edges() -> None:
    slow = shutting(1.7e-6, 350e-9)
    both = caught(1.8e-6, 150e-9, other_edges=(slow,))
    alone = caught(1.7e-6, 350e-9).share.value
    assert both.share.low <= alone <= both.share.high
    assert not caught(1.8e-6, 150e-9).share.low <= alone <= caught(1.8e-6, 150e-9).share.high
    assert both.share.value == caught(1.8e-6, 150e-9).share.value


@pytest.mark.parametrize(
    ("changed", "quantity"),
    [
        ({"waves": ramp(0.0, 1e-6, [GATE_V, GATE_V], [GATE_V, GATE_V])}, "swing of the gate"),
        ({"bunch": Bunch(Spreading(0.0, 0.0), BUNCH.arrival_s)}, "energy"),
        ({"bunch": Bunch(Spreading(float("nan"), 1.0), BUNCH.arrival_s)}, "energy"),
        ({"bunch": Bunch(BUNCH.energy_eV, Spreading(0.0, -1.0))}, "duration"),
        ({"jitter_s": -1e-9}, "jitter"),
        ({"mass_kg": 0.0}, "mass"),
        ({"mass_kg": LIGHT_KG, "waves": shutting(1.5e-6, 5e-8)}, "kinetic over rest energy"),
        ({"waves": shutting(1.5e-6, 30.0)}, "way flown"),
    ],
)
def test_no_figure_for_what_cannot_be(changed: dict[str, object], quantity: str) -> None:
    found = caught(1.5e-6, 150e-9, **changed)
    assert quantity in found.outside[0].quantity
    assert not found.share.known
    assert isnan(found.best_share)
    assert isnan(found.mean_eV)


def test_same_input_same_bits_within_a_second() -> None:
    before = process_time()
    first = caught(1.8e-6, 150e-9)
    assert process_time() - before < 1.0
    assert first == caught(1.8e-6, 150e-9)
    assert EV > 0.0
