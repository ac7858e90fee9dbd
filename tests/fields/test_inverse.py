"""Voltages for a path of the own depth: followed at every instant, or refused with the reason.

The depth along a path is measured by walking on a dense axis (interpolant of degree 9) from the
cloud's minimum outward to the first top: nothing of the inverse or the certificate is used.
"""

import time

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from stacks import bench, volts

from wellseq.fields.inverse import Impossible, Path, evaporation_path, way_out

COUNT = 15
NOT_BEGUN = ("the depth is already less", "no well holds the cloud")


def vertex(value, at):
    """The extreme value of the parabola through three neighbouring samples."""
    low, middle, high = value[at - 1 : at + 2]
    bend = low - 2 * middle + high
    return middle - (high - low) ** 2 / (8 * bend) if bend else middle


def walked_depth(field, vector, z_m, side):
    """Own depth (V) on a side, and where the minimum is: downhill, then up to the first top."""
    first, last = field.nodes_within((field.span_m("E2")[0], field.span_m("E11")[1]))
    z = np.linspace(field.z_m[first], field.z_m[last], 6 * (last - first) + 1)
    value = field.curve(vector).exact(z)
    at = int(np.abs(z - z_m).argmin())
    while value[at + 1] < value[at] or value[at - 1] < value[at]:
        at += 1 if value[at + 1] < value[at] else -1
    outward = 1 if side == "right" else -1
    top = at
    while 0 < top + outward < value.size - 1 and value[top + outward] > value[top]:
        top += outward
    return float(vertex(value, top) - vertex(value, at)), z[at]


def worst_share(field, vector, moving, path, z_m, side, wish, times=100):
    """Greatest |depth - wish| over all instants, in units of what is allowed (1 mV or 1 %)."""
    worst = 0.0
    for fraction in np.linspace(0, 1, times):
        now = vector.copy()
        for column, electrode in enumerate(moving):
            now[electrode] = np.interp(fraction, path.fractions, path.volts[:, column])
        depth, z_m = walked_depth(field, now, z_m, side)
        allowed = max(1e-3, 0.01 * wish(fraction))
        worst = max(worst, abs(depth - wish(fraction)) / allowed)
    return worst


def raised_well():
    """A well between E4 and E7 whose floor stands above ground, so that it can be emptied."""
    vector = volts(COUNT, E4=90.0, E5=50.0, E6=50.0, E7=90.0)
    return bench(COUNT), vector, 0.0795


@pytest.mark.parametrize("equal_ratios", [False, True])
@pytest.mark.parametrize("to_V", [5.0, 0.06, 0.012])
def test_the_depth_follows_its_path_at_two_thousand_instants(equal_ratios, to_V):
    field, vector, z_m = raised_well()
    path = evaporation_path(field, 1.0, vector, [7], z_m, to_V, [(-140.0, 140.0)], equal_ratios)
    assert isinstance(path, Path)
    start = walked_depth(field, vector, z_m, "right")[0]
    assert path.depths_V[0] == pytest.approx(start, abs=1e-4)

    def straight(fraction):
        return start + fraction * (to_V - start)

    def by_ratios(fraction):
        return start * (to_V / start) ** fraction

    wish = by_ratios if equal_ratios else straight
    assert worst_share(field, vector, [7], path, z_m, "right", wish, 2000) < 1.0
    assert path.worst_error_V <= max(1e-3, 0.01 * start)
    assert path.fractions[0] == 0.0
    assert path.fractions[-1] == 1.0
    assert (np.diff(path.fractions) > 0).all()
    assert path.volts.shape == (path.fractions.size, 1)
    assert path.volts[0, 0] == vector[7]
    assert path.fractions.size < 150
    # The yardstick is able to fail: end points alone, or voltages a thousandth off (a hundredth
    # where the depth stays large and so does 1 % of it).
    other = straight if equal_ratios else by_ratios
    assert worst_share(field, vector, [7], path, z_m, "right", other) > 1.0
    ends = Path(path.fractions[[0, -1]], path.volts[[0, -1]], path.depths_V[[0, -1]], 0.0)
    assert (worst_share(field, vector, [7], ends, z_m, "right", wish) > 1.0) == (
        path.fractions.size > 2
    )
    off = Path(path.fractions, path.volts * (1.001 if to_V < 1 else 1.01), path.depths_V, 0.0)
    assert worst_share(field, vector, [7], off, z_m, "right", wish) > 1.0


