"""Clouds come, stay, merge, are lost, are let out: what the trace says of each."""

import itertools
import math

import pytest
from tracing import FIELDS, follow, held, troubles

BEGIN = "begin with cold in cup at E5\n"


def test_a_cloud_is_held_from_its_beginning_without_a_hole():
    _, _, wells = follow(BEGIN + "hold for 1 s\nramp { E3, E7 = -40 V } over 20 ms\nhold for 1 s")
    assert not wells.unproved
    stretches = held(wells, "cold")
    assert stretches[0].start_s == 0
    assert all(a.end_s == b.start_s for a, b in itertools.pairwise(stretches))
    least = min(one.certified_V for one in stretches)
    assert 15 < least < min(one.left.best_V for one in stretches)


@pytest.mark.parametrize(("where", "said"), [("E3", "slide"), ("E1", "slide"), ("E8", "slide")])
def test_a_cloud_must_be_where_its_well_is(where, said):
    _, _, wells = follow(f"begin with cold in cup at {where}\nhold for 1 s")
    assert troubles(wells) == [("cloud-not-placed", "cold", True)]
    assert said in wells.unproved[0].message


LIFTED = "begin with cold in { E3, E7 = -60 V; E4..E6 = -20 V; others = 0 V } at E5\nhold for 1 s\n"


def test_a_wall_that_drops_loses_the_cloud_at_the_step_that_drops_it():
    timeline, _, wells = follow(LIFTED + "ramp { E7 = -5 V } over 20 ms\nhold for 1 s")
    assert troubles(wells) == [("well-lost", "cold", True)]
    assert "slides out of the stack" in wells.unproved[0].message
    assert timeline.origins[wells.unproved[0].number].step == "ramp"
    assert all(one.number <= wells.unproved[0].number for one in wells.held)


def test_a_wall_that_drops_into_another_well_says_where_the_cloud_goes():
    _, _, wells = follow(
        LIFTED + "ramp { E9 = -60 V; E8 = 20 V } over 20 ms\nramp { E7 = 0 V } over 20 ms\n"
    )
    assert troubles(wells) == [("well-lost", "cold", True)]
    assert "under E8" in wells.unproved[0].message


def test_a_wall_raised_in_the_middle_splits_the_well():
    _, _, wells = follow(BEGIN + "ramp { E5 = -60 V } over 20 ms\nhold for 1 s")
    ((name, _, _),) = troubles(wells)
    assert name == "well-splits"


def test_a_well_is_followed_while_it_moves():
    _, _, wells = follow(
        BEGIN + "ramp { E3 = 0 V; E4, E8 = -60 V; E7 = 10 V } over 50 ms\nhold for 1 s"
    )
    assert not wells.unproved
    stretches = held(wells, "cold")
    start, end = stretches[0].from_m, stretches[-1].to_m
    assert end - start == pytest.approx(0.015, abs=1e-4)
    assert max(one.well_m[1] - one.well_m[0] for one in stretches) < 0.02


def test_two_wells_whose_wall_comes_down_are_reported():
    text = (
        "begin with cold in { E2, E5, E8 = -60 V; E6, E7 = 20 V; others = 0 V } at E3\n"
        "begin with slow in { E2, E5, E8 = -60 V; E6, E7 = 20 V; others = 0 V } at E7\n"
        "hold for 1 s\nramp { E5 = 10 V } over 20 ms\nhold for 1 s"
    )
    _, _, wells = follow(text)
    assert troubles(wells) == [("clouds-merge", "cold", True)]
    assert "the well of 'slow'" in wells.unproved[0].message


def test_loading_into_an_occupied_well_merges():
    _, _, wells = follow(BEGIN + "load slow at E5 for 1 s")
    assert troubles(wells) == [("clouds-merge", "slow", True)]


def test_two_clouds_may_begin_in_one_well():
    _, _, wells = follow(BEGIN + "begin with slow in cup at E5\nhold for 1 s")
    assert not wells.unproved
    assert held(wells, "slow")[0].left == held(wells, "cold")[0].left


CATCH = (
    "throw G2 to -3 kV\ncatch hot { between G1 and G2\n at -3 kV\n closing 400 ns after bunch }\n"
)


def test_a_bunch_without_a_temperature_is_held_by_its_gates():
    _, _, wells = follow(BEGIN + CATCH + "hold for 1 s")
    assert not wells.unproved
    energetic = [one for one in held(wells, "hot") if one.energetic]
    assert energetic
    assert all(2400 < one.certified_V < 3000 for one in energetic)
    # 2.5 keV at most in the bunch, and 99 % of it must stay held
    assert energetic[0].floor_V == pytest.approx((0.99 * 2500, 0.99 * 2500))


