"""The certificate against dense sampling of independent curves: never above, and close below.

Depths at 1e5 progresses are taken on points 16 times denser than the nodes, by the interpolant of
degree 9 that the certificate does not use.  A value affine in the progress is greatest on the
convex hull of the pairs (U0, U1 - U0), so its corners serve for all points.  Maxima between the
dense points are missed by at most gap^2/8 |U''|: to that, all samples are compared; at the lowest
sample and around it the maxima are polished to 1e-10 V and compared strictly.
"""

import time

import numpy as np
import pytest
from scipy.spatial import ConvexHull
from stacks import bench, volts

from wellseq.fields.certificate import certify, extent, oscillation

COUNT = 33
SAMPLES = 100_000
PROGRESS = np.linspace(0.0, 1.0, SAMPLES)


def span(field, first, last):
    """Inclusive nodes from the start of an electrode to the end of another."""
    low, high = field.span_m(f"E{first}")[0], field.span_m(f"E{last}")[1]
    return field.nodes_within((low, high))


def dense(field, region):
    """Places in a region, 16 to a step."""
    first, last = region
    return np.linspace(field.z_m[first], field.z_m[last], (last - first) * 16 + 1)


def greatest(field, base, move, region, progress=PROGRESS):
    """max over a region of U0 + p D at sorted progresses; and how much it can be missed by."""
    z = dense(field, region)
    pairs = np.column_stack([field.curve(v).exact(z) for v in (base, move)])
    hull = pairs[ConvexHull(pairs).vertices]
    hull = np.roll(hull, -int(hull[:, 0].argmax()), axis=0)
    chain = hull[: int((hull[:, 0] + hull[:, 1]).argmax()) + 1]
    turns = -np.diff(chain[:, 0]) / np.diff(chain[:, 1])
    at = chain[np.searchsorted(turns, progress)]
    bend = max(np.abs(field.at(v, z, 2)).max() for v in (base, base + move))
    return at[:, 0] + progress * at[:, 1], (z[1] - z[0]) ** 2 / 8 * bend


def polished(field, vector, region):
    """max of U over a region to 1e-10 V: the dense points near the best are zoomed into."""
    curve, z = field.curve(vector), dense(field, region)
    gap = z[1] - z[0]
    value = curve.exact(z)
    for _ in range(6):
        near = z[value > value.max() - gap**2 * np.abs(curve.nodes[2]).max()]
        z = np.clip(np.unique(near[:, None] + gap * np.linspace(-1, 1, 9)), *field.z_m[[*region]])
        value, gap = curve.exact(z), gap / 4
    return value.max()


def depth_at(field, base, move, well, barrier, progress):
    """The depth on the continuous axis at one progress."""
    vector = base + progress * move
    return polished(field, vector, barrier) + polished(field, -vector, well)


def sampled_depth(field, base, move, well, barrier, progress=PROGRESS):
    """The depth at every progress, too low by at most the second value."""
    top, missed_top = greatest(field, base, move, barrier, progress)
    floor, missed_floor = greatest(field, -base, -move, well, progress)
    return top + floor, missed_top + missed_floor


def random_ramps(count, seed=0):
    """Base, move (33,) V and regions W, L, R of a well between random electrodes."""
    rng = np.random.default_rng(seed)
    field = bench(COUNT)
    for _ in range(count):
        base, stop = rng.uniform(-140, 140, size=(2, COUNT))
        if rng.random() < 0.5:
            still = rng.permutation(COUNT)[: rng.integers(10, 30)]
            stop[still] = base[still]
        middle = int(rng.integers(8, 25))
        half = int(rng.integers(0, 3))
        well = span(field, middle - half, middle + half)
        left = span(field, middle - half - int(rng.integers(2, 6)), middle - half - 1)
        right = span(field, middle + half + 1, middle + half + int(rng.integers(2, 6)))
        yield base, stop - base, well, left, right


def test_three_hundred_random_ramps():
    field = bench(COUNT)
    inside = optimistic = 0
    for base, move, well, left, right in random_ramps(300):
        found = certify(field, 1.0, base, move[None], well, left, right)
        for bound, barrier in ((found.left, left), (found.right, right)):
            depth, missed = sampled_depth(field, base, move, well, barrier)
            lowest = int(depth.argmin())
            assert bound.lower_V <= depth[lowest] + missed
            for at in PROGRESS[np.clip([lowest - 1, lowest, lowest + 1], 0, SAMPLES - 1)]:
                assert bound.lower_V <= depth_at(field, base, move, well, barrier, at) + 1e-9
            assert bound.upper_V - bound.lower_V <= 1.1e-4
            # 1e5 samples miss the least value by at most one step of the steepest slope.
            steepest = np.abs(np.diff(depth)).max()
            assert bound.lower_V >= depth[lowest] - steepest - 1.1e-4
            inside += 0.0 < bound.progress[0] < 1.0
            optimistic += min(depth[0], depth[-1]) > depth[lowest] + 0.01
    # The depth at the end points only, which is what the certificate replaces, is wrong this often.
    assert inside > 100
    assert optimistic > 100


