"""A gate opened for a moment: transit times, who leaves, who stays, what it costs."""

from __future__ import annotations

from math import isnan, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tanh_tubes import LIGHT_KG, MASS_KG, lined_up, pulse

from wellseq.clouds.figures import Figure, exactly
from wellseq.clouds.flight import fly
from wellseq.clouds.kick import (
    MARGIN,
    TROUGH_V,
    Dweller,
    Kick,
    estimated_gain_eV,
    full_opening,
    kick,
    step_for,
    transit_s,
    trough_V,
)
from wellseq.clouds.swarm import thermal
from wellseq.clouds.waveforms import declared_edge, still, together

# The worked example (derived; invented trap): tubes at -70, 0, -45 -> 25, 45 V.
TABLE = lined_up([-0.05, -0.015, 0.015, 0.05, 0.4], (-0.25, 0.6))
SHUT, OPEN = [-70.0, 0.0, -45.0, 45.0], [-70.0, 0.0, 25.0, 45.0]
GATE_M, EXIT_M = 0.0325, 0.3
OPENED = TABLE.potential(OPEN, -1)
ELECTRONS = Dweller(LIGHT_KG, -1, exactly(100.0))
ANTIPROTONS = Dweller(MASS_KG, -1, exactly(300.0))


def kicked(edge_ns: float, open_ns: float, **changed: object) -> Kick:
    """The example with straight edges and an open time in ns."""
    waves = pulse(edge_ns * 1e-9, open_ns * 1e-9, SHUT, OPEN)
    asked: dict[str, object] = {
        "table": TABLE,
        "waves": waves,
        "light": ELECTRONS,
        "heavy": ANTIPROTONS,
        "at_m": 0.0,
        "gate_m": GATE_M,
        "exit_m": EXIT_M,
        "start_s": 0.0,
        "end_s": float(waves.times_s[-1]),
    }
    return kick(**(asked | changed))  # type: ignore[arg-type]


def test_transit_times() -> None:
    # 18.29 ns, 783.9 ns, ratio sqrt(m_h/m_e) = 42.85 (derived).
    light = transit_s(OPENED, 0.0, GATE_M, LIGHT_KG, -1)
    heavy = transit_s(OPENED, 0.0, GATE_M, MASS_KG, -1)
    assert light == pytest.approx(18.29e-9, rel=0.01)
    assert heavy == pytest.approx(783.9e-9, rel=0.01)
    assert heavy / light == pytest.approx(42.85, rel=1e-4)
    assert heavy / light == pytest.approx(sqrt(MASS_KG / LIGHT_KG))
    assert transit_s(OPENED, 0.0, GATE_M + 5e-3, MASS_KG, -1) != pytest.approx(783.9e-9, rel=0.01)
    assert transit_s(TABLE.potential(SHUT, -1), 0.0, GATE_M, MASS_KG, -1) == np.inf


def test_transit_against_a_flight() -> None:
    flown = fly(
        table=TABLE,
        waves=still(OPEN),
        mass_kg=MASS_KG,
        charge_e=-1,
        z_m=np.zeros(1),
        speed_m_per_s=np.zeros(1),
        start_s=0.0,
        end_s=1e-6,
        step_s=1e-9,
        leave_m=(-0.1, GATE_M),
    )
    assert flown.left_s[0] == pytest.approx(transit_s(OPENED, 0.0, GATE_M, MASS_KG, -1), rel=1e-3)


@pytest.mark.parametrize(("open_ns", "stay"), [(5, 1.0), (20, 0.0)])
def test_electrons_stay_or_leave(open_ns: float, stay: float) -> None:
    # Edges 2 ns: open 5 / 20 ns, all electrons stay / none (derived).
    found = kicked(2, open_ns)
    assert found.light.kept.value == stay
    assert found.light.kept.low == pytest.approx(max(stay - MARGIN, 0.0))
    assert found.light.kept.high == pytest.approx(min(stay + MARGIN, 1.0))
    assert found.heavy.kept.value == 1.0


