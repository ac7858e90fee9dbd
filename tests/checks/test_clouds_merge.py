"""`clouds-merge`: shown to happen fails, only not proved is unsure, nothing is clean."""

from dataclasses import replace

import pytest

from wellseq.checks.judging import check
from wellseq.wells.wells import Trouble, Unproved

NAME = "clouds-merge"
END = Unproved(Trouble.MERGE, "pool", 0, 0, 0.0, 1e-6, 0.02, "pool is in trouble", "mend it")


@pytest.mark.parametrize(("sure", "verdict"), [(True, "fail"), (False, "unsure")])
def test_a_proof_that_ended(make, sure, verdict):
    case = make.case(wells=make.wells(make.held(9.0), unproved=(replace(END, sure=sure),)))
    (found,) = make.findings(case, NAME)
    assert (found.verdict.value, found.message, found.hint) == (verdict, END.message, END.hint)
    assert (found.subject, found.block, found.window_s) == ("pool", "run", (0.0, 1e-6))
    assert found.place == make.place(0)


def test_a_mistake_of_the_drawing_fails(make):
    assert make.verdicts(make.case(mistakes=[make.mistake(NAME)]), NAME) == ["fail"]


def test_another_trouble_is_not_its_business(make):
    other = next(trouble for trouble in Trouble if trouble is not Trouble.MERGE)
    case = make.case(wells=make.wells(unproved=(replace(END, trouble=other),)))
    assert make.verdicts(case, NAME) == []


def test_whether_it_may_be_allowed(make):
    case = make.case(wells=make.wells(unproved=(END,)), allowances=[make.allow(NAME)])
    assert check(NAME).WAIVABLE is True
    assert make.verdicts(case, NAME) == ["allowed"]


def test_clean(make):
    assert make.verdicts(make.case(wells=make.wells(make.held(9.0))), NAME) == []
