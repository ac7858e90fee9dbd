"""What steps leave on the timeline: exact times, pieces, blocks, lanes, refusals."""

from fractions import Fraction as F

import pytest
from playing import names, play

from wellseq.model.effects import Placed, Released
from wellseq.timeline.timeline import Shape

US = F(1, 10**6)
NS = F(1, 10**9)


def test_a_ramp_is_one_piece_per_output_that_moves():
    (block,) = play("ramp { E1 = 5 V; E2 = 0 V } over 1 ms / 3").blocks
    (piece,) = block.pieces
    assert (piece.output, piece.from_V, piece.to_V) == ("line1", 0.0, 5.0)
    assert piece.end_s == F(1, 3000)
    assert block.duration_s == F(1, 3000)


def test_times_stay_exact_over_a_thousand_steps():
    (block,) = play(
        "repeat 1000 { hold for 20 us; ramp { E1 = 1 V } over 1 us / 3\n"
        "ramp { E1 = 0 V } over 2 us / 3 }"
    ).blocks
    assert block.duration_s == 21000 * US


def test_smoothly_is_a_half_cosine():
    (block,) = play("ramp { E1 = 8 V } over 4 s smoothly").blocks
    (piece,) = block.pieces
    assert piece.shape is Shape.SMOOTH
    assert piece.at(F(1)) == pytest.approx(4 * (1 - 0.5**0.5))
    assert piece.at(F(2)) == pytest.approx(4.0)
    assert piece.slope_max_V_per_s == pytest.approx(3.14159265, abs=1e-6)


def test_electrodes_on_one_output_move_as_one_and_cannot_differ():
    timeline = play("ramp { E3, E4 = 2 V } over 1 ms")
    assert len(timeline.blocks[0].pieces) == 1
    timeline = play("ramp { E3 = 2 V; E4 = 3 V } over 1 ms")
    assert names(timeline) == ["voltage-out-of-range"]
    assert "share the output pair" in timeline.mistakes[0].message


def test_others_are_the_converter_electrodes_and_never_a_switch():
    timeline = play("ramp { E1 = 1 V; others = 2 V } over 1 ms")
    assert not timeline.mistakes
    moved = {piece.output: piece.to_V for piece in timeline.blocks[0].pieces}
    assert moved == {"line1": 1.0, "hold1": 2.0, "hold2": 2.0, "pair": 2.0}


def test_a_gate_at_its_converter_level_is_ramped_through_it():
    (block,) = play("ramp { G1, G2 = -9 V } over 1 ms").blocks
    assert [piece.output for piece in block.pieces] == ["behind"]


def test_a_gate_at_kilovolts_cannot_be_ramped():
    timeline = play("throw G1 to -3 kV; ramp { G1 = -9 V } over 1 ms")
    assert names(timeline) == ["voltage-out-of-range"]
    assert "throw G1 to a converter output" in timeline.mistakes[0].hint


def test_a_throw_lasts_until_its_edge_is_over_on_the_common_clock():
    (block,) = play("hold for 6 us; throw G1 to -3 kV; hold for 1 us").blocks
    (edge,) = block.edges
    assert (edge.command_s, edge.start_s, edge.end_s) == (
        6 * US,
        6 * US + 30 * NS,
        6 * US + 130 * NS,
    )
    assert (edge.from_level, edge.to_level) == (0, 1)
    assert block.duration_s == 13 * US  # common clock of 1, 2, 3 us and 10 ns is 6 us


CATCH = "catch hot { between G1 and G2\n at -3 kV\n closing {} after bunch }"


def test_a_catch_begins_a_block_and_closes_half_way_at_the_written_time():
    timeline = play("throw G2 to -3 kV\n" + CATCH.replace("{}", "800 ns", 1))
    assert not timeline.mistakes
    run, caught = timeline.blocks
    assert (run.name, caught.name, caught.trigger) == ("run", "bunch", "bunch")
    assert caught.within_s == 10
    (edge,) = caught.edges
    assert (edge.start_s + edge.end_s) / 2 == 800 * NS - 250 * NS
    assert caught.levels == {"hv1": 0, "hv2": 1}


def test_a_catch_needs_the_far_gate_up_and_the_near_gate_open():
    assert names(play(CATCH.replace("{}", "800 ns", 1))) == ["cloud-not-placed"]
    both = play("throw G1, G2 to -3 kV\n" + CATCH.replace("{}", "800 ns", 1))
    assert names(both) == ["cloud-not-placed"]
    assert "already closed" in both.mistakes[0].message


def test_a_gate_cannot_close_before_the_hardware_can():
    # latency 250 ns, delay 30 ns, half an edge of 100 ns: 330 ns is the earliest
    text = "throw G2 to -3 kV\n" + CATCH
    assert names(play(text.replace("{}", "330 ns", 1))) == []
    assert names(play(text.replace("{}", "329 ns", 1))) == ["off-clock"]


