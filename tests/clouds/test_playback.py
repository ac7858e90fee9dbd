"""Shipped rows → volts of electrodes: calibration, slew, lag, edges; and a catch made with them."""

from __future__ import annotations

from math import exp, log
from pathlib import Path

import numpy as np
import pytest
from tanh_tubes import MASS_KG

from wellseq.clouds.catching import Bunch, catch
from wellseq.clouds.forces import table_of
from wellseq.clouds.playback import cut, slewed, waveforms
from wellseq.clouds.swarm import Spreading
from wellseq.clouds.waveforms import Waveforms
from wellseq.fields.field import Field
from wellseq.model.build import build
from wellseq.model.trap import Trap
from wellseq.text.parse import parse
from wellseq.timeline.draw import draw
from wellseq.timeline.ship import ship
from wellseq.timeline.shipped import ShippedBlock

HERE = Path(__file__).parent
HEAD = """wellseq 1
trap "flights.trap.toml"
cloud cold is electron { number 1e6; radius 1 mm; temperature 100 K }
cloud hot is antiproton { number 1e4; energy 2 keV }
"""
CATCH = """catch hot {
    between G1 and G2
    at -3 kV
    closing 600 ns after bunch
  }"""


def shipped(body: str) -> tuple[Trap, list[ShippedBlock]]:
    """The blocks of a sequence with the given steps."""
    source = f"{HEAD}\nsequence test {{\n{body}\n}}\n"
    built = build(parse(source, "test.well"), HERE / "test.well", known_findings=())
    assert built.sequence is not None, built.mistakes
    trap = built.sequence.trap
    timeline = draw(built.sequence, lambda: Field(trap))
    assert not timeline.mistakes
    return trap, list(ship(timeline).blocks)


def volts_of(waves: Waveforms, trap: Trap, electrode: str, time_s: float) -> float:
    return float(waves.at(time_s)[trap.index(electrode)])


def test_a_card_that_draws_lines_goes_straight() -> None:
    trap, (block,) = shipped("ramp { E1 = 60 V } over 20 us\n hold for 10 us")
    waves = waveforms(trap, block, 0.0, 30e-6)
    for time_s in (0.0, 5e-6, 12.5e-6, 20e-6, 29e-6):
        wish = min(60.0, 3e6 * time_s)
        assert volts_of(waves, trap, "E1", time_s) == pytest.approx(wish, abs=3e-3)
        assert volts_of(waves, trap, "E2", time_s) == pytest.approx(0.0, abs=1e-3)
    assert volts_of(waves, trap, "E1", 21e-6) != pytest.approx(59.9, abs=3e-3)


def test_a_level_stretch_has_no_breakpoints() -> None:
    trap, (block,) = shipped(
        "ramp { E1 = 60 V } over 20 us\n hold for 1 s\n ramp { E3 = 5 V } over 1 ms"
    )
    assert waveforms(trap, block, 0.1, 0.9).times_s.size == 2


def test_behind_a_pole_and_a_delay_a_line_lags() -> None:
    # V(t) = s (t - tau (1 - e^(-t/tau))) a delay later (derived).
    trap, (block,) = shipped("ramp { E3 = 60 V } over 20 us\n hold for 40 us")
    waves = waveforms(trap, block, 0.0, 60e-6)
    for time_s in (4e-6, 11e-6, 20e-6):
        after = time_s - 1e-6
        exact = 3e6 * (after - 2e-6 * (1.0 - exp(-after / 2e-6)))
        assert volts_of(waves, trap, "E3", time_s) == pytest.approx(exact, abs=0.02)
        assert volts_of(waves, trap, "E3", time_s + 2e-8) != pytest.approx(exact, abs=0.02)
    left = 3e6 * 2e-6 * (1.0 - exp(-10.0))
    half_s = 21e-6 + 2e-6 * log(2.0)
    assert volts_of(waves, trap, "E3", half_s) == pytest.approx(60.0 - left / 2, abs=0.02)
    assert volts_of(waves, trap, "E3", 60e-6) == pytest.approx(60.0, abs=3e-3)


