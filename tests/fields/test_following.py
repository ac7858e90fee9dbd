"""What prove() accepts is played: no second minimum in the core, none passed on the way out.

A proof is believed only if it survives sampling: progresses, voltages that stray by the whole
deviation with random signs, and a dense axis of the interpolant of degree 9.  Yardsticks are shown
able to fail on regions that were not proved.
"""

from dataclasses import replace

import numpy as np
import pytest
from stacks import bench, volts

from wellseq.fields.certificate import certify, oscillation
from wellseq.fields.following import follow, locate, prove
from wellseq.fields.minima import landscape

COUNT = 15
RIPPLE = 1e-3
LONG_M = 0.03


def separating(value):
    """The highest barrier between two minima of a sampled curve (0 when there is one minimum)."""
    left = np.minimum.accumulate(value)
    right = np.minimum.accumulate(value[::-1])[::-1]
    return float((value - np.maximum(left, right)).max())


def passed(value):
    """The deepest dip below the highest point so far, on the way from the core to the top."""
    to_top = value[: int(value.argmax()) + 1]
    return float((np.maximum.accumulate(to_top) - to_top).max())


def dense(field, region):
    return np.linspace(field.z_m[region[0]], field.z_m[region[1]], 8 * (region[1] - region[0]) + 1)


def played(field, start, end, deviation, rng, count=9):
    """Curves of U that the proof speaks of."""
    for p in np.linspace(0, 1, count):
        stray = rng.choice([-1.0, 1.0], size=start.size) * deviation
        yield field.curve(start + p * (end - start) + stray)


def faults(field, proven, curves):
    """What is wrong with regions, by playing."""
    said = set()
    for curve in curves:
        core = curve.exact(dense(field, proven.core))
        slope = curve.nodes[1][[*proven.core]]
        if not slope[0] < 0 < slope[1]:
            said.add("the well leaves the core")
        if separating(core) > proven.ripple_V + 1e-9:
            said.add("a second well in the core")
        left = curve.exact(dense(field, proven.left))[::-1]
        right = curve.exact(dense(field, proven.right))
        if max(passed(left), passed(right)) > proven.ripple_V + 1e-9:
            said.add("a well is passed on the way out")
    return said


def random_pieces(count, seed, reach):
    """(start, end, z, deviation) of wells in random voltages that move by up to `reach` V."""
    rng = np.random.default_rng(seed)
    field = bench(COUNT)
    while count:
        start = rng.uniform(-60, 60, COUNT)
        if rng.random() < 0.3:
            start[3:9] = start[5] + rng.normal(scale=0.01, size=6)
        end = start + rng.uniform(-reach, reach, COUNT) * (rng.random(COUNT) < 0.4)
        found = landscape(field.curve(start), RIPPLE)
        if found.minimum_m.size:
            z_m = float(rng.choice(found.minimum_m))
            deviation = rng.choice([0.0, 1e-4, 5e-3, 0.1]) * rng.random(COUNT)
            yield start, end, z_m, deviation
            count -= 1


@pytest.mark.parametrize(("reach", "least"), [(1.0, 0.85), (20.0, 0.35), (120.0, 0.02)])
def test_what_is_accepted_survives_playing(reach, least):
    field = bench(COUNT)
    rng = np.random.default_rng(3)
    accepted = 0
    pieces = list(random_pieces(300, int(reach), reach))
    for start, end, z_m, deviation in pieces:
        ripple = max(RIPPLE, 2 * deviation.max())
        proven = prove(field, 1.0, start, end, z_m, deviation, ripple)
        if proven is None:
            continue
        accepted += 1
        assert faults(field, proven, played(field, start, end, deviation, rng)) == set()
        assert proven.ripple_V <= ripple
    assert accepted >= least * len(pieces)
    assert accepted < len(pieces) or reach < 20


def test_the_proved_depth_is_never_above_the_played_one():
    field = bench(COUNT)
    rng = np.random.default_rng(4)
    tight = []
    for start, end, z_m, deviation in random_pieces(60, 8, 15.0):
        proven = prove(field, 1.0, start, end, z_m, deviation, 2e-2)
        if proven is None:
            continue
        move = (end - start)[None]
        found = certify(field, 1.0, start, move, proven.core, proven.left, proven.right)
        taken = deviation @ oscillation(field, proven.core, proven.left, proven.right)
        bound = found.least.lower_V - taken - proven.ripple_V
        own = []
        for curve in played(field, start, end, deviation, rng, 25):
            wells = landscape(curve, 2e-2)
            index = wells.basin(proven.z_end_m if not own else own[-1][1])
            barrier = wells.barrier_V[index : index + 2].min()
            own.append((barrier - wells.minimum_V[index], wells.minimum_m[index]))
            assert bound <= own[-1][0] + 1e-9
        tight.append(min(depth for depth, _ in own) - bound - taken - proven.ripple_V)
    assert len(tight) > 25
    # It is not sound by being useless: most are within 0.2 V of what was played.
    assert np.median(tight) < 0.2