def test_a_wait_is_as_long_as_the_step_or_the_trap_file_says():
    assert play("hold for 1 s; await bunch; hold for 1 s").blocks[1].within_s == 10
    assert play("hold for 1 s; await later within 3 s; hold for 1 s").blocks[1].within_s == 3


LANES = "alongside {{\n lane {{ {} }}\n lane {{ {} }}\n}}\nhold for 1 s"


def test_lanes_begin_together_and_end_with_the_longest():
    one, two = "hold for 2 s; ramp { E1 = 1 V } over 1 s", "ramp { E2 = 1 V } over 5 s"
    (block,) = play(LANES.format(one, two)).blocks
    assert {p.output: (p.start_s, p.end_s) for p in block.pieces} == {
        "line1": (2, 3),
        "hold1": (0, 5),
    }
    assert block.duration_s == 6


@pytest.mark.parametrize(
    ("one", "two"),
    [
        ("ramp { E1 = 1 V } over 1 s", "ramp { E1 = 2 V } over 1 s"),
        ("ramp { E3 = 1 V } over 1 s", "ramp { E4 = 1 V } over 1 s"),
        ("set valve open", "set valve closed"),
        ("cool cold for 1 s", "rotate cold on R4 from 1 MHz to 1 MHz at 1 V for 1 s"),
    ],
)
def test_what_two_lanes_share_clashes(one, two):
    found = names(play("begin with cold in { E1 = 0 V } at E2\n" + LANES.format(one, two)))
    assert set(found) == {"lanes-clash"}


def test_lanes_within_lanes_clash_with_the_lanes_outside():
    inner = "alongside { lane { ramp { E1 = 1 V } over 1 s } lane { hold for 1 s } }"
    assert names(play(LANES.format(inner, "ramp { E1 = 2 V } over 1 s"))) == ["lanes-clash"]


def test_lines_are_set_and_expected():
    (block,) = play("hold for 1 s; set valve open; expect valve open; expect door shut").blocks
    assert [(c.line, c.state, c.expected) for c in block.changes] == [
        ("valve", "open", False),
        ("door", "shut", True),
    ]
    assert names(play("expect valve open; hold for 1 s")) == ["line-misused"]
    assert names(play("set valve open; set valve closed")) == ["line-misused"]


def test_a_kick_on_a_converter_is_as_fast_as_its_slew():
    (block,) = play(
        "begin with cold in { E2 = 0 V } at E2\nkick cold through E1 to 30 V for 5 us keeping hot"
    ).blocks
    there, back = block.pieces
    assert there.shape is back.shape is Shape.EDGE
    assert there.end_s - there.start_s == 3 * US  # 30 V at 12 V/us is 2.5 us
    assert back.start_s == 8 * US
    assert (there.to_V, back.to_V) == (30.0, 0.0)


def test_a_kick_by_a_switch_may_not_be_shorter_than_its_edge():
    text = "kick cold through G2 to -3 kV for {} keeping hot"
    assert names(play(text.format("130 ns"))) == []
    assert names(play(text.format("120 ns"))) == ["off-clock"]


def test_a_drive_gives_each_sector_its_phase_in_the_sense_of_the_charge():
    rotate = "rotate {} on R4 from 1 MHz to 2 MHz at 0.5 V for 2 s {}"
    (drive,) = play(rotate.format("cold", "")).blocks[0].drives
    assert drive.phases_deg == (0.0, 270.0, 180.0, 90.0)  # electrons turn counter-clockwise
    (drive,) = play(rotate.format("plus", "")).blocks[0].drives
    assert drive.phases_deg == (0.0, 90.0, 180.0, 270.0)
    (drive,) = play(rotate.format("plus", "backwards")).blocks[0].drives
    assert drive.phases_deg == (0.0, 270.0, 180.0, 90.0)


def test_effects_are_dated_to_their_step():
    timeline = play("load cold at E2 for 2 s\nrelease cold through E1 to 3 V over 1 s")
    placed, released = (
        e for e in timeline.blocks[0].events if isinstance(e.effect, Placed | Released)
    )
    assert (placed.start_s, placed.end_s) == (0, 2)
    assert (released.start_s, released.end_s) == (2, 3)


def test_begin_is_where_the_outputs_already_stand():
    timeline = play(
        "begin with cold in { E1 = -9 V; G2 = -3 kV; others = 1 V } at E2\nhold for 1 s"
    )
    (block,) = timeline.blocks
    assert not timeline.mistakes
    assert block.volts == {"line1": -9, "hold1": 1, "hold2": 1, "pair": 1, "behind": 0}
    assert block.levels == {"hv1": 0, "hv2": 1}
    assert not block.pieces
