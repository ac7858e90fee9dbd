"""Mistakes are handed on once each, in the order in which they came."""

from dataclasses import replace

from wellseq.base.finding import Reading
from wellseq.checks.written import mistakes_named, proofs_ended
from wellseq.wells.wells import Trouble, Unproved


def test_the_same_mistake_twice_is_one_and_another_pass_is_another(make):
    one = make.mistake("syntax")
    passes = [replace(one, origin=make.origin(0, passes=(n,))) for n in (1, 2)]
    case = make.case(mistakes=[one, make.mistake("too-large"), one, *passes])
    assert list(mistakes_named(case, "syntax")) == [one, *passes]


def test_a_proof_is_named_by_its_trouble(make):
    ends = [Unproved(t, "pool", 0, 0, 0.0, 1.0, 0.0, t.value, sure=False) for t in Trouble]
    case = make.case(wells=make.wells(unproved=tuple(ends)))
    for trouble in Trouble:
        (reading,) = proofs_ended(case, trouble)
        assert isinstance(reading, Reading)
        assert reading.message == trouble.value
    assert list(proofs_ended(replace(case, wells=None), Trouble.LOST)) == []
