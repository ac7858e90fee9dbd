"""The judge: what runs, in which order, what is allowed, and what the key is cut for."""

from dataclasses import replace
from types import SimpleNamespace

import pytest

from wellseq.base.finding import Mistake, Reading, Verdict, at_least, at_most
from wellseq.checks import judging
from wellseq.checks.judging import Cleared, check, check_names, clear, judge, waivable


@pytest.fixture
def only(monkeypatch):
    """Leave just one check, `lag-too-long`, which reads what is given."""

    def arrange(*things, needs=("mistakes",), may=True):
        module = SimpleNamespace(NEEDS=needs, WAIVABLE=may, read=lambda case: iter(things))
        monkeypatch.setattr(judging, "check_names", lambda: ("lag-too-long",))
        monkeypatch.setattr(judging, "check", lambda name: module)
        monkeypatch.setattr(judging, "_AFTER_ALLOWANCES", ())

    return arrange


def test_every_check_says_what_it_is():
    assert len(check_names()) >= 30
    for name in check_names():
        module = check(name)
        assert module.SAYS.endswith(".")
        assert isinstance(module.WAIVABLE, bool)
        assert set(module.NEEDS) <= {
            *("mistakes", "trap", "sequence", "timeline", "shipped", "wells", "rules", "rulings")
        }  # fmt: skip


def test_a_name_that_is_no_checks_is_refused_and_imports_nothing():
    with pytest.raises(KeyError):
        check("judging")
    with pytest.raises(KeyError):
        check("../os")
    assert not waivable("judging")


def test_a_stage_that_was_not_reached_is_named_and_blocks_the_key(make):
    case = judge(replace(make.case(), wells=None))
    assert ("well-lost", "the file did not get as far as its wells") in case.not_run
    assert "well-lost" not in case.ran
    assert "slew-too-fast" in case.ran
    assert clear(case) is None


def test_a_mistake_no_check_reports_is_a_finding_all_the_same(make, only):
    only()
    case = judge(make.case(mistakes=[make.mistake("well-haunted")]))
    assert [(f.name, f.verdict.value) for f in case.findings] == [("well-haunted", "fail")]


def test_a_mistake_of_a_check_that_could_not_run_is_a_finding_all_the_same(make):
    case = replace(make.case(mistakes=[make.mistake("well-lost")]), wells=None)
    assert make.verdicts(case, "well-lost") == ["fail"]


def test_a_reading_becomes_a_finding_with_all_it_carries(make, only):
    origin = replace(make.origin(0, "take", (2, 1)), chain=(make.place(7),))
    only(Reading(3.0, at_most(2.0, "V"), "{value} ± {uncertainty}, {limit}", origin, 0.5, "a",
                 "run", (0.0, 1.0), "less"))  # fmt: skip
    (found,) = judge(make.case()).findings
    assert (found.name, found.verdict, found.message) == (
        "lag-too-long", "fail", "3 V ± 500 mV, 2 V"
    )  # fmt: skip
    assert (found.label, found.passes, found.chain) == ("take", (2, 1), (make.place(7),))
    assert (found.value, found.limit, found.margin, found.unit) == (3.0, 2.0, -1.5, "V")


@pytest.mark.parametrize(
    ("between", "verdict", "margin"),
    [((0.5, 0.7), "fail", -0.3), ((0.7, 0.8), "unsure", -0.1), ((0.8, 0.9), "pass", 0.0)],
)
def test_an_interval_is_judged_by_its_ends(make, only, between, verdict, margin):
    only(Reading(0.0, at_least(0.8, "V"), "", make.origin(0), between=between))
    (found,) = judge(make.case()).findings
    assert found.verdict == verdict
    assert found.margin == pytest.approx(margin)


def test_an_interval_with_an_open_or_unknown_end():
    inf, nan = float("inf"), float("nan")
    limit = at_least(1.0)
    assert limit.judge_between(1.0, inf) is Verdict.PASS
    assert limit.judge_between(0.9, inf) is Verdict.UNSURE
    assert limit.judge_between(-inf, 0.9) is Verdict.FAIL
    for pair in ((nan, 5.0), (5.0, nan), (inf, inf), (-inf, -inf)):
        assert limit.judge_between(*pair) is Verdict.UNSURE
    assert at_most(nan).judge_between(0.0, 0.0) is Verdict.UNSURE


def test_an_allowance_covers_its_step_in_every_pass_and_no_other(make, only):
    origins = [make.origin(0, passes=(n,)) for n in (1, 2)] + [make.origin(1)]
    bad = [Reading(3.0, at_most(2.0), "", origin) for origin in origins]
    only(*bad)
    case = judge(make.case(allowances=[make.allow("lag-too-long", 0)]))
    assert [found.verdict.value for found in case.findings] == ["allowed", "allowed", "fail"]
    assert case.findings[0].reason == "the cloud is dumped next"
    only(*bad, may=False)
    case = judge(make.case(allowances=[make.allow("lag-too-long", 0)]))
    assert {found.verdict.value for found in case.findings} == {"fail"}


def test_unsure_may_be_allowed_and_a_pass_stays_one(make, only):
    only(
        Reading(float("nan"), at_most(2.0), "", make.origin(0)),
        Reading(1.0, at_most(2.0), "", make.origin(0)),
    )
    case = judge(make.case(allowances=[make.allow("lag-too-long", 0)]))
    assert sorted(found.verdict.value for found in case.findings) == ["allowed", "pass"]


def test_the_checks_of_allowances_see_the_others_after_the_allowances(make, monkeypatch):
    seen = []

    def watching(case):
        seen.extend(case.findings)
        return iter(())

    monkeypatch.setattr(check("allowance-unused"), "read", watching)
    case = make.case(
        wells=make.wells(make.held(0.1)), allowances=[make.allow("well-too-shallow", 0)]
    )
    judge(case)
    assert [f.verdict.value for f in seen if f.name == "well-too-shallow"] == ["allowed"] * 2


def test_findings_are_in_order_of_place(make, only):
    only(*(Mistake("x", make.place(n), "") for n in (5, 1, 3)))
    assert [found.place.line for found in judge(make.case()).findings] == [2, 4, 6]


def test_what_would_steer_a_terminal_is_escaped(make, only):
    only(Mistake("x", make.place(0), "a \x1b[2J name"))
    (found,) = judge(make.case()).findings
    assert found.message == "a \\u001b[2J name"


def test_only_a_clean_bill_cuts_the_key(make):
    clean = judge(make.case())
    assert clean.ran == check_names()
    assert clear(clean) == Cleared(clean)
    dirty = judge(make.case(wells=make.wells(make.held(0.1))))
    unsure = judge(make.case(wells=make.wells(make.held(float("nan")))))
    for case in (make.case(), dirty, unsure, replace(clean, ran=clean.ran[1:])):
        assert clear(case) is None
        with pytest.raises(ValueError, match="cannot be cleared"):
            Cleared(case)


def test_the_same_case_is_judged_the_same_twice(make):
    case = make.case(wells=make.wells(make.held(0.1)), mistakes=[make.mistake("syntax")])
    assert judge(case) == judge(case)