def test_a_card_that_holds_slews_and_then_lags() -> None:
    # One new code; 5 V/us; a pole of 10 us: at the end of the slewing (8 us) it is behind by
    # s tau (1 - e^(-8/10)), which fades (derived).
    trap, (block,) = shipped(
        "begin with cold in { E1, E3 = -80 V; E2 = -40 V; others = 0 V } at E2\n"
        "hold for 1 ms\n release cold through E2 to 0 V over 2 us\n hold for 100 us"
    )
    changed = int(np.flatnonzero(np.diff(block.codes[:, 2]))[0]) + 1
    start_s = float(block.ticks[changed] * block.tick_s)
    waves = waveforms(trap, block, start_s - 1e-6, start_s + 100e-6)
    behind = 5e6 * 10e-6 * (1.0 - exp(-0.8))
    assert volts_of(waves, trap, "E2", start_s) == pytest.approx(-40.0, abs=1e-3)
    assert volts_of(waves, trap, "E2", start_s + 8e-6) == pytest.approx(-behind, abs=0.02)
    later = -behind * exp(-2.0)
    assert volts_of(waves, trap, "E2", start_s + 28e-6) == pytest.approx(later, abs=0.02)
    assert volts_of(waves, trap, "E2", start_s + 29e-6) != pytest.approx(later, abs=0.02)


def test_codes_are_undone_by_the_calibration() -> None:
    trap, (block,) = shipped("ramp { E2 = 77.7 V } over 1 ms\n hold for 1 ms")
    waves = waveforms(trap, block, 1.9e-3, 2e-3)
    half_code = 1.001 * 200.0 / (2**18 - 1) / 2
    assert volts_of(waves, trap, "E2", 2e-3) == pytest.approx(77.7, abs=half_code * 1.01)
    assert volts_of(waves, trap, "E2", 2e-3) != pytest.approx(77.6, abs=half_code * 1.01)


def test_a_switch_goes_straight_on_its_edge() -> None:
    trap, (block,) = shipped("throw G2 to -3 kV\n hold for 1 us\n throw G2 to behind")
    waves = waveforms(trap, block, 0.0, 6e-6)
    # Command at 0, delay 30 ns, all of the edge in 100 ns.
    for time_s, volts in ((20e-9, 0.0), (30e-9, 0.0), (80e-9, -1500.0), (130e-9, -3000.0)):
        assert volts_of(waves, trap, "G2", time_s) == pytest.approx(volts, abs=1e-2)
    assert volts_of(waves, trap, "G2", 90e-9) == pytest.approx(-1800.0, abs=1e-2)
    assert volts_of(waves, trap, "G1", 90e-9) == pytest.approx(0.0, abs=3e-3)
    back_s = float(block.ticks[np.flatnonzero(np.diff(block.levels[:, 1]))[-1] + 1] * block.tick_s)
    assert volts_of(waves, trap, "G2", back_s + 80e-9) == pytest.approx(-1500.0, abs=1e-2)


def test_a_pole_s_edge_has_its_half_at_the_same_time() -> None:
    trap, (block,) = shipped("throw G2 to -3 kV\n hold for 2 us")
    straight = waveforms(trap, block, 0.0, 2e-6)
    pole = waveforms(trap, block, 0.0, 2e-6, "pole")
    for waves in (straight, pole):
        assert volts_of(waves, trap, "G2", 80e-9) == pytest.approx(-1500.0, abs=2.0)
    tau_s = 80e-9 / log(9.0)
    for after in (20e-9, 60e-9, 200e-9):
        exact = -3000.0 * (1.0 - 0.5 * exp(-after / tau_s))
        assert volts_of(pole, trap, "G2", 80e-9 + after) == pytest.approx(exact, abs=0.4)
        assert volts_of(pole, trap, "G2", 81e-9 + after) != pytest.approx(exact, abs=1e-3)
    assert volts_of(pole, trap, "G2", 2e-6) == pytest.approx(-3000.0, abs=1e-2)