def test_the_sampling_sees_a_thousandth_of_a_voltage():
    field = bench(COUNT)
    above = 0
    for base, move, well, left, _ in random_ramps(20, seed=5):
        found = certify(field, 1.0, 1.001 * base, 1.001 * move[None], well, left, None).left
        depth, missed = sampled_depth(field, base, move, well, left)
        above += found.lower_V > depth.min() + missed
    assert above >= 15


def test_the_sampling_is_what_it_says():
    # The hull's corners against every point; and the polished maximum against a far denser set.
    field = bench(COUNT)
    few = np.linspace(0, 1, 50)
    for base, move, _, left, _ in random_ramps(3, seed=7):
        every = np.column_stack([field.curve(v).exact(dense(field, left)) for v in (base, move)])
        value, missed = greatest(field, base, move, left, few)
        all_points = (every @ np.vstack((np.ones(50), few))).max(axis=0)
        np.testing.assert_allclose(value, all_points, rtol=0, atol=1e-11)
        fine = np.linspace(field.z_m[left[0]], field.z_m[left[1]], 400_001)
        truth = field.curve(base).exact(fine).max()
        assert polished(field, base, left) == pytest.approx(truth, abs=1e-6)
        assert polished(field, base, left) >= truth - 1e-10
        assert value[0] <= truth <= value[0] + missed


def test_half_cosines_that_share_their_progress():
    field = bench(COUNT)
    t = np.linspace(0.0, 1.0, 20_001)
    smooth = (1 - np.cos(np.pi * t)) / 2
    for base, move, well, left, right in random_ramps(20, seed=1):
        found = certify(field, -1.0, base, move[None], well, left, right)
        for bound, barrier in ((found.left, left), (found.right, right)):
            depth, missed = sampled_depth(field, -base, -move, well, barrier, smooth)
            assert bound.lower_V <= depth.min() + missed
            assert bound.lower_V >= depth.min() - np.abs(np.diff(depth)).max() - 2e-4


@pytest.mark.parametrize("count", [2, 3])
def test_boxes_of_independent_progresses(count):
    field = bench(COUNT)
    rng = np.random.default_rng(count)
    corners_only = 0
    for base, move, well, left, _ in random_ramps(15, seed=count):
        owner = rng.integers(0, count, size=COUNT)
        moves = np.array([np.where(owner == k, move, 0.0) for k in range(count)])
        bound = certify(field, 1.0, base, moves, well, left, None).left
        best = np.array(bound.progress)
        corners = np.array(np.meshgrid(*[[0.0, 1.0]] * count)).reshape(count, -1).T
        near = np.clip(best + rng.normal(scale=0.02, size=(200, count)), 0, 1)
        progress = np.vstack((corners, best, near, rng.random((4000, count))))
        weights = np.column_stack((np.ones(len(progress)), progress))
        depth = np.zeros(len(progress))
        for sense, region in ((1, left), (-1, well)):
            z = dense(field, region)[::4]
            table = np.stack([field.curve(v).exact(z) for v in (base, *moves)])
            depth += (sense * weights @ table).max(axis=1)
        # To what lies between the dense points, all samples; strictly, the ten lowest.
        assert bound.lower_V <= depth.min() + 0.02
        for p in progress[np.argsort(depth)[:10]]:
            assert (
                bound.lower_V <= depth_at(field, base + p @ moves, 0 * base, well, left, 0) + 1e-9
            )
        assert bound.upper_V - bound.lower_V <= 1.1e-4
        there = depth_at(field, base + best @ moves, 0 * base, well, left, 0)
        assert bound.upper_V == pytest.approx(there, abs=1e-5)
        corners_only += depth[: 2**count].min() > bound.upper_V + 0.1
    # Looking at the corners of the box alone would be wrong in many cases.
    assert corners_only >= 5


def test_a_box_contains_each_of_its_edges():
    field = bench(COUNT)
    for base, move, well, left, _ in random_ramps(10, seed=9):
        moves = np.array([np.where(np.arange(COUNT) % 2 == k, move, 0.0) for k in (0, 1)])
        box = certify(field, 1.0, base, moves, well, left, None).left
        shared = certify(field, 1.0, base, move[None], well, left, None).left
        assert box.lower_V <= shared.upper_V
        for k in (0, 1):
            edge = certify(field, 1.0, base, moves[k][None], well, left, None).left
            assert box.lower_V <= edge.upper_V


