"""Definitions become names: lets, clouds, procedures, and values from the command line."""

from __future__ import annotations

from fractions import Fraction

import pytest

NO_FIGURE = "is no figure of this cloud"
PLAIN = """wellseq 1
trap "sandpit.trap.toml"
{}
sequence run {{ hold for span }}
"""


def lets(bench, text: str, **more):
    built = bench.build(PLAIN.format(text), **more)
    return built, [(m.name, m.place.file, m.message) for m in built.mistakes]


def test_a_let_uses_what_stands_above_it(bench):
    built, told = lets(bench, "let one = 1 s; let span = 2 * one")
    assert told == []
    assert built.sequence.items[0].step.for_ == 2


def test_a_let_does_not_use_what_stands_below_it(bench):
    _, told = lets(bench, "let span = 2 * one\nlet one = 1 s")
    message = "'one' has no value yet here; its `let` stands in line 4"
    assert told == [("unknown-name", "run.well", message)]


def test_a_let_is_a_value(bench):
    _, told = lets(bench, "let span = E1")
    message = "a value is needed here, and 'E1' is an electrode of the trap"
    assert told == [("unit-mismatch", "run.well", message)]


@pytest.mark.parametrize(
    ("given", "value"), [("3 s", 3), ("one / 4", Fraction(1, 4)), ("5 ms", Fraction(1, 200))]
)
def test_a_value_from_the_command_line_takes_the_place_of_a_let(bench, given, value):
    built, told = lets(bench, "let one = 1 s; let span = 2 s; let w = one", lets={"span": given})
    assert [t for t in told if t[0] != "name-unused"] == []
    assert built.sequence.items[0].step.for_ == value
    assert built.sequence.lets == {"span": given}


@pytest.mark.parametrize(
    ("name", "given", "told"),
    [
        ("spam", "3 s", ("unknown-name", "run.well")),
        ("E1", "3 s", ("unknown-name", "run.well")),
        ("span", "3 V", ("unit-mismatch", "--let")),
        ("span", "3", ("unit-mismatch", "--let")),
        ("span", "", ("syntax", "--let")),
        ("span", "3 s; hold for 2 s", ("syntax", "--let")),
        ("span", "3 s } {", ("syntax", "--let")),
        ("span", "3 sec", ("unit-mismatch", "--let")),
        ("span", "unheard", ("unknown-name", "--let")),
    ],
)
def test_a_wrong_value_from_the_command_line_is_told(bench, name, given, told):
    _, found = lets(bench, "let span = 2 s", lets={name: given})
    assert told in [(name, file) for name, file, _ in found]


def cloud(bench, text: str):
    """The declared cloud of a text and everything wrong with it."""
    built = bench.build(
        f'wellseq 1\ntrap "sandpit.trap.toml"\n{text}\nsequence run {{ load it at E1 for 1 s }}\n'
    )
    told = [(m.name, m.message) for m in built.mistakes]
    return built.sequence.clouds.get("it"), told


def test_a_cloud_has_figures_with_their_spread(bench):
    declared, told = cloud(
        bench, "cloud it is antiproton { number 8e4 ± 30 %; energy 5 keV ± 2 keV }"
    )
    assert told == []
    assert declared.species.name == "antiproton"
    assert (declared.number.value, declared.number.half_width) == (80_000, 24_000)
    assert (declared.energy.value, declared.energy.half_width) == (5000, 2000)
    assert declared.temperature is None


def test_a_cloud_may_say_nothing_of_itself(bench):
    declared, told = cloud(bench, "cloud it is positron")
    assert told == []
    assert declared.number is None


def test_an_ion_has_a_mass_and_a_charge(bench):
    declared, told = cloud(bench, "cloud it is ion { mass 9.01 u; charge -1 e; radius 1 mm }")
    assert told == []
    assert declared.species.charge_sign == -1
    assert declared.species.mass_u == 9.01


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("cloud it is muon", ("unknown-name", "'muon' is no species")),
        ("cloud it is 5 V", ("unknown-name", "this is no species")),
        ("cloud it of positron", ("syntax", "after a cloud's name stands `is` and its species")),
        (
            "cloud it is positron { nmber 5 }",
            ("unknown-name", "'nmber' is no figure of this cloud"),
        ),
        (
            "cloud it is positron { mass 5 u }",
            ("unknown-name", "'mass' is no figure of this cloud"),
        ),
        (
            "cloud it is positron { number 5; number 6 }",
            ("name-reused", "'number' is given twice"),
        ),
        (
            "cloud it is positron { number 5 K }",
            ("unit-mismatch", "`number` needs a plain number, and this is 5 K"),
        ),
        (
            "cloud it is positron { radius 1 mm ± 2 mm }",
            ("unit-mismatch", "`radius` cannot be below zero, and this is 0.001 ± 0.002 m"),
        ),
        (
            "cloud it is positron { energy 300 K }",
            ("unit-mismatch", "`energy` needs an energy (eV), and this is 300 K"),
        ),
        ("cloud it is positron { number }", ("syntax", "`number` is followed by one value")),
        (
            'cloud it is positron { number 5 because "x" }',
            ("syntax", "`number` is followed by one value"),
        ),
        (
            "cloud it is positron { E1 = 5 V }",
            ("syntax", "here stand figures of a cloud: number 6e7 ± 10 %"),
        ),
        ("cloud it is ion { mass 9 u }", ("syntax", "an ion needs `charge`")),
        (
            "cloud it is ion { mass 9 u; charge 1.5 e }",
            ("unit-mismatch", "mass and whole charge of an ion stand without ±"),
        ),
        (
            "cloud it is ion { mass 9 u; charge 0 e }",
            ("unit-mismatch", "an ion's charge is whole, not 0 e, at most 200 e"),
        ),
    ],
)
def test_what_is_wrong_with_a_cloud(bench, text, told):
    assert cloud(bench, text)[1] == [told]


@pytest.mark.parametrize(
    ("line", "told"),
    [
        ("procedure go(5 V) { hold for 1 s }", "an argument of a procedure is declared by a name"),
        (
            "procedure go(a, a) { hold for 1 s }",
            "'a' is already a name around here and cannot name an argument",
        ),
        (
            "procedure go(wall) { hold for 1 s }",
            "'wall' is already a let (line 3) and cannot name an argument",
        ),
        ("let E1 = 4 V", "'E1' is already an electrode of the trap and cannot name a let"),
        ("let run = 4 V", "'run' is already a let (line 8) and cannot name the sequence"),
    ],
)
def test_names_that_cannot_be_given(bench, line, told):
    built = bench.build(bench.whole("hold for 1 s", line))
    assert told in [m.message for m in built.mistakes]