def test_the_left_side_and_the_other_sign():
    field, vector, z_m = raised_well()
    to_left = evaporation_path(field, -1.0, -vector, [4], z_m, 1.0, [(-140.0, 140.0)])
    to_right = evaporation_path(field, 1.0, vector, [7], z_m, 1.0, [(-140.0, 140.0)])
    # The stack about the well is its own mirror image up to the ends of the tube.
    assert isinstance(to_left, Path)
    np.testing.assert_allclose(to_left.volts[-1], -to_right.volts[-1], rtol=0, atol=1e-5)


def test_electrodes_that_move_together_keep_their_difference():
    field = bench(COUNT)
    vector = volts(COUNT, E3=90.0, E4=40.0, E5=40.0, E6=90.0, E7=80.0)
    z_m, moving = 0.066, [6, 7]
    path = evaporation_path(field, 1.0, vector, moving, z_m, 2.0, [(-140.0, 140.0)] * 2)
    assert isinstance(path, Path)
    np.testing.assert_allclose(path.volts[:, 0] - path.volts[:, 1], 10.0, rtol=0, atol=1e-12)
    start = path.depths_V[0]
    assert (
        worst_share(field, vector, moving, path, z_m, "right", lambda f: start + f * (2 - start))
        < 1
    )


def test_the_next_electrode_has_become_the_barrier():
    field, vector, z_m = raised_well()
    vector[8] = 85.0
    answer = evaporation_path(field, 1.0, vector, [7], z_m, 1.0, [(-140.0, 140.0)])
    assert isinstance(answer, Impossible)
    assert answer.reason == "the next electrode has become the barrier"
    assert answer.reached_V > 1.0
    lowest = walked_depth(field, _with(vector, 7, answer.at_volts[0]), z_m, "right")[0]
    assert lowest == pytest.approx(answer.reached_V, abs=1e-3)
    # A little more than what can be reached can be had.
    enough = evaporation_path(
        field, 1.0, vector, [7], z_m, answer.reached_V + 0.2, [(-140.0, 140.0)]
    )
    assert isinstance(enough, Path)


def _with(vector, electrode, level):
    result = vector.copy()
    result[electrode] = level
    return result


def test_no_voltage_within_the_range():
    field, vector, z_m = raised_well()
    answer = evaporation_path(field, 1.0, vector, [7], z_m, 1.0, [(80.0, 140.0)])
    assert isinstance(answer, Impossible)
    assert answer.reason == "no voltage within the range"
    assert answer.at_volts == (80.0,)
    assert isinstance(evaporation_path(field, 1.0, vector, [7], z_m, 1.0, [(40.0, 140.0)]), Path)


@pytest.mark.parametrize(
    ("moving", "to_V", "reason"),
    [
        ([14], 1.0, "the next electrode has become the barrier"),
        ([7], 0.0, "the depth does not fall"),
        ([7], 80.0, "the depth is already less"),
    ],
)
def test_other_reasons(moving, to_V, reason):
    field, vector, z_m = raised_well()
    answer = evaporation_path(field, 1.0, vector, moving, z_m, to_V, [(-140.0, 140.0)])
    assert isinstance(answer, Impossible)
    assert answer.reason == reason
    assert answer.reached_V == pytest.approx(7.5724, abs=0.01)


