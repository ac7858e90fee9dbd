"""`catch-gate-early`: the first good closing time of the forecast."""

from __future__ import annotations

import math

import pytest

NAME = "catch-gate-early"
EDGE = 2e-07


def verdicts(make, low, high=None, limit=EDGE):
    forecast = make.foretold(make.measured(NAME, low, high, limit=limit, unit="s"))
    return make.verdicts(make.case(forecast=forecast), NAME)


def test_the_edge_itself_passes_and_the_next_number_fails(make, beyond):
    assert verdicts(make, EDGE) == ["pass"]
    assert verdicts(make, beyond.down(EDGE)) == ["fail"]


def test_an_interval_across_the_edge_is_unsure(make, beyond):
    assert verdicts(make, beyond.down(EDGE), beyond.up(EDGE)) == ["unsure"]


@pytest.mark.parametrize("ends", [(math.nan, math.nan), (math.nan, EDGE)])
def test_what_is_not_known_is_unsure(make, ends):
    assert verdicts(make, *ends) == ["unsure"]


def test_it_may_be_allowed(make):
    forecast = make.foretold(make.measured(NAME, 6.666666666666667e-08, limit=EDGE, unit="s"))
    case = make.case(forecast=forecast, allowances=[make.allow(NAME)])
    assert make.verdicts(case, NAME) == ["allowed"]
    ((message, unit),) = {(one.message, one.unit) for one in make.findings(case, NAME)}
    assert message.startswith("pool is ")
    assert unit == "s"