def test_a_level_that_passes_through_follows_its_converter() -> None:
    trap, (block,) = shipped(
        "ramp { G1 = -100 V } over 100 us\n hold for 50 us\n throw G1 to -3 kV\n hold for 1 us"
    )
    waves = waveforms(trap, block, 0.0, 160e-6)
    # The card behind it holds: steps of 1 V at its clock of 1 us.
    assert volts_of(waves, trap, "G1", 50e-6) == pytest.approx(-50.0, abs=1.05)
    assert volts_of(waves, trap, "G1", 149e-6) == pytest.approx(-100.0, abs=3e-3)
    assert volts_of(waves, trap, "G1", 150e-6 + 80e-9) == pytest.approx(-1550.0, abs=0.1)


def test_a_mixture_of_two_motions_is_cut_finely() -> None:
    trap, (block,) = shipped(
        "alongside {\n lane { ramp { E1 = 1 V } over 100 us }\n"
        " lane { hold for 50 us\n throw G2 to -3 kV }\n }\n hold for 10 us"
    )
    waves = waveforms(trap, block, 0.0, 100e-6)
    assert volts_of(waves, trap, "E1", 50e-6) == pytest.approx(0.5, abs=3e-3)
    assert volts_of(waves, trap, "G2", 50e-6 + 80e-9) == pytest.approx(-1500.0, abs=0.1)


def test_what_a_card_that_holds_cannot_reach_before_the_next_row() -> None:
    times, volts = slewed(np.array([0.0, 1.0, 3.0]), np.array([0.0, 10.0, -10.0]), 2.0)
    assert times.tolist() == [0.0, 1.0, 3.0, 10.0]
    assert volts.tolist() == [0.0, 0.0, 4.0, -10.0]
    same = slewed(np.array([0.0, 1.0]), np.array([3.0, 3.0]), 2.0)
    assert same[1].tolist() == [3.0]


def test_a_cut_track_has_its_ends() -> None:
    track = (np.array([0.0, 10.0]), np.array([0.0, 100.0]))
    times, volts = cut(track, 2.0, 5.0)
    assert times.tolist() == [2.0, 5.0]
    assert volts.tolist() == [20.0, 50.0]
    assert cut(track, -2.0, 12.0)[1].tolist() == [0.0, 0.0, 100.0, 100.0]


def test_the_end_comes_after_the_start() -> None:
    trap, (block,) = shipped("hold for 1 ms")
    with pytest.raises(ValueError, match="after the start"):
        waveforms(trap, block, 1.0, 1.0)


def test_a_catch_with_the_shipped_edges() -> None:
    trap, blocks = shipped(f"throw G2 to -3 kV\n hold for 1 ms\n {CATCH}\n hold for 10 us")
    block = blocks[1]
    latency_s = float(block.block.first_row_s)
    waves = waveforms(trap, block, -2e-7, 2e-6)
    begin_s, end_s = waves.moving_s()
    # Half of the edge is over 600 ns after the trigger, a latency before the block's zero.
    assert (begin_s + end_s) / 2 + latency_s == pytest.approx(600e-9, abs=1e-12)
    found = catch(
        table=table_of(Field(trap)),
        waves=waves,
        mass_kg=MASS_KG,
        charge_e=-1,
        bunch=Bunch(Spreading(1000.0, 300.0), Spreading(-latency_s, 50e-9)),
        near_m=trap.electrode("G1").middle_m,
        far_m=trap.electrode("G2").middle_m,
        closing_s=600e-9 - latency_s,
        jitter_s=float(block.block.jitter_s),
        other_edges=(waveforms(trap, block, -2e-7, 2e-6, "pole"),),
    )
    # 1 keV antiprotons need 2 x 0.142 m / 437 km/s = 0.65 us there and back.
    assert 0.2 < found.share.value < 0.9
    assert found.share.low < found.share.value < found.share.high
    assert found.best_share > 0.98
    assert found.good_to_s + latency_s < 600e-9
    assert found.energetic == 0.0
    assert found.share.value + found.late + found.early == pytest.approx(1.0)