def test_yardsticks_see_a_core_that_holds_two_wells():
    field = bench(COUNT)
    start = volts(COUNT, E3=50.0, E7=30.0, E11=50.0)
    proven = prove(field, 1.0, start, 1.1 * start, 0.075, 0 * start, RIPPLE)
    assert proven is not None
    curves = list(played(field, start, 1.1 * start, 0 * start, np.random.default_rng(0)))
    assert faults(field, proven, curves) == set()
    wide = replace(proven, core=(proven.core[0], proven.core[1] + 200))
    assert "a second well in the core" in faults(field, wide, curves)
    off = replace(proven, core=(proven.core[1] + 5, proven.core[1] + 20))
    assert "the well leaves the core" in faults(field, off, curves)
    far = replace(proven, right=(proven.core[1], field.z_m.size - 250))
    assert "a well is passed on the way out" in faults(field, far, curves)


def test_a_well_that_vanishes_is_never_proved():
    field = bench(COUNT)
    start = volts(COUNT, E4=40.0, E7=30.0)
    gone = volts(COUNT, E4=40.0, E7=0.0)
    z_m = locate(field, 1.0, start, 0.075).z_m
    still = np.zeros(COUNT)
    assert locate(field, 1.0, gone, z_m) is None
    assert prove(field, 1.0, start, gone, z_m, still, RIPPLE) is None
    assert follow(field, 1.0, start, gone, z_m) is None
    nearly = volts(COUNT, E4=40.0, E7=12.0)
    assert follow(field, 1.0, start, nearly, z_m) is not None


def test_a_well_is_followed_along_the_stack():
    field = bench(COUNT)

    def pattern(i):
        return volts(COUNT, **{f"E{i - 1}": 25.0, f"E{i}": -25.0, f"E{i + 1}": 25.0})

    still = np.zeros(COUNT)
    z_m = locate(field, 1.0, pattern(4), 0.06).z_m
    # Two electrodes on is too far for one core; piece by piece it goes.
    assert prove(field, 1.0, pattern(4), pattern(6), z_m, still, RIPPLE) is None
    for i in (5, 6, 7, 8):
        z_m = follow(field, 1.0, pattern(i - 1), pattern(i), z_m)
        assert z_m == pytest.approx(sum(field.span_m(f"E{i}")) / 2, abs=1e-6)
    back = follow(field, 1.0, pattern(8), pattern(7), z_m)
    assert back == pytest.approx(sum(field.span_m("E7")) / 2, abs=1e-6)


def test_following_goes_to_the_well_it_began_in():
    # Two wells; the barrier between them moves across. Continuity decides, not the deeper one.
    field = bench(COUNT)
    start = volts(COUNT, E2=60.0, E6=20.0, E7=40.0, E8=20.0, E12=60.0, E4=-10.0, E10=-30.0)
    end = volts(COUNT, E2=60.0, E6=40.0, E7=40.0, E8=40.0, E12=60.0, E4=-2.0, E10=-60.0)
    middle = [sum(field.span_m(f"E{i}")) / 2 for i in (4, 10)]
    for here in middle:
        z_m = locate(field, 1.0, start, here).z_m
        assert follow(field, 1.0, start, end, z_m) == pytest.approx(here, abs=3e-3)


def test_flat_bottom_is_one_well_within_the_ripple():
    field = bench(COUNT, LONG_M)
    rng = np.random.default_rng(0)
    start = volts(COUNT, E2=40.0, E12=40.0)
    start[3:12] = 5.0 + rng.uniform(-2e-4, 2e-4, 9)
    end = start.copy()
    end[3:12] = 5.0 + rng.uniform(-2e-4, 2e-4, 9)
    found = locate(field, 1.0, start, 0.2)
    assert found.high_m - found.low_m > 0.02
    still = np.zeros(COUNT)
    proven = prove(field, 1.0, start, end, found.z_m, still, RIPPLE)
    assert proven is not None
    assert not proven.convex
    assert 0.0 < proven.ripple_V <= RIPPLE
    curves = played(field, start, end, still, rng)
    assert faults(field, proven, curves) == set()
    # With a finer ripple the dimples are wells of their own: no proof of one.
    finer = prove(field, 1.0, start, end, found.z_m, still, 2e-5)
    assert finer is None or finer.core != proven.core
    # Deviations beyond the ripple could split it.
    assert prove(field, 1.0, start, end, found.z_m, still + 0.01, RIPPLE) is None


