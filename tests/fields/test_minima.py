"""Wells: every minimum found, merged below the ripple, with own and trap depth."""

import numpy as np
import pytest
from stacks import bench, volts

from wellseq.fields.hermite import Curve
from wellseq.fields.minima import extrema, landscape, wells


def curve_of(function, start=0.0, stop=10.0, count=201):
    """A curve from a function that returns derivatives 0 … 4 (5, nz)."""
    z = np.linspace(start, stop, count)
    return Curve(np.asarray(function(z)), start, z[1] - z[0], 5.0)


def waves(amplitude, k, slope=0.0, floor=0.0):
    def function(z):
        table = [amplitude * k**m * np.sin(k * z + m * np.pi / 2) for m in range(5)]
        table[0] = table[0] + slope * z + floor
        table[1] = table[1] + slope
        return table

    return function


def test_all_extrema_of_a_wave():
    z, value, kind = extrema(curve_of(waves(1.0, 3.0)))
    np.testing.assert_allclose(z, (np.arange(z.size) + 0.5) * np.pi / 3, rtol=0, atol=1e-8)
    np.testing.assert_allclose(value, np.resize([1.0, -1.0], z.size), rtol=0, atol=1e-9)
    assert kind.tolist() == np.resize([-1, 1], z.size).tolist()


def test_two_zeros_between_neighbouring_nodes_are_found():
    # Steep slope with a faint wave: U' touches zero twice within one interval of the grid.
    k = 3.0
    curve = curve_of(waves(1.0, k, slope=-k * (1 - 1e-4)), start=-0.05, count=61)
    slopes = curve.nodes[1]
    z, _, kind = extrema(curve)
    hidden = [p for p in z if (np.abs(p - curve.z_m) > 1e-9).all()]
    assert z.size == 10
    assert len(hidden) == z.size
    assert (slopes < 0).all()
    assert kind[:2].tolist() == [1, -1]


def test_no_well_where_nothing_is_held():
    field = bench(7)
    assert field.wells({}, 1) == []
    assert field.wells({"E3": 20.0}, +1) == []
    assert len(field.wells({"E3": 20.0}, -1)) == 1


def test_depths_of_three_levels():
    field = bench(11)
    levels = {"E1": 50.0, "E5": 40.0, "E9": 80.0}
    left, right = field.wells(levels, +1)
    top = {
        name: field.potential(levels, np.linspace(*field.span_m(name), 2001)).max()
        for name in levels
    }
    for well in (left, right):
        assert well.potential_V == pytest.approx(float(field.potential(levels, well.z_m)), abs=1e-9)
        assert well.depth_V == min(well.depth_left_V, well.depth_right_V)
    assert left.depth_left_V == pytest.approx(top["E1"] - left.potential_V, abs=1e-4)
    assert left.depth_right_V == pytest.approx(top["E5"] - left.potential_V, abs=1e-4)
    assert right.depth_right_V == pytest.approx(top["E9"] - right.potential_V, abs=1e-4)
    # A distant gate does not count for the own depth; it does for the trap depth.
    assert right.depth_left_V == pytest.approx(top["E5"] - right.potential_V, abs=1e-4)
    assert right.trap_depth_V == pytest.approx(top["E1"] - right.potential_V, abs=1e-4)
    assert right.trap_depth_V > right.depth_V + 5
    assert field.wells(levels, 1, (right.z_m - 1e-3, right.z_m + 1e-3)) == [right]
    # One part in a thousand of one voltage is seen.
    moved = field.wells({**levels, "E5": 40.04}, +1)[0]
    assert moved.depth_right_V != pytest.approx(left.depth_right_V, abs=1e-3)


def test_outside_is_a_neighbour_at_ground():
    field = bench(7)
    (well,) = field.wells({"E3": -20.0}, +1)
    assert well.depth_V == pytest.approx(-well.potential_V, abs=1e-9)
    assert well.trap_depth_V == pytest.approx(well.depth_V, abs=1e-9)
    # Lifted above ground the same dip is held by its rims only.
    rims = {"E2": 40.0, "E3": 10.0, "E4": 35.0}
    (well,) = field.wells(rims, +1)
    assert well.depth_V == well.depth_right_V < well.depth_left_V


def test_curvature_is_the_second_derivative():
    field = bench(7)
    levels = {"E2": 40.0, "E4": 40.0}
    (well,) = field.wells(levels, +1)
    h = 3e-4
    three = field.potential(levels, well.z_m + h * np.array([-1, 0, 1]))
    assert well.curvature_V_m2 == pytest.approx(three @ [1, -2, 1] / h**2, rel=1e-3)


def test_signs_are_mirror_images():
    field = bench(7)
    levels = {"E1": 30.0, "E3": -12.0, "E5": 25.0}
    negative = {name: -v for name, v in levels.items()}
    for mine, other in zip(field.wells(levels, 1), field.wells(negative, -1), strict=True):
        assert mine.z_m == other.z_m
        assert mine.depth_V == other.depth_V
        assert mine.potential_V == -other.potential_V


def rippled(ripple):
    """A flat well with seven dimples of 0.4 mV between walls of several volts."""

    def function(z):
        wave = waves(2e-4, 2 * np.pi, floor=-1.0)(z)
        wall = [
            3.0 * (4.0**m) * (np.exp(4 * (z - 9)) + (-1) ** m * np.exp(4 * (1 - z)))
            for m in range(5)
        ]
        return np.array(wave) + np.array(wall)

    return wells(curve_of(function), 1, ripple_V=ripple)


def test_dimples_below_the_ripple_are_one_well():
    (well,) = rippled(1e-3)
    assert well.depth_V > 10
    assert len(rippled(1e-4)) == 4


def test_floor_of_a_merged_well_spans_its_dimples_but_no_shoulder():
    field = bench(13)
    vector = volts(13, E1=40.0, E2=20.0, E3=20.0, E4=20.0, E11=40.0)
    found = landscape(field.curve(vector), 1e-3)
    index = found.basin(0.11)
    assert index is not None
    assert found.low_m[index] > field.span_m("E5")[0]
    assert found.minimum_V[index] < 0.2


def test_merging_drops_the_shallower_first():
    def function(z):
        table = waves(1.0, np.pi)(z)
        tilt = waves(0.3, np.pi / 5)(z)
        return np.array(table) + np.array(tilt)

    curve = curve_of(function, count=401)
    counts = [landscape(curve, ripple).minimum_m.size for ripple in (0.0, 1.0, 1.8, 2.2, 5.0)]
    assert counts == sorted(counts, reverse=True)
    assert counts[0] == 5
    assert counts[-1] == 0
    deepest = landscape(curve, 0.0).minimum_V.min()
    assert landscape(curve, 1.8).minimum_V.min() == deepest


def test_basins_and_slopes_out_of_the_ends():
    field = bench(7)
    found = landscape(field.curve(volts(7, E1=30.0, E3=20.0, E5=30.0)))
    middle = [sum(field.span_m(f"E{i}")) / 2 for i in range(7)]
    assert found.basin(middle[2]) == 0
    assert found.basin(middle[4]) == 1
    assert found.basin(middle[0]) is None
    assert found.basin(middle[6]) is None
    assert found.basin(-1.0) is None
    assert found.basin(1.0) is None