# edges ns, open ns, median gain eV, its estimate eV, share kept (derived).
HEAVY = [
    (2, 50, 0.175, 0.202, 1.0),
    (2, 100, 0.663, 0.776, 1.0),
    (2, 200, 2.80, 3.04, 1.0),
    (2, 400, 14.5, 12.0, 1.0),
    (100, 20, 0.93, None, 1.0),
    (100, 200, 6.95, None, 1.0),
    (100, 400, 23.8, None, 0.40),
]


@pytest.mark.parametrize(("edge_ns", "open_ns", "gain", "estimate", "kept"), HEAVY)
def test_what_the_antiprotons_gain(
    edge_ns: float, open_ns: float, gain: float, estimate: float | None, kept: float
) -> None:
    found = kicked(edge_ns, open_ns).heavy
    assert found.gain_eV.value == pytest.approx(gain, rel=0.05)
    assert found.kept.value == pytest.approx(kept, abs=0.05)
    assert found.highest_eV.value > found.gain_eV.value
    longer = kicked(edge_ns, open_ns * 1.1 + 5).heavy
    assert longer.gain_eV.value != pytest.approx(gain, rel=0.05) or longer.kept.value < kept / 2
    if estimate is not None:
        told = estimated_gain_eV(OPENED, 0.0, (open_ns + edge_ns) * 1e-9, -1, MASS_KG)
        assert told == pytest.approx(estimate, rel=0.01)


def test_at_seven_hundred_nanoseconds_nobody_stays() -> None:
    found = kicked(2, 700).heavy
    assert found.kept.value == 0.0
    assert not found.gain_eV.known
    assert not found.highest_eV.known


def test_the_estimate_is_given_while_it_is_good_only() -> None:
    for open_ns in (50, 100, 200, 300):
        found = kicked(2, open_ns)
        assert found.open_s == pytest.approx((open_ns + 2) * 1e-9)
        assert found.estimate_eV == pytest.approx(found.heavy.gain_eV.value, rel=0.2)
    assert isnan(kicked(2, 320).estimate_eV)


def share_of_electrons(open_ns: float) -> float:
    """Electrons kept with the gate at +35 V against 0 V outside, edges of 20 ns."""
    shut, opened = [-70.0, 0.0, -45.0, 0.0], [-70.0, 0.0, 35.0, 0.0]
    waves = pulse(20e-9, open_ns * 1e-9, shut, opened)
    potential = TABLE.potential(shut, -1)
    basin = potential.basin(0.0)
    assert basin is not None
    z_m, speed = thermal(potential, basin, 100.0, LIGHT_KG, 500)
    flown = fly(
        table=TABLE,
        waves=waves,
        mass_kg=LIGHT_KG,
        charge_e=-1,
        z_m=z_m,
        speed_m_per_s=speed,
        start_s=0.0,
        end_s=float(waves.times_s[-1]),
        step_s=2e-10,
        leave_m=(-0.2, EXIT_M),
    )
    inside = (flown.z_m > basin.left_m) & (flown.z_m < basin.right_m) & (flown.side == 0)
    return float((inside & potential.holds(flown.z_m, flown.energy_eV)).mean())


def test_a_trough_on_the_way_out_makes_the_share_flip() -> None:
    # Open 20, 50, 100 ns: the share of electrons kept is 0, 1, 0 (derived).
    shares = [share_of_electrons(open_ns) for open_ns in (20, 50, 100)]
    assert shares == pytest.approx([0.0, 1.0, 0.0], abs=0.1)


def test_a_trough_on_the_way_out_has_no_figure() -> None:
    shut, opened = [-70.0, 0.0, -45.0, 0.0], [-70.0, 0.0, 35.0, 0.0]
    waves = pulse(20e-9, 50e-9, shut, opened)
    found = kicked(20, 50, waves=waves)
    assert found.outside[0].quantity == "climb on the way out"
    assert found.outside[0].value > 10.0
    assert not found.light.kept.known
    assert isnan(found.heavy.transit_s)
    assert isnan(found.open_s)
    assert trough_V(OPENED, 0.0, GATE_M, EXIT_M) < TROUGH_V


