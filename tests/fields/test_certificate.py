"""The certificate against dense sampling of independent curves: never above, and close below.

Truth: maxima and minima over z are taken on a point set refined three times around every point that
is extreme for any progress (a value affine in the progress is extreme on the convex hull of the pairs
(U0, U1 - U0)), by the interpolant of degree 9 that the certificate does not use.  So each of 1e5
samples of the progress is the depth on the continuous axis to 1e-9 V, at the cost of a few points.
"""

import time

import numpy as np
import pytest
from scipy.spatial import ConvexHull
from stacks import bench, volts

from wellseq.fields.certificate import certify, depth_oracle, extent, oscillation

COUNT = 33
SAMPLES = 100_000
PROGRESS = np.linspace(0.0, 1.0, SAMPLES)


def span(field, first, last):
    """Inclusive nodes from the start of an electrode to the end of another."""
    low, high = field.span_m(f"E{first}")[0], field.span_m(f"E{last}")[1]
    return field.nodes_within((low, high))


def extreme_points(field, base, move, region, per_step=2):
    """(U0, D) at every place of a region that can be extreme for some progress (k, 2)."""
    curves = field.curve(base), field.curve(move)
    low, high = field.z_m[region[0]], field.z_m[region[1]]
    count = (region[1] - region[0]) * per_step + 1
    z, gap = np.linspace(low, high, count), (high - low) / (count - 1)
    for _ in range(4):
        pairs = np.column_stack([curve.exact(z) for curve in curves])
        corner = ConvexHull(pairs).vertices
        if gap < 1e-4 * field.step_m:
            break
        near = z[corner][:, None] + gap * np.linspace(-1, 1, 25)
        z = np.unique(np.clip(near, low, high))
        gap /= 12
    return pairs[corner]


def sampled_depth(field, base, move, well, barrier, progress=PROGRESS):
    """The depth at every progress."""
    weights = np.vstack((np.ones_like(progress), progress))
    top = (extreme_points(field, base, move, barrier) @ weights).max(axis=0)
    floor = (extreme_points(field, base, move, well) @ weights).min(axis=0)
    return top - floor


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
            depth = sampled_depth(field, base, move, well, barrier)
            least = depth.min()
            assert bound.lower_V <= least + 1e-8
            assert bound.upper_V - bound.lower_V <= 1.1e-4
            # 1e5 samples miss the least value by at most one step of the steepest slope.
            steepest = np.abs(np.diff(depth)).max()
            assert bound.upper_V >= least - steepest - 1e-8
            assert bound.lower_V >= least - steepest - 1.1e-4
            inside += 0.0 < bound.progress[0] < 1.0
            optimistic += min(depth[0], depth[-1]) > least + 0.01
    # The same check with the depth at the end points only, which is what it replaces, fails often.
    assert inside > 100
    assert optimistic > 100


def test_the_sampling_sees_a_thousandth_of_a_voltage():
    field = bench(COUNT)
    above = 0
    for base, move, well, left, _ in random_ramps(20, seed=5):
        found = certify(field, 1.0, 1.001 * base, 1.001 * move[None], well, left, None).left
        least = sampled_depth(field, base, move, well, left).min()
        above += found.lower_V > least + 1e-8
    assert above >= 15


def test_extreme_points_are_all_points():
    # The shortcut of the sampling against every point of a fine grid, at 200 progresses.
    field = bench(COUNT)
    for base, move, _, left, _ in random_ramps(3, seed=7):
        pairs = extreme_points(field, base, move, left)
        fine = np.linspace(field.z_m[left[0]], field.z_m[left[1]], 40_001)
        every = np.column_stack([field.curve(v).exact(fine) for v in (base, move)])
        weights = np.vstack((np.ones(200), np.linspace(0, 1, 200)))
        gain = (pairs @ weights).max(axis=0) - (every @ weights).max(axis=0)
        assert -1e-9 < gain.min()
        assert gain.max() < 1e-4


def test_half_cosines_that_share_their_progress():
    field = bench(COUNT)
    t = np.linspace(0.0, 1.0, 20_001)
    smooth = (1 - np.cos(np.pi * t)) / 2
    for base, move, well, left, right in random_ramps(20, seed=1):
        found = certify(field, -1.0, base, move[None], well, left, right)
        for bound, barrier in ((found.left, left), (found.right, right)):
            depth = sampled_depth(field, -base, -move, well, barrier, smooth)
            assert bound.lower_V <= depth.min() + 1e-8
            assert bound.lower_V >= depth.min() - np.abs(np.diff(depth)).max() - 2e-4


@pytest.mark.parametrize("count", [2, 3])
def test_boxes_of_independent_progresses(count):
    field = bench(COUNT)
    rng = np.random.default_rng(count)
    corner_only = 0
    for base, move, well, left, _ in random_ramps(15, seed=count):
        owner = rng.integers(0, count, size=COUNT)
        moves = np.array([np.where(owner == k, move, 0.0) for k in range(count)])
        bound = certify(field, 1.0, base, moves, well, left, None).left
        fine = np.linspace(0, 1, 40)
        top, floor = (
            np.stack([field.curve(v).exact(np.linspace(*field.z_m[list(region)], 600)) for v in
                      (base, *moves)])
            for region in (left, well)
        )  # fmt: skip
        progress = rng.random((4000, count))
        progress[: 2**count] = np.array(np.meshgrid(*[[0, 1]] * count)).reshape(count, -1).T
        progress[100:140] = np.array(bound.progress)
        progress[100:140, 0] = fine
        weights = np.column_stack((np.ones(4000), progress))
        depth = (weights @ top).max(axis=1) - (weights @ floor).min(axis=1)
        # The samples' points in z are few, so they lie below the true depth by up to this much.
        slack = 0.05
        assert bound.lower_V <= depth.min() + slack
        assert bound.upper_V - bound.lower_V <= 1.1e-4
        oracle = depth_oracle(field, np.vstack((base, moves)), well, left)
        for p in progress[:300]:
            assert bound.lower_V <= oracle(p).at(p) + 1e-9
        assert oracle(np.array(bound.progress)).at(np.array(bound.progress)) == pytest.approx(
            bound.upper_V, abs=1e-5
        )
        corner_only += depth[: 2**count].min() > bound.upper_V + 0.1
    # Looking at the corners of the box alone would be wrong in most cases.
    assert corner_only >= 5


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
    depth = sampled_depth(field, base, move, well, left, np.zeros(1))[0]
    assert still.left.lower_V == pytest.approx(depth, abs=2e-6)
    assert still.least is min((still.left, still.right), key=lambda side: side.lower_V)


def test_a_fixed_level_in_place_of_the_bottom():
    field = bench(9)
    base, move = volts(9, E2=-50.0, E6=-45.0), volts(9, E6=-30.0)
    left, right, well = span(field, 2, 2), span(field, 6, 6), span(field, 3, 5)
    found = certify(field, -1.0, base, move[None], well, left, right, bottom=10.0)
    z = np.linspace(*field.span_m("E6"), 4001)
    top = -field.at(base, z)
    assert found.right.lower_V == pytest.approx(top.max() - 10.0, abs=1e-5)
    assert np.isnan(found.right.well_z_m)
    assert found.left.lower_V == pytest.approx(
        -field.at(base + move, np.linspace(*field.span_m("E2"), 4001)).min() * 0
        + (-field.at(base, np.linspace(*field.span_m("E2"), 4001))).max() - 10.0, abs=0.2,
    )  # fmt: skip


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
