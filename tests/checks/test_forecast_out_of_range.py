"""`forecast-out-of-range`: every missing figure once, where it arises."""

from __future__ import annotations

from dataclasses import replace

from wellseq.clouds.figures import Outside
from wellseq.clouds.forecast import Forecast, Gap

NAME = "forecast-out-of-range"
WHY = Outside("evaporation", "eta", 3.0, 4.0, "", "at least")
GAP = Gap("temperature", "pool", 0, 0, 0.0, 1e-6, (WHY,))


def findings(make, *gaps, **more):
    return make.findings(make.case(forecast=Forecast(gaps=gaps), **more), NAME)


def test_a_missing_figure_is_unsure_and_says_why(make):
    (found,) = findings(make, GAP)
    assert found.verdict.value == "unsure"
    assert found.message == (
        "the temperature of pool cannot be foretold from here on; "
        "evaporation: eta is 3, and must be at least 4"
    )
    assert "assume" in found.hint


def test_figures_that_go_missing_together_are_one_finding(make):
    (found,) = findings(make, GAP, replace(GAP, quantity="number"))
    assert found.message.startswith("the temperature and number of pool cannot be foretold")
    assert len(findings(make, GAP, replace(GAP, cloud="bunch"))) == 2


def test_one_that_is_replaced_at_once_or_told_elsewhere_is_not_said(make):
    assert findings(make, replace(GAP, replaced=True)) == ()
    assert findings(make, replace(GAP, told="evaporation-too-fast")) == ()
    assert findings(make) == ()


def test_it_may_be_allowed(make):
    (found,) = findings(make, GAP, allowances=[make.allow(NAME)])
    assert found.verdict.value == "allowed"
