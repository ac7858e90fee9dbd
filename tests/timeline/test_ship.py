"""Shipped rows follow the wish within the staircase and half a code, in as few rows as can be."""

from fractions import Fraction as F

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from playing import table

from wellseq.timeline.ship import codes_of

STAIRCASE_V = 0.02


def decode(shipped, timeline, name):
    """ticks (s) and electrode volts of a converter's column in the last block."""
    block = shipped.blocks[-1]
    output = timeline.trap.output(name)
    codes = block.codes[:, shipped.converters.index(name)]
    volts = output.gain * (output.low_V + codes * output.code_V) + output.offset_V
    return block.ticks * float(block.tick_s), volts


def stray(shipped, timeline, name, piece):
    """Greatest |shipped − wish| over a fine grid of times within a piece."""
    at, volts = decode(shipped, timeline, name)
    times = np.linspace(float(piece.start_s), float(piece.end_s), 20001)
    wish = np.array([piece.at(F(t)) for t in times[::20]])
    if timeline.trap.output(name).between_rows == "hold":
        played = volts[np.searchsorted(at, times[::20], side="right") - 1]
    else:
        played = np.interp(times[::20], at, volts)
    return float(np.max(np.abs(played - wish)))


@pytest.mark.parametrize("word", ["", "smoothly"])
@pytest.mark.parametrize(
    ("electrode", "output"), [("E1", "line1"), ("E2", "hold1"), ("E3", "pair")]
)
def test_a_slow_ramp_stays_within_staircase_and_half_a_code(word, electrode, output):
    timeline, shipped = table(f"hold for 1 ms; ramp {{ {electrode} = 30 V }} over 100 ms {word}")
    (piece,) = timeline.blocks[0].pieces
    half_code = shipped.code_V[output] / 2
    (bound,) = shipped.blocks[0].strays
    assert bound.volts <= STAIRCASE_V + 1e-12
    assert stray(shipped, timeline, output, piece) <= bound.volts + half_code + 1e-9


def test_the_bound_is_not_idle():
    """A staircase half as fine breaks the bound that the test above checks."""
    timeline, shipped = table("ramp { E2 = 30 V } over 100 ms")
    (piece,) = timeline.blocks[0].pieces
    block = shipped.blocks[0]
    coarse = block.codes[::2], block.ticks[::2]
    object.__setattr__(block, "codes", coarse[0])
    object.__setattr__(block, "ticks", coarse[1])
    assert stray(shipped, timeline, "hold1", piece) > STAIRCASE_V + shipped.code_V["hold1"]


def test_the_fewest_rows():
    _, shipped = table("ramp { E2 = 30 V } over 100 ms")
    # steps of at most twice what is left of the staircase after the clock's rounding
    room = STAIRCASE_V - 300 * 1e-6
    assert shipped.blocks[0].strays[0].rows == int(np.ceil(30 / (2 * room)))
    _, shipped = table("ramp { E1 = 30 V } over 100 ms")
    assert len(shipped.blocks[0].ticks) == 2
    _, shipped = table("hold for 1000 s")
    assert len(shipped.blocks[0].ticks) == 2


def test_rows_are_common_to_outputs_that_move_together():
    _, shipped = table("ramp { E2 = 30 V; R4 = 10 V } over 100 ms")
    block = shipped.blocks[0]
    columns = [shipped.converters.index(name) for name in ("hold1", "hold2")]
    changes = [np.nonzero(np.diff(block.codes[:, column]))[0] for column in columns]
    assert np.array_equal(changes[0], changes[1])
    tick_6us = round(6e-6 / float(block.tick_s))
    moved = block.ticks[1:][changes[0]]
    assert np.all(moved % tick_6us == 0)  # clocks of 2 us and 3 us


def test_edges_are_rounded_once_from_the_blocks_zero():
    _, shipped = table("repeat 30 { hold for 10 us / 3 }\nthrow G1 to -3 kV")
    (rounding,) = [r for r in shipped.blocks[0].roundings if r.output == "hv1"]
    assert rounding.asked_s == F(100, 10**6)
    assert rounding.error_s == 0
    _, shipped = table("hold for 1 us / 3\nthrow G1 to -3 kV")
    (rounding,) = [r for r in shipped.blocks[0].roundings if r.output == "hv1"]
    assert rounding.error_s == F(330, 10**9) - F(1, 3 * 10**6)


def test_switches_and_lines_have_their_rows():
    _, shipped = table("hold for 6 us; throw G1 to -3 kV; set valve open; hold for 1 ms")
    block = shipped.blocks[0]
    row = int(np.searchsorted(block.ticks * float(block.tick_s), 6e-6 - 1e-12))
    assert block.levels[row - 1].tolist() == [0, 0]
    assert block.levels[row].tolist() == [1, 0]
    assert block.states[-1].tolist() == [1, 0]
    assert block.ticks[0] == 0
    assert np.all(np.diff(block.ticks) > 0)


def test_a_kick_is_a_jump_of_one_row():
    _, shipped = table(
        "hold for 6 us; kick cold through E2 to 30 V for 6 us keeping hot; hold for 1 ms"
    )
    codes = shipped.blocks[0].codes[:, shipped.converters.index("hold1")]
    assert np.count_nonzero(np.diff(codes)) == 2


def test_an_absurd_staircase_does_not_eat_the_memory(monkeypatch):
    timeline, _ = table("hold for 1 s")
    margins = timeline.trap.margins.model_copy(update={"staircase_V": 1e-12})
    from playing import play

    from wellseq.timeline.ship import ship

    drawn = play("ramp { E2 = 30 V } over 1000 s\nramp { E1 = 1 V } over 1000 s smoothly")
    object.__setattr__(drawn, "trap", drawn.trap.model_copy(update={"margins": margins}))
    shipped = ship(drawn)
    assert margins.table_rows < len(shipped.blocks[0].ticks) < 2 * margins.table_rows + 10


def test_codes_never_come_from_what_is_not_a_number():
    timeline, _ = table("hold for 1 s")
    converter = timeline.trap.output("hold1")
    with pytest.raises(ValueError, match="not finite"):
        codes_of(converter, np.array([0.0, np.nan]))
    reach = converter.reach_V
    assert codes_of(converter, np.array([*reach, 1e9])).tolist() == [0, 2**18 - 1, 2**18 - 1]


@settings(max_examples=60, deadline=None)
@given(st.floats(-99, 99), st.floats(-99, 99), st.integers(30, 3000), st.booleans())
def test_any_ramp_keeps_its_bound(first, last, milliseconds, smooth):
    word = "smoothly" if smooth else ""
    timeline, shipped = table(
        f"ramp {{ E2, R4, E3 = {first:.3f} V }} over 1 s\n"
        f"ramp {{ E2, R4, E3 = {last:.3f} V }} over {milliseconds} ms {word}"
    )
    for piece in timeline.blocks[0].pieces:
        bound = next(
            s.volts
            for s in shipped.blocks[0].strays
            if (s.output, s.start_s) == (piece.output, piece.start_s)
        )
        half_code = shipped.code_V[piece.output] / 2
        assert stray(shipped, timeline, piece.output, piece) <= bound + half_code + 1e-9
        assert bound <= STAIRCASE_V + 1e-12 or piece.slope_max_V_per_s > 2000