def test_opening_a_gate_on_a_hot_bunch_falls_below_its_floor():
    opened = BEGIN + CATCH + "hold for 1 s\nthrow G1 to behind\nhold for 1 s"
    _, _, wells = follow(opened)
    assert any(one.energetic and one.certified_V < one.floor_V[0] for one in held(wells, "hot"))
    cooled = opened.replace(
        "throw G1", 'assume temperature of hot 100 K ± 10 K because "measured"\nthrow G1', 1
    )
    _, _, wells = follow(cooled)
    assert all(one.certified_V >= one.floor_V[0] for one in held(wells, "hot"))


def test_a_caught_bunch_settles_with_its_own_sign():
    text = BEGIN + CATCH + 'assume temperature of hot 100 K ± 10 K because "measured"\nhold for 1 s'
    _, _, wells = follow(text)
    last = held(wells, "hot")[-1]
    assert not last.energetic
    assert last.well_m == held(wells, "cold")[-1].well_m


def test_a_bunch_alone_settles_in_the_deepest_well_between_the_gates():
    text = (
        "ramp { E3, E7 = -60 V; E5 = 20 V } over 1 ms\n"
        + CATCH
        + 'assume temperature of hot 100 K ± 10 K because "measured"\nhold for 1 s'
    )
    timeline, _, wells = follow(text)
    low, high = FIELDS[0].span_m("E5")
    assert low < held(wells, "hot")[-1].to_m < high
    assert timeline.blocks[1].trigger == "bunch"


RELEASE = (
    "begin with cold in {{ E3, E7 = -60 V; E4..E6 = -20 V; others = 0 V }} at E5\n"
    "hold for 1 s\nrelease cold through {} to {} V over 20 ms\nhold for 1 s"
)


def test_a_release_that_opens_has_a_way_out():
    _, _, wells = follow(RELEASE.format("E7", -10))
    assert not wells.unproved
    (way,) = wells.ways_out
    assert way.climb_V == 0.0
    assert max(one.end_s for one in held(wells, "cold")) == 1


def test_a_release_that_does_not_open_tells_what_is_left_to_climb():
    _, _, wells = follow(RELEASE.format("E7", -50))
    assert 10 < wells.ways_out[0].climb_V < 40
    # a wall beyond the electrode that opens stops them as well
    wall = RELEASE.format("E7", -10).replace("others = 0 V", "E9 = -60 V; others = 0 V")
    assert follow(wall)[2].ways_out[0].climb_V > 10


def test_a_release_below_ground_cannot_get_out():
    """Electrons at +10 V are held by the grounded tube outside, whatever the wall does."""
    text = BEGIN + "release cold through E7 to 20 V over 20 ms\nhold for 1 s"
    assert follow(text)[2].ways_out[0].climb_V > 5


EVAPORATE = (
    "begin with slow in { E3, E7 = -60 V; E4..E6 = -20 V; others = 0 V } at E5\nhold for 1 s\n"
    "evaporate slow through E7 to 200 mV over 10 s\nhold for 1 s\n"
)


def test_an_evaporation_lowers_the_floor_until_the_well_is_deepened():
    _, _, wells = follow(EVAPORATE + "ramp { E7 = -60 V } over 1 s\nhold for 1 s\nhold for 1 s")
    assert not wells.unproved
    floors = [one.floor_V[0] for one in held(wells, "slow")]
    assert floors[0] == 0.5
    assert floors[-1] == 0.5
    assert min(floors) == pytest.approx(0.16)
    assert all(one.certified_V >= one.floor_V[0] for one in held(wells, "slow"))
    assert wells.ways_out[0].climb_V == 0.0


def test_the_floor_rises_again_at_the_end_of_the_ramp_that_deepens():
    """Without a hold between them the second ramp answers for the common floor."""
    _, _, wells = follow(
        EVAPORATE + "ramp { E7 = -60 V } over 1 s\nramp { E7 = -21 V } over 1 s\nhold for 1 s"
    )
    last = held(wells, "slow")[-1]
    assert last.floor_V[0] == 0.5
    assert last.certified_V < 0.5