def test_no_well_holds_the_cloud():
    field = bench(COUNT)
    answer = evaporation_path(field, 1.0, volts(COUNT, E4=9.0), [7], 0.08, 1.0, [(-1.0, 1.0)])
    assert isinstance(answer, Impossible)
    assert answer.reason == "no well holds the cloud"


def test_what_cannot_be_asked():
    field, vector, z_m = raised_well()
    for moving, to_V, ranges in (
        ([], 1.0, []),
        ([7], float("nan"), [(-140.0, 140.0)]),
        ([7], 1.0, []),
        ([7], 1.0, [(float("nan"), 140.0)]),
    ):
        with pytest.raises(ValueError, match="evaporation needs"):
            evaporation_path(field, 1.0, vector, moving, z_m, to_V, ranges)


@settings(max_examples=12, deadline=None, derandomize=True)
@given(
    st.floats(60.0, 120.0),
    st.floats(60.0, 120.0),
    st.floats(20.0, 50.0),
    st.lists(st.floats(-8.0, 8.0), min_size=4, max_size=4),
    st.floats(0.01, 3.0),
    st.booleans(),
)
def test_any_well_is_emptied_as_wished_or_refused(left, right, floor, around, to_V, equal_ratios):
    field = bench(COUNT)
    vector = volts(COUNT, E4=left, E5=floor, E6=floor, E7=right)
    vector[[2, 3, 8, 9]] += around
    z_m = 0.0795
    path = evaporation_path(field, 1.0, vector, [7], z_m, to_V, [(-140.0, 140.0)], equal_ratios)
    if isinstance(path, Impossible):
        assert (path.reached_V <= to_V) == (path.reason in NOT_BEGUN)
        return
    start = path.depths_V[0]
    # Dimples below a millivolt do not hold a cloud: then the path is about the next well downhill.
    assume(walked_depth(field, vector, z_m, "right")[0] == pytest.approx(start, abs=1e-4))
    rng = np.random.default_rng(0)
    for fraction in rng.random(60):
        wish = start + fraction * (to_V - start)
        if equal_ratios:
            wish = start * (to_V / start) ** fraction
        now = _with(vector, 7, np.interp(fraction, path.fractions, path.volts[:, 0]))
        depth = walked_depth(field, now, z_m, "right")[0]
        assert abs(depth - wish) < max(1e-3, 0.01 * wish) + 1e-4


def test_way_out():
    field, vector, z_m = raised_well()
    assert way_out(field, 1.0, vector, z_m, "right") == 0.0
    assert way_out(field, 1.0, vector, z_m, "left") == 0.0
    # A second hill: the rise from the valley before it to its top.
    hill = _with(vector, 11, 30.0)
    z = np.linspace(*[field.span_m(name)[0] for name in ("E8", "E13")], 20_001)
    value = field.curve(hill).exact(z)
    top = value[z > field.span_m("E10")[0]].max()
    valley = value[z < field.span_m("E11")[1]].min()
    assert way_out(field, 1.0, hill, z_m, "right") == pytest.approx(top - valley, abs=1e-5)
    assert way_out(field, 1.0, hill, z_m, "left") == 0.0
    # An attracting electrode behind: what leaves must climb back to ground.
    pit = _with(vector, 11, -30.0)
    depth = -field.curve(pit).exact(z).min()
    assert way_out(field, 1.0, pit, z_m, "right") == pytest.approx(depth, abs=1e-5)
    assert np.isnan(way_out(field, 1.0, vector, -0.1, "right"))


def test_it_is_quick():
    field, vector, z_m = raised_well()
    spent = []
    for to_V in (0.06, 0.061, 0.062):
        start = time.perf_counter()
        evaporation_path(field, 1.0, vector, [7], z_m, to_V, [(-140.0, 140.0)])
        spent.append(time.perf_counter() - start)
    # Some 50 ms when nothing else runs.
    assert min(spent) < 1.0
