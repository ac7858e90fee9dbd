"""The solver: exact decays, conditions, and the bound on its work."""

from __future__ import annotations

import math

import pytest

from wellseq.clouds.stiff import Condition, Path, solve


def decay(rate_per_s: float, **options: object) -> Path:
    """y' = -rate (y - 1) from 5 over 2 s."""
    return solve(lambda _, y: (-rate_per_s * (y[0] - 1.0),), (5.0,), 2.0, **options)


def error(path: Path, rate_per_s: float) -> float:
    """Largest relative error against the closed form."""
    exact = [1.0 + 4.0 * math.exp(-rate_per_s * t) for t in path.times_s]
    return max(abs(y / wanted - 1.0) for y, wanted in zip(path.states[0], exact, strict=True))


@pytest.mark.parametrize("rate_per_s", [0.3, 3.0, 3e3, 3e6])
def test_decay_to_one_part_in_a_million(rate_per_s: float) -> None:
    assert error(decay(rate_per_s), rate_per_s) < 1e-6


def test_a_loose_tolerance_is_seen() -> None:
    assert error(decay(3.0, relative=1e-3, absolute=1e-3), 3.0) > 1e-6


def test_conditions_are_dated() -> None:
    watched = [Condition(lambda _, y: y[0] - 2.0), Condition(lambda _, y: y[0] - 0.5)]
    path = decay(3.0, conditions=watched)
    assert path.whole
    assert path.crossings_s[0] == pytest.approx(math.log(4.0) / 3.0, rel=1e-6)
    assert math.isnan(path.crossings_s[1])


def test_a_condition_can_end_the_path() -> None:
    path = decay(3.0, conditions=[Condition(lambda _, y: y[0] - 2.0, ends=True)])
    assert path.ended_by == 0
    assert not path.whole
    assert path.end[0] == pytest.approx(2.0, rel=1e-6)


def test_a_condition_met_at_the_start_ends_there() -> None:
    path = decay(3.0, conditions=[Condition(lambda _, y: y[0] - 9.0, ends=True)])
    assert (path.ended_by, path.crossings_s, path.end[0], path.work) == (0, (0.0,), 5.0, 0)


def test_work_is_bounded() -> None:
    path = decay(3.0, work_max=20)
    assert path.complaint == "more than 20 evaluations"
    assert path.work == 21
    assert math.isnan(path.end[0])
    assert not path.whole


def test_a_path_that_blows_up_is_no_path() -> None:
    path = solve(lambda _, y: (y[0] * y[0],), (1.0,), 5.0, work_max=5000)
    assert path.complaint
    assert math.isnan(path.end[0])


def test_no_time_no_change() -> None:
    path = solve(lambda _, y: (1.0,), (5.0,), 0.0)
    assert path.whole
    assert path.end[0] == 5.0