def test_the_vacuum_depth_follows_its_path_all_along():
    timeline, _, _wells = follow(EVAPORATE)
    field = FIELDS[0]
    block = timeline.blocks[0]
    pieces = [piece for piece in block.pieces if piece.output == "out7"]
    names = [f"E{k}" for k in range(3, 8)]
    first = None
    for share in [i / 200 for i in range(201)]:
        time = pieces[0].start_s + (pieces[-1].end_s - pieces[0].start_s) * _fraction(share)
        piece = next(p for p in pieces if p.start_s <= time <= p.end_s)
        volts = dict(zip(names, (-60, -20, -20, -20, piece.at(time)), strict=True))
        (well,) = [w for w in field.wells(volts, -1) if 0.05 < w.z_m < 0.14]
        first = first if first is not None else well.depth_right_V
        wish = first + share * (0.2 - first)
        assert abs(well.depth_right_V - wish) <= max(1e-3, 0.01 * wish)


def _fraction(share):
    from fractions import Fraction

    return Fraction(share)


def test_a_kick_takes_the_light_cloud_and_leaves_the_heavy():
    text = (
        "begin with cold in { E3, E7 = -60 V; E4..E6 = -20 V; others = 0 V } at E5\n"
        "begin with slow in { E3, E7 = -60 V; E4..E6 = -20 V; others = 0 V } at E5\nhold for 1 s\n"
        "kick cold through E3 to {} V for 2 us keeping slow\nhold for 1 s"
    )
    _, _, wells = follow(text.replace("{}", "0"))
    assert not wells.unproved
    assert max(one.end_s for one in held(wells, "cold")) == 1
    assert max(one.end_s for one in held(wells, "slow")) > 2
    assert wells.ways_out[0].climb_V == 0.0
    assert follow(text.replace("{}", "-50"))[2].ways_out[0].climb_V > 5


def test_a_kick_while_something_else_moves_is_not_examined():
    both = "begin with {} in {{ E3, E7 = -60 V; E4..E6 = -20 V; others = 0 V }} at E5\n"
    lanes = (
        "alongside {{ lane {{ kick cold through E3 to 0 V for 2 us keeping slow }}"
        " lane {{ ramp {{ E9 = 5 V }} over {} }} }}\nhold for 1 s"
    )
    text = both.format("cold") + both.format("slow") + "hold for 1 s\n"
    assert math.isnan(follow(text + lanes.format("1 s"))[2].ways_out[0].climb_V)
    assert follow(text + lanes.format("1 us"))[2].ways_out[0].climb_V == 0.0


@pytest.mark.parametrize(
    "step",
    [
        "cool slow for 1 s",
        "release slow through E7 to 0 V over 1 ms",
        "kick slow through E3 to 0 V for 2 us keeping cold",
        "evaporate slow through E7 to 1 V over 1 s",
    ],
)
def test_a_step_that_names_a_cloud_needs_it_in_the_trap(step):
    if step.startswith("evaporate"):
        with pytest.raises(AssertionError, match="depth-not-reachable"):
            follow(BEGIN + step)
        return
    _, _, wells = follow(BEGIN + step)
    assert ("cloud-not-placed", "slow", True) in troubles(wells)


def test_opposite_signs_are_measured_apart():
    text = (
        "begin with slow in { E2, E8 = -60 V; E3, E7 = 20 V; E5 = -20 V; others = 0 V } at E3\n"
        "begin with plus in { E2, E8 = -60 V; E3, E7 = 20 V; E5 = -20 V; others = 0 V } at E5\n"
        "hold for 1 s"
    )
    _, _, wells = follow(text)
    assert not wells.unproved
    (apart,) = wells.separations
    assert apart.other_species
    assert 0.02 < apart.least_m < 0.04


def test_gates_thrown_together_are_proved_for_every_pair_of_levels():
    _, _, wells = follow(
        "begin with cold in { E3, E7 = -60 V; E4..E6 = 10 V; G1, G2 = -3 kV; others = 0 V } at E5\n"
        "throw G1, G2 to behind\nhold for 1 s"
    )
    assert not wells.unproved
    assert all(one.certified_V > 20 for one in held(wells, "cold"))


def test_the_depth_out_to_the_ends_counts_the_gates():
    _, _, wells = follow(
        "begin with cold in { E3, E7 = -60 V; E4..E6 = 10 V; G1, G2 = -3 kV; others = 0 V } at E5\n"
        "hold for 1 s"
    )
    stretch = held(wells, "cold")[-1]
    assert stretch.trap_V > 2000
    assert stretch.certified_V < 60
