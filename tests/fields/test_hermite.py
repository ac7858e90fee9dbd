"""Interpolation between nodes: exact on polynomials, bounded by the controls, of sixth order."""

import numpy as np
import pytest
from numpy.polynomial import Polynomial

from wellseq.fields.hermite import QUINTIC_ERROR, Curve, bernstein, controls

STEP = 0.25


def sampled(function, orders, count=9, start=-1.0, step=STEP):
    """Derivatives (orders, count) of a polynomial at equal steps."""
    z = start + step * np.arange(count)
    return np.stack([function.deriv(m)(z) if m else function(z) for m in range(orders)])


@pytest.mark.parametrize(("orders", "degree"), [(3, 5), (5, 9)])
def test_polynomials_of_the_full_degree_are_reproduced(orders, degree):
    rng = np.random.default_rng(degree)
    function = Polynomial(rng.normal(size=degree + 1))
    table = controls(sampled(function, orders), STEP)
    for fraction in (0.0, 0.3, 0.77, 1.0):
        z = -1.0 + STEP * (np.arange(8) + fraction)
        value = bernstein(np.full(1, fraction), degree)[:, 0] @ table
        np.testing.assert_allclose(value, function(z), rtol=1e-12, atol=1e-12)


def test_one_degree_more_is_not_reproduced():
    function = Polynomial([0, 0, 0, 0, 0, 0, 1.0])
    table = controls(sampled(function, 3), STEP)
    middle = bernstein(np.full(1, 0.5), 5)[:, 0] @ table
    error = np.abs(middle - function(-1.0 + STEP * (np.arange(8) + 0.5))).max()
    # The greatest error is step^6/46080 times the sixth derivative (720), at the middle.
    assert error == pytest.approx(720 * QUINTIC_ERROR * STEP**6, rel=1e-9)


def test_controls_bound_every_value_between_the_nodes():
    rng = np.random.default_rng(1)
    nodes = rng.normal(size=(5, 40))
    curve = Curve(nodes, 0.0, STEP, 1.0)
    for order in (0, 1, 2):
        low, high = curve.bounds(order)
        z = STEP * (np.arange(39)[:, None] + np.linspace(0, 1, 50)[None, :])
        value = curve.at(z, order)
        assert (value >= low[:, None] - 1e-12).all()
        assert (value <= high[:, None] + 1e-12).all()
        # The bounds are bounds of something: half of them would be crossed.
        middle, half = (low + high) / 2, (high - low) / 8
        assert (np.abs(value - middle[:, None]) > half[:, None]).any()


def test_values_at_nodes_and_shapes_are_kept():
    nodes = np.random.default_rng(2).normal(size=(5, 12))
    curve = Curve(nodes, -0.3, STEP, 1.0)
    for order in (0, 1, 2):
        np.testing.assert_allclose(curve.at(curve.z_m, order), nodes[order], rtol=0, atol=1e-13)
    assert curve.at(0.1).shape == ()
    assert curve.exact(np.zeros((2, 3))).shape == (2, 3)


def test_beyond_the_ends_the_slowest_mode_goes_on():
    nodes = np.zeros((5, 4))
    nodes[0] = 1.0
    curve = Curve(nodes, 0.0, 1.0, 2.0)
    assert curve.at(5.0) == pytest.approx(np.exp(-4.0))
    assert curve.at(-1.5) == pytest.approx(np.exp(-3.0))
    assert curve.at(np.inf) == 0.0


def test_the_error_falls_as_the_sixth_power_of_the_step():
    def error(count):
        z = np.linspace(0, 1, count)
        step = z[1] - z[0]
        nodes = np.stack([np.sin(7 * z + m * np.pi / 2) * 7.0**m for m in range(5)])
        fine = np.linspace(0, 1, 997)
        return np.abs(Curve(nodes, 0.0, step, 1.0).at(fine) - np.sin(7 * fine)).max()

    assert np.log2(error(17) / error(33)) == pytest.approx(6.0, abs=0.2)
