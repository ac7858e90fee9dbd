"""What each kind of field accepts, whatever the step."""

from __future__ import annotations

from fractions import Fraction

import pytest

from wellseq.model.operands import DURATION_MAX_s, Slot, settle
from wellseq.model.reporter import Reporter
from wellseq.model.scope import FileScope, Names
from wellseq.model.step import Level, Takes
from wellseq.model.values import UNKNOWN
from wellseq.text.parse import parse


def slot(what: str, exact: bool = False, **more: str) -> Slot:
    """A field after the clause word `to`."""
    return Slot("to", "to", Takes(what, **more), True, False, exact, ("depth", "time"))


def settled(trap, written: str, field: Slot):
    """The value of a field, and everything reported."""
    reporter = Reporter()
    statement = parse(f"step to {written}", "x").statements[0]
    operands = statement.clauses[0].operands
    names = Names(FileScope("x", trap, reporter))
    found = settle(field, operands, names, {})
    return found, [(m.name, m.message) for m in reporter.listed(["x"])]


def test_exact_fields_stay_fractions_and_others_are_rounded_once(sandpit):
    assert settled(sandpit, "0.1 s", slot("quantity", True, unit="s"))[0] == Fraction(1, 10)
    assert settled(sandpit, "0.1 V", slot("quantity", unit="V"))[0] == 0.1


def test_a_duration_ends_somewhere(sandpit):
    field = slot("quantity", True, unit="s")
    assert settled(sandpit, "1e7 s", field) == (DURATION_MAX_s, [])
    found, told = settled(sandpit, "1.0000001e7 s", field)
    assert found is UNKNOWN
    assert told == [("too-large", "this time is too long")]


@pytest.mark.parametrize(
    ("what", "written", "value"),
    [
        ("electrode", "E3", "E3"),
        ("electrodes", "E3, E5..E7, G1", ("E3", "E5", "E6", "E7", "G1")),
        ("line", "valve", "valve"),
        ("trigger", "knock", "knock"),
        ("level", "behind", Level("behind")),
        ("level", "-3 V", Level(-3.0)),
        ("state", "open", "open"),
        ("text", '"log 311"', "log 311"),
        ("choice", "depth", "depth"),
    ],
)
def test_what_is_accepted(sandpit, what, written, value):
    assert settled(sandpit, written, slot(what)) == (value, [])


@pytest.mark.parametrize(
    ("what", "written", "message"),
    [
        ("electrode", "5 V", "the name of an electrode is needed here"),
        ("line", "E3", "a digital line is needed here, and 'E3' is an electrode of the trap"),
        ("electrodes", "E3, E1..E4", "'E3' is given twice here"),
        ("text", "E3", "`to` takes a text in quotes"),
        ("text", '"  "', "`to` says nothing"),
        ("choice", "width", "'width' is no quantity that can be named here"),
        ("choice", "5 V", "this is no quantity that can be named here"),
        ("level", "arrival", "an output is needed here, and 'arrival' is a trigger of the trap"),
        ("pattern", "5 V", "the name of a pattern is needed here"),
        ("state", "5 V", "the name of a state is needed here"),
    ],
)
def test_what_is_refused(sandpit, what, written, message):
    found, told = settled(sandpit, written, slot(what))
    assert found is UNKNOWN
    assert [said for _, said in told] == [message]


def test_a_kind_that_depends_on_an_unsound_choice_is_not_judged(sandpit):
    field = Slot(
        "above", "to", Takes("quantity", by="quantity", units=(("depth", "V"),)), True, False, False
    )
    assert settled(sandpit, "3 K", field) == (UNKNOWN, [])
