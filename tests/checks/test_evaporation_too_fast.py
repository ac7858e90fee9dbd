"""`evaporation-too-fast`: what the model needs at least."""

from __future__ import annotations

import math

import pytest

from wellseq.checks.judging import check

NAME = "evaporation-too-fast"
EDGE = 1.0


def verdicts(make, low, high=None):
    forecast = make.foretold(make.measured(NAME, low, high, unit=""))
    return make.verdicts(make.case(forecast=forecast), NAME)


def test_the_edge_itself_passes_and_the_next_number_fails(make, beyond):
    assert verdicts(make, EDGE) == ["pass"]
    assert verdicts(make, beyond.down(EDGE)) == ["fail"]
    assert check(NAME).LIMIT.value == EDGE


def test_an_interval_across_the_edge_is_unsure(make, beyond):
    assert verdicts(make, beyond.down(EDGE), beyond.up(EDGE)) == ["unsure"]


@pytest.mark.parametrize("ends", [(math.nan, math.nan), (math.nan, EDGE)])
def test_what_is_not_known_is_unsure(make, ends):
    assert verdicts(make, *ends) == ["unsure"]


def test_it_may_be_allowed_and_measurements_of_others_are_not_read(make):
    forecast = make.foretold(
        make.measured(NAME, 0.5, unit=""), make.measured("something-else", 0.5)
    )
    case = make.case(forecast=forecast, allowances=[make.allow(NAME)])
    assert make.verdicts(case, NAME) == ["allowed"]