def test_what_does_not_move_is_one_evaluation():
    field = bench(COUNT)
    base, move, well, left, right = next(random_ramps(1, seed=3))
    still = certify(field, 1.0, base, np.empty((0, COUNT)), well, left, right)
    zero = certify(field, 1.0, base, np.zeros((2, COUNT)), well, left, right)
    assert still.left.progress == ()
    assert zero.left.progress == (0.0, 0.0)
    assert still.left.lower_V == zero.left.lower_V
    one = certify(field, 1.0, base, np.array([np.zeros(COUNT), move]), well, left, right)
    alone = certify(field, 1.0, base, move[None], well, left, right)
    assert one.left.lower_V == alone.left.lower_V
    assert one.left.progress == (0.0, *alone.left.progress)
    depth = depth_at(field, base, move, well, left, 0.0)
    assert still.left.lower_V == pytest.approx(depth, abs=2e-6)
    assert still.least is min((still.left, still.right), key=lambda side: side.lower_V)


def test_a_fixed_level_in_place_of_the_bottom():
    field = bench(9)
    base, move = volts(9, E2=-50.0, E6=-45.0), volts(9, E6=-30.0)
    left, right, well = span(field, 2, 2), span(field, 6, 6), span(field, 3, 5)
    found = certify(field, -1.0, base, move[None], well, left, right, bottom=10.0)
    for bound, barrier in ((found.left, left), (found.right, right)):
        heights = [polished(field, -base - p * move, barrier) for p in (0.0, 1.0)]
        assert bound.lower_V == pytest.approx(min(heights) - 10.0, abs=1e-6)
        assert np.isnan(bound.well_z_m)
    other = certify(field, -1.0, base, move[None], well, left, right, bottom=10.01)
    assert other.left.lower_V == pytest.approx(found.left.lower_V - 0.01, abs=1e-9)


def test_what_is_not_a_number_stays_so():
    field = bench(9)
    base = volts(9, E2=10.0, E6=np.nan)
    found = certify(field, 1.0, base, np.zeros((1, 9)), (300, 310), (200, 250), None)
    assert np.isnan(found.left.lower_V)
    assert np.isnan(found.left.upper_V)
    assert found.right is None
    sound = certify(field, 1.0, volts(9, E2=10.0), np.zeros((1, 9)), (300, 310), (200, 250), None)
    assert np.isfinite(sound.left.lower_V)
    hot = certify(
        field, 1.0, base * 0, np.zeros((1, 9)), (300, 310), (200, 250), None, bottom=np.nan
    )
    assert np.isnan(hot.left.lower_V)


@pytest.mark.parametrize("region", [(-1, 5), (5, 4), (0, 10**6)])
def test_regions_that_are_none(region):
    field = bench(9)
    with pytest.raises(ValueError, match="no region"):
        certify(field, 1.0, volts(9, E1=1.0), np.zeros((0, 9)), (300, 310), region, None)


def test_a_region_of_one_node():
    field = bench(9)
    base = volts(9, E2=30.0, E6=20.0)
    found = certify(field, 1.0, base, np.zeros((0, 9)), (350, 350), (280, 280), None)
    expected = field.at(base, field.z_m[280]) - field.at(base, field.z_m[350])
    assert found.left.lower_V == pytest.approx(float(expected), abs=1e-7)


def test_oscillation_bounds_every_difference():
    field = bench(9)
    well, left, right = (340, 380), (280, 340), (380, 430)
    weights = oscillation(field, well, left, right)
    w = np.linspace(field.z_m[340], field.z_m[380], 301)
    b = np.linspace(field.z_m[280], field.z_m[430], 1001)
    for e, unit in enumerate(np.eye(9)):
        inner, outer = field.at(unit, w), field.at(unit, b)
        worst = max(outer.max() - inner.min(), inner.max() - outer.min())
        assert worst <= weights[e] + 1e-12
        assert weights[e] <= worst * 1.02 + 1e-6
    assert (oscillation(field, well, left, None) <= weights).all()
    top = np.abs(field.at(np.eye(9)[3], np.linspace(field.z_m[280], field.z_m[340], 301))).max()
    assert oscillation(field, None, left, None)[3] == pytest.approx(top, rel=1e-2)
    low, high = extent(field, (300, 300))
    assert (low == high).all()


def test_deviations_never_cost_more_than_the_oscillation_says():
    field = bench(COUNT)
    rng = np.random.default_rng(11)
    for base, move, well, left, right in random_ramps(10, seed=11):
        weights = oscillation(field, well, left, right)
        delta = rng.uniform(0, 2, COUNT)
        calm = certify(field, 1.0, base, move[None], well, left, right).left
        for _ in range(5):
            stray = rng.choice([-1, 1], COUNT) * delta
            bent = certify(field, 1.0, base + stray, move[None], well, left, right).left
            assert bent.upper_V >= calm.lower_V - delta @ weights


def test_it_is_quick():
    field = bench(COUNT)
    ramps = list(random_ramps(40, seed=2))
    spent = []
    for base, move, well, left, right in ramps:
        start = time.perf_counter()
        certify(field, 1.0, base, move[None], well, left, right)
        spent.append(time.perf_counter() - start)
    # Half a millisecond a side when nothing else runs; the bound leaves room for a busy machine.
    assert np.median(spent) < 0.01
