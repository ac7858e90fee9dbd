"""Statements and step kinds: the signature read off the fields, and everything wrong at once."""

from __future__ import annotations

from fractions import Fraction
from typing import Annotated, ClassVar, Literal

import pytest

from wellseq.model.reader import read_step, signature
from wellseq.model.reporter import Reporter
from wellseq.model.scope import FileScope, Names
from wellseq.model.step import (
    Duration,
    Electrodes,
    Objection,
    Step,
    Subject,
    Takes,
    Trigger,
    Volts,
    Word,
)
from wellseq.model.steps import step_class, verbs
from wellseq.text.parse import parse


class Wave(Step):
    """A step kind of this test: `wave KIND E, E2 to V over T [after TRIGGER] [twice]`."""

    REFUSED: ClassVar[dict[str, str]] = {"with": "`with` comes later"}

    kind: Annotated[Literal["high", "low"], Takes("choice"), Subject()]
    electrodes: Annotated[Electrodes, Subject()]
    to: Volts
    over: Duration
    after: Trigger | None = None
    twice: Word = False

    def objections(self, trap):
        if self.to > 100:
            yield Objection("to", "voltage-out-of-range", "too high a wave")


@pytest.fixture
def read(sandpit):
    def read_line(line: str):
        reporter = Reporter()
        tree = parse(line, "x")
        assert tree.mistakes == ()
        names = Names(FileScope("x", sandpit, reporter))
        step = read_step(tree.statements[0], Wave, names)
        told = [
            (m.name, line[m.place.column - 1 : m.place.end_column - 1], m.message)
            for m in reporter.listed(["x"])
        ]
        return step, told

    return read_line


def test_a_signature_is_what_the_fields_say():
    found = signature(Wave)
    assert [slot.word for slot in found.subjects] == ["kind", "electrodes"]
    assert list(found.clauses) == ["to", "over", "after"]
    assert [found.clauses[word].required for word in found.clauses] == [True, True, False]
    assert (found.clauses["to"].exact, found.clauses["over"].exact) == (False, True)
    assert list(found.words) == ["twice"]
    assert found.subjects[0].choices == ("high", "low")


def test_clauses_stand_in_any_order(bench):
    one = bench.step("rotate bunch on R6 from 1 MHz to 2 MHz at 1 V for 3 s backwards")
    other = bench.step("rotate bunch for 3 s at 1 V to 2 MHz backwards from 1 MHz on R6")
    assert one == other
    assert one.for_ == Fraction(3)


@pytest.mark.parametrize(
    ("line", "told"),
    [
        ("wave high, E1 to 500 V over 1 s", [("voltage-out-of-range", "500 V", "too high a wave")]),
        (
            "wave high, E1 to 500 V over 1 s for 3 s",
            [
                ("voltage-out-of-range", "500 V", "too high a wave"),
                ("syntax", "for", "`wave` does not take `for`; it takes: to, over, after, twice"),
            ],
        ),
        (
            "wave hgh, E1 to 5 s over 1 V with E3",
            [
                ("unknown-name", "hgh", "'hgh' is no quantity that can be named here"),
                ("unit-mismatch", "5 s", "`to` needs a voltage (V), and this is 5 s"),
                ("unit-mismatch", "1 V", "`over` needs a time (s), and this is 1 V"),
                ("unknown-name", "with", "`with` comes later"),
            ],
        ),
        (
            "wave high, E1 to 5 V, 6 V over 1 s twice twice",
            [
                ("syntax", "6 V", "`to` takes one value or name, 2 are given"),
                ("syntax", "twice", "`twice` is said twice"),
            ],
        ),
        (
            "wave",
            [
                ("syntax", "wave", "`wave` needs `over` and a time"),
                ("syntax", "wave", "`wave` needs `to` and a voltage"),
                ("syntax", "wave", "`wave` needs a quantity"),
                ("syntax", "wave", "`wave` needs one or more electrodes"),
            ],
        ),
    ],
)
def test_everything_wrong_in_a_statement_is_told(read, line, told):
    step, found = read(line)
    assert step is None
    assert found == told


def test_a_step_takes_no_equals_sign(read):
    step, told = read("wave high, E1 = 5 V to 5 V over 1 s")
    assert step is None
    assert told == [("syntax", "5 V", "`wave` takes no `=`")]


def test_a_sound_statement_has_no_mistakes(read):
    step, told = read("wave high, E1, E3..E4 to 5 V over 20 ms after knock twice")
    assert told == []
    assert step == Wave(
        kind="high",
        electrodes=("E1", "E3", "E4"),
        to=5.0,
        over=Fraction(1, 50),
        after="knock",
        twice=True,
    )


def test_steps_are_immutable():
    step = Wave(kind="low", electrodes=("E1",), to=1.0, over=Fraction(1))
    with pytest.raises(ValueError, match="frozen"):
        step.to = 2.0


def test_the_folder_knows_its_members_by_their_verbs():
    assert {"ramp", "await", "catch", "set"} <= set(verbs())
    for verb in verbs():
        kind = step_class(verb)
        assert kind is not None
        assert kind.__name__.lower() == verb
        assert signature(kind).verb == verb
    assert step_class("await_") is None
    assert step_class("repeat") is None


def test_every_field_of_every_step_takes_something_known():
    from wellseq.model.operands import _SETTLERS

    for verb in verbs():
        kind = step_class(verb)
        assert kind is not None
        made = signature(kind)
        for slot in (*made.subjects, *made.clauses.values()):
            assert slot.takes.what in _SETTLERS
        for slot in made.words.values():
            assert slot.takes.what == "word"
