"""The case: what is behind a number, and what stands in the way."""

from dataclasses import replace

import pytest

from wellseq.base.finding import Finding, Origin, Verdict
from wellseq.base.place import Place
from wellseq.checks.case import reached


def test_a_number_without_a_step_points_at_the_file(make):
    case = make.case()
    start = Origin(Place("night.well"))
    assert case.origin(0) == make.origin(0)
    assert case.origin(-1) == case.origin(99) == start
    assert replace(case, timeline=None).origin(0) == start


def test_a_block_has_its_name(make):
    case = make.case()
    assert (case.block_name(0), case.block_name(1), case.block_name(-1)) == ("run", "", "")
    assert replace(case, timeline=None).block_name(0) == ""


def test_failing_and_unsure_block_and_nothing_else(make):
    findings = tuple(Finding(verdict.value, verdict, "", make.place(0)) for verdict in Verdict)
    case = make.case().with_findings(findings, ("a",), ())
    assert [finding.name for finding in case.blocked] == ["fail", "unsure"]


def test_a_stage_that_was_not_named_is_a_fault_of_the_check():
    assert reached("stage") == "stage"
    with pytest.raises(TypeError):
        reached(None)