def test_a_shoulder_is_passed_within_the_ripple():
    # A wall with a long step half way up: the barrier is the top, not the step.
    field = bench(COUNT, LONG_M)
    vector = volts(COUNT, E2=40.0, E6=20.0, E7=20.0, E8=20.0, E9=20.0, E10=20.0, E11=20.0, E12=40.0)
    found = locate(field, 1.0, vector, 0.12)
    still = np.full(COUNT, 2e-3)
    strict = prove(field, 1.0, vector, vector, found.z_m, still, 1e-4)
    loose = prove(field, 1.0, vector, vector, found.z_m, still, 3e-2)
    assert strict.right[1] < field.nodes_within(field.span_m("E10"))[1]
    assert loose.right[1] > field.nodes_within(field.span_m("E12"))[0]
    assert 4e-3 <= loose.ripple_V <= 3e-2  # two deviating electrodes can tilt the shoulder
    heights = [
        certify(field, 1.0, vector, np.zeros((0, COUNT)), p.core, None, p.right).right.lower_V
        for p in (strict, loose)
    ]
    assert heights[1] > heights[0] + 10
    curves = played(field, vector, vector, still, np.random.default_rng(1), 20)
    assert faults(field, loose, curves) == set()


def test_own_regions_end_at_the_next_well():
    field = bench(COUNT)
    vector = volts(COUNT, E2=60.0, E6=20.0, E10=80.0)
    still = np.zeros(COUNT)
    z_m = locate(field, 1.0, vector, 0.055).z_m
    proven = prove(field, 1.0, vector, vector, z_m, still, RIPPLE)
    (well,) = (w for w in field.wells(dict(zip(field.electrodes, vector, strict=True)), 1)
               if abs(w.z_m - z_m) < 1e-4)  # fmt: skip
    found = certify(
        field, 1.0, vector, np.zeros((0, COUNT)), proven.core, proven.left, proven.right
    )
    assert found.left.lower_V == pytest.approx(well.depth_left_V, abs=1e-6)
    assert found.right.lower_V == pytest.approx(well.depth_right_V, abs=1e-6)
    assert proven.left_closed
    assert proven.right_closed
    assert proven.right_rise < proven.right[1]
    assert proven.left[0] < proven.left_rise <= proven.core[0]


def test_a_well_under_ground_is_held_by_the_outside():
    field = bench(COUNT)
    vector = volts(COUNT, E7=-20.0)
    z_m = locate(field, 1.0, vector, 0.09).z_m
    proven = prove(field, 1.0, vector, 1.5 * vector, z_m, np.zeros(COUNT), RIPPLE)
    assert proven.left[0] == 0
    assert proven.right[1] == field.z_m.size - 1
    assert proven.left_closed
    bound = certify(field, 1.0, vector, 0.5 * vector[None], proven.core, proven.left, None).left
    assert bound.lower_V == pytest.approx(-float(field.at(vector, z_m)), abs=1e-6)


def test_a_box_of_progresses_needs_its_other_corners():
    field = bench(COUNT)
    start = volts(COUNT, E4=40.0, E5=-20.0, E6=-20.0, E7=40.0)
    moves = np.array([volts(COUNT, E5=20.0, E6=-20.0), volts(COUNT, E5=-20.0, E6=20.0)]) * 0.2
    z_m = locate(field, 1.0, start, 0.08).z_m
    still = np.zeros(COUNT)
    end = start + moves.sum(axis=0)
    others = [start + moves[0], start + moves[1]]
    line = prove(field, 1.0, start, end, z_m, still, RIPPLE)
    box = prove(field, 1.0, start, end, z_m, still, RIPPLE, others)
    assert box.core[0] < line.core[0]
    assert box.core[1] > line.core[1]
    for corner in others:
        curve = [field.curve(corner)]
        assert "the well leaves the core" in faults(field, line, curve)
        assert faults(field, box, curve) == set()


def test_what_is_not_a_number_is_not_proved():
    field = bench(COUNT)
    vector = volts(COUNT, E4=40.0, E7=30.0)
    bad = vector.copy()
    bad[0] = np.nan
    still = np.zeros(COUNT)
    assert prove(field, 1.0, vector, vector, 0.075, still, RIPPLE) is not None
    assert prove(field, 1.0, vector, bad, 0.075, still, RIPPLE) is None
    assert prove(field, 1.0, vector, vector, 0.075, bad, RIPPLE) is None
    assert prove(field, 1.0, vector, vector, 0.075, still, np.nan) is None
    assert prove(field, 1.0, vector, vector, -0.1, still, RIPPLE) is None
