"""Bounds from supporting lines: exact on known convex functions, sound when stopped early."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import linprog

from wellseq.fields import convex
from wellseq.fields.convex import Line, least


def oracle_of(lines):
    """The largest of given lines (m, n + 1), asked as a field would be."""

    def oracle(progress):
        value = lines[:, 0] + lines[:, 1:] @ progress
        return Line(lines[int(value.argmax())], 0.0, 0.0)

    return oracle


def exact(lines):
    """The least value over the box by linear programming."""
    n = lines.shape[1] - 1
    rows = np.column_stack((lines[:, 1:], -np.ones(len(lines))))
    bounds = [(0, 1)] * n + [(None, None)]
    return linprog([0.0] * n + [1.0], A_ub=rows, b_ub=-lines[:, 0], bounds=bounds).fun


@pytest.mark.parametrize("count", [1, 2, 3, 4, 5])
def test_least_of_many_planes_against_linear_programming(count):
    rng = np.random.default_rng(count)
    inside = 0
    for _ in range(40):
        lines = rng.normal(size=(30, count + 1)) * 10
        found = least(oracle_of(lines), count, 1e-6)
        truth = exact(lines)
        assert found.lower_V <= truth + 1e-9
        assert found.upper_V >= truth - 1e-9
        assert found.upper_V - found.lower_V <= 1e-6
        progress = np.array(found.progress)
        assert ((progress >= 0) & (progress <= 1)).all()
        value = (lines[:, 0] + lines[:, 1:] @ progress).max()
        assert value == pytest.approx(found.upper_V, abs=1e-12)
        inside += bool(((progress > 1e-6) & (progress < 1 - 1e-6)).any())
    assert inside > 15


def test_a_minimum_between_the_ends_is_below_both():
    lines = np.array([[10.0, -20.0], [-8.0, 20.0]])
    found = least(oracle_of(lines), 1)
    assert found.lower_V == pytest.approx(1.0, abs=1e-12)
    assert found.progress[0] == pytest.approx(0.45)
    assert min(oracle_of(lines)(np.zeros(1)).at(np.zeros(1)), 12.0) == 10.0


@pytest.mark.parametrize(("slope", "at"), [(3.0, 0.0), (-3.0, 1.0)])
def test_a_minimum_at_an_end(slope, at):
    found = least(oracle_of(np.array([[5.0, slope]])), 1)
    assert found.lower_V == found.upper_V == min(5.0, 5.0 + slope)
    assert found.progress == (at,)


def test_nothing_moves():
    found = least(oracle_of(np.array([[5.0], [4.0]])), 0)
    assert (found.lower_V, found.upper_V, found.progress) == (5.0, 5.0, ())


def quadratic(centre):
    """Tangent planes of |p - centre|^2: a smooth function, infinitely many lines."""

    def oracle(progress):
        slope = 2 * (progress - centre)
        value = ((progress - centre) ** 2).sum()
        return Line(np.concatenate(((value - slope @ progress,), slope)), 0.0, 0.0)

    return oracle


@settings(max_examples=40, deadline=None, derandomize=True)
@given(st.lists(st.floats(-0.5, 1.5), min_size=1, max_size=3))
def test_a_smooth_function(centre):
    centre = np.array(centre)
    found = least(quadratic(centre), centre.size, 1e-4)
    truth = ((np.clip(centre, 0, 1) - centre) ** 2).sum()
    assert truth - 1e-4 - 1e-12 <= found.lower_V <= truth + 1e-12
    assert truth - 1e-12 <= found.upper_V <= truth + 1e-4 + 1e-12


@pytest.mark.parametrize("evaluations", [1, 2, 3, 5, 8])
def test_stopped_early_the_bound_is_loose_but_sound(monkeypatch, evaluations):
    monkeypatch.setattr(convex, "EVALUATIONS_MAX", evaluations)
    centre = np.array([0.3, 0.6, 0.55])
    for count in (1, 2, 3):
        found = least(quadratic(centre[:count]), count, 0.0)
        assert found.lower_V <= 1e-12
        assert found.upper_V >= 0.0
    assert found.upper_V - found.lower_V > 1e-6


def test_the_bound_does_not_rest_on_the_simplex(monkeypatch):
    # Whatever columns it ends with, their average is still a line below the function.
    rng = np.random.default_rng(5)
    monkeypatch.setattr(convex._Average, "_pivot", lambda *_, **__: False)
    for _ in range(20):
        lines = rng.normal(size=(10, 3))
        assert least(oracle_of(lines), 2).lower_V <= exact(lines) + 1e-12


def test_lines_that_repeat_do_not_loop():
    lines = np.array([[1.0, 0.0, 0.0], [1.0, 1e-14, 0.0], [1.0, 0.0, 1e-14]])
    found = least(oracle_of(lines), 2)
    assert found.lower_V == pytest.approx(1.0, abs=1e-12)