def test_how_far_and_how_long_it_is_open() -> None:
    opened, lasting = full_opening(pulse(10e-9, 80e-9, SHUT, OPEN), 0.0, 100e-9)
    assert opened.tolist() == OPEN
    assert lasting == pytest.approx(90e-9)
    assert full_opening(still(SHUT), 0.0, 1e-6)[1] == 0.0


def test_steps_are_a_hundredth_of_the_shortest_bounce() -> None:
    potential = TABLE.potential(SHUT, -1)
    step = step_for([potential], LIGHT_KG, -1)
    assert step == pytest.approx(step_for([potential], MASS_KG, -1) / 42.85, rel=1e-3)
    assert 1e-10 < step < 1e-9
    assert step_for([potential, TABLE.potential([-140, 0, -90, 90], -1)], LIGHT_KG, -1) < step


@settings(max_examples=8, deadline=None)
@given(open_ns=st.floats(20.0, 300.0), more_ns=st.floats(20.0, 60.0))
def test_the_longer_it_is_open_the_hotter_they_get(open_ns: float, more_ns: float) -> None:
    short, long = kicked(2, open_ns).heavy, kicked(2, open_ns + more_ns).heavy
    assert long.gain_eV.value > short.gain_eV.value
    assert long.kept.value <= short.kept.value


def test_other_edges_and_temperatures_widen_the_interval() -> None:
    edges = [declared_edge(start, 40e-9, 0.0, 1.0, "pole", 1e-4) for start in (0.0, 300e-9)]
    up, down = edges
    share = (
        np.concatenate((up[0], down[0])),
        np.concatenate((up[1], 1.0 - down[1])),
    )
    columns = [
        (share[0], shut + (opened - shut) * share[1])
        for shut, opened in zip(SHUT, OPEN, strict=True)
    ]
    pole = together(columns)
    alone = kicked(50, 250, end_s=600e-9)
    both = kicked(50, 250, end_s=600e-9, other_edges=(pole,))
    other = kicked(50, 250, waves=pole, end_s=600e-9)
    gain = both.heavy.gain_eV
    assert gain.value == alone.heavy.gain_eV.value
    assert gain.low <= other.heavy.gain_eV.value <= gain.high
    assert gain.high > gain.low
    warm = kicked(50, 250, heavy=Dweller(MASS_KG, -1, Figure(300.0, 100.0, 900.0))).heavy
    assert warm.highest_eV.high > kicked(50, 250).heavy.highest_eV.high


def test_positive_charges_in_the_mirrored_volts() -> None:
    waves = pulse(2e-9, 100e-9, [-one for one in SHUT], [-one for one in OPEN])
    found = kicked(
        2,
        100,
        waves=waves,
        light=Dweller(LIGHT_KG, 1, exactly(100.0)),
        heavy=Dweller(MASS_KG, 1, exactly(300.0)),
    )
    other = kicked(2, 100)
    assert found.heavy.gain_eV.value == pytest.approx(other.heavy.gain_eV.value)
    assert found.light.kept == other.light.kept
    assert found.estimate_eV == pytest.approx(other.estimate_eV)


@pytest.mark.parametrize(
    ("changed", "quantity"),
    [
        ({"light": Dweller(LIGHT_KG, 1, exactly(100.0))}, "product of the charges"),
        ({"light": Dweller(LIGHT_KG, -1, exactly(0.0))}, "temperature"),
        ({"heavy": Dweller(0.0, -1, exactly(10.0))}, "mass"),
        ({"end_s": -1.0}, "duration"),
        ({"waves": still(OPEN), "end_s": 1e-7}, "depth of the well"),
        ({"end_s": 1.0}, "steps"),
    ],
)
def test_no_figure_for_what_cannot_be(changed: dict[str, object], quantity: str) -> None:
    found = kicked(2, 5, **changed)
    assert quantity in found.outside[0].quantity
    assert not found.light.kept.known
    assert not found.heavy.gain_eV.known
    assert isnan(found.estimate_eV)
