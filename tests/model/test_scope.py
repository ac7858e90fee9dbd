"""One namespace a file: what names may be, and what they mean where."""

from __future__ import annotations

import pytest

from wellseq.base.place import Place
from wellseq.base.quantity import Quantity
from wellseq.model.reporter import Reporter
from wellseq.model.scope import Defined, FileScope, Names
from wellseq.model.values import UNKNOWN
from wellseq.text.tree import Name, Number

HERE = Place("run.well", 4, 5, 4, 9)


@pytest.fixture
def scope(sandpit):
    return FileScope("run.well", sandpit, Reporter())


def told(scope: FileScope) -> list[tuple[str, str]]:
    return [(m.name, m.message) for m in scope.reporter.listed(["run.well"])]


def test_a_new_name_is_entered_once(scope):
    first = scope.define(Name("wall", HERE), "let")
    assert first is not None
    assert scope.define(Name("wall", HERE), "cloud") is None
    assert told(scope) == [
        ("name-reused", "'wall' is already a let (line 4) and cannot name a cloud")
    ]
    assert list(scope.own("let", "cloud")) == [first]


@pytest.mark.parametrize(
    ("name", "why"),
    [
        ("E1", "is already an electrode of the trap"),
        ("behind", "is already an output of the trap"),
        ("valve", "is already a digital line of the trap"),
        ("arrival", "is already a trigger of the trap"),
        ("with", "is a word of the language"),
        ("others", "is a word of the language"),
        ("ms", "is a unit"),
        ("V", "is a unit"),
        ("µs", "is a unit"),
    ],
)
def test_names_of_the_trap_words_and_units_are_taken(scope, name, why):
    assert scope.define(Name(name, HERE), "let") is None
    assert told(scope) == [("name-reused", f"'{name}' {why} and cannot name a let")]


@pytest.mark.parametrize("name", ["Wall", "µ_wall", "milli", "höhe", "hold"])
def test_other_names_are_free(scope, name):
    assert scope.define(Name(name, HERE), "let") is not None
    assert told(scope) == []


def test_a_local_name_hides_nothing(scope):
    scope.define(Name("wall", HERE), "let")
    assert not scope.free(Name("wall", HERE), "an argument")
    assert not scope.free(Name("height", HERE), "an argument", ["height"])
    assert scope.free(Name("depth", HERE), "an argument", ["height"])


def test_a_thing_is_found_through_the_name_that_stands_for_it(scope):
    names = Names(scope).inside({"gate": scope.known["G1"]})
    found = names.thing(Name("gate", HERE), "electrode")
    assert isinstance(found, Defined)
    assert found.name == "G1"


def test_a_thing_of_another_sort_is_named_for_what_it_is(scope):
    names = Names(scope).inside({"height": Quantity(3)})
    assert names.thing(Name("valve", HERE), "electrode") is UNKNOWN
    assert names.thing(Name("height", HERE), "cloud") is UNKNOWN
    assert names.thing(Number(3, "", HERE), "cloud") is UNKNOWN
    assert [message for _, message in told(scope)] == [
        "a cloud is needed here, and 'height' is a value",
        "an electrode is needed here, and 'valve' is a digital line of the trap",
        "the name of a cloud is needed here",
    ]


def test_an_unknown_name_comes_with_the_nearest_of_its_sort(scope):
    Names(scope).thing(Name("arival", HERE), "trigger")
    (mistake,) = scope.reporter.listed(["run.well"])
    assert (mistake.name, mistake.hint) == ("unknown-name", "did you mean 'arrival'?")


def test_without_a_trap_its_names_are_nobodys_mistake():
    scope = FileScope("run.well", None, Reporter())
    assert Names(scope).thing(Name("E1", HERE), "electrode") is UNKNOWN
    assert told(scope) == []
    assert Names(scope).thing(Name("bunch", HERE), "cloud") is UNKNOWN
    assert len(told(scope)) == 1


def test_mistakes_carry_the_calls_that_led_to_them(scope):
    call = Place("run.well", 9)
    Names(scope, chain=(call,)).report("syntax", HERE, "wrong")
    Names(scope).report("syntax", call, "wrong")
    listed = scope.reporter.listed(["run.well"])
    assert [m.origin and m.origin.chain for m in listed] == [(call,), None]
