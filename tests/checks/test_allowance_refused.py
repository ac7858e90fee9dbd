"""`allowance-refused`: what may never be allowed, and what does not exist."""

from wellseq.checks.judging import check, check_names, waivable

NAME = "allowance-refused"


def allowing(make, *names, **more):
    return make.case(allowances=[make.allow(name) for name in names], **more)


def test_what_may_be_allowed_is_not_refused(make):
    names = [name for name in check_names() if waivable(name)]
    assert names
    assert make.verdicts(allowing(make, *names), NAME) == []


def test_what_may_never_be_allowed_is_refused_whether_it_happens_or_not(make):
    names = [name for name in check_names() if not waivable(name)]
    assert make.verdicts(allowing(make, *names), NAME) == ["fail"] * len(names)
    wrong = allowing(make, "slew-too-fast", mistakes=[make.mistake("slew-too-fast")])
    (found,) = make.findings(wrong, NAME)
    assert found.message == "'slew-too-fast' may never be allowed"
    assert found.place == make.allow(NAME).place
    assert make.verdicts(wrong, "slew-too-fast") == ["fail"]


def test_a_name_that_is_none_gets_the_nearest(make):
    (found,) = make.findings(allowing(make, "well-to-shallow"), NAME)
    assert found.message == "there is no finding 'well-to-shallow'"
    assert found.hint == "did you mean 'well-too-shallow'?"


def test_a_written_allowance_is_refused_once_and_cannot_allow_itself(make):
    twice = allowing(make, "well-lost", "well-lost")
    assert make.verdicts(twice, NAME) == ["fail"]
    assert make.verdicts(allowing(make, NAME), NAME) == ["fail"]
    assert not check(NAME).WAIVABLE
