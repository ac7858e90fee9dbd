"""`field-not-settled`: the solver's error against the house's bounds."""

import math

from wellseq.checks.judging import check

NAME = "field-not-settled"


def verdicts(make, basis_V=0.0, error_V_per_V=0.0):
    held = make.held(make.side(9.0, basis_V=basis_V), 9.0)
    case = make.case(wells=make.wells(held, basis_error_V_per_V=error_V_per_V))
    return make.verdicts(case, NAME)


def test_an_exact_field_passes_twice(make):
    assert verdicts(make) == ["pass", "pass"]


def test_exactly_at_the_limits_and_one_float_beyond(make, beyond):
    volts, basis = check(NAME).LIMIT.value, check(NAME).BASIS_LIMIT.value
    assert verdicts(make, volts, basis) == ["pass", "pass"]
    assert sorted(verdicts(make, beyond.up(volts), basis)) == ["fail", "pass"]
    assert sorted(verdicts(make, volts, beyond.up(basis))) == ["fail", "pass"]


def test_an_error_that_is_not_known_is_unsure(make):
    assert sorted(verdicts(make, math.nan)) == ["pass", "unsure"]
    assert sorted(verdicts(make, 0.0, math.nan)) == ["pass", "unsure"]


def test_the_worse_of_both_sides_counts_and_it_may_not_be_allowed(make):
    held = make.held(make.side(9.0, basis_V=1e-9), make.side(9.0, basis_V=math.nan))
    assert make.verdicts(make.case(wells=make.wells(held)), NAME).count("unsure") == 1
    bad = make.held(make.side(9.0, basis_V=1.0))
    case = make.case(wells=make.wells(bad), allowances=[make.allow(NAME)])
    assert make.verdicts(case, NAME).count("fail") == 1
