"""Operands to exact values: arithmetic, kinds, spreads, and what is reported of them."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.base.place import Place
from wellseq.base.quantity import PLAIN, Quantity, Spread, kind_of
from wellseq.model.values import UNKNOWN, Share, Unknown, evaluate, needs, sample, spoken
from wellseq.text.parse import parse
from wellseq.text.tree import Binary, Name, Number, Operand, Statement, String

HERE = Place("x")


class Told:
    """Names with given values; mistakes are kept as name, line text and message."""

    def __init__(self, **values: object) -> None:
        self.values = values
        self.found: list[tuple[str, Place, str]] = []

    def value_of(self, name: Name):
        return self.values.get(name.text, UNKNOWN)

    def report(self, name: str, place: Place, message: str, hint: str = "") -> Unknown:
        self.found.append((name, place, message))
        return UNKNOWN


def operand(text: str) -> Operand:
    """The value of `let x = …`."""
    tree = parse(f"let x = {text}", "x")
    assert tree.mistakes == ()
    (statement,) = tree.statements
    assert isinstance(statement, Statement)
    assert statement.value is not None
    return statement.value


def value(text: str, **values: object):
    """The value of an expression in which nothing is wrong."""
    names = Told(**values)
    found = evaluate(operand(text), names)
    assert names.found == []
    return found


def wrong(text: str, **values: object) -> list[tuple[str, str]]:
    """Name of every mistake and the words it points at."""
    names = Told(**values)
    assert evaluate(operand(text), names) is UNKNOWN
    line = f"let x = {text}"
    return [(name, line[at.column - 1 : at.end_column - 1]) for name, at, _ in names.found]


@pytest.mark.parametrize(
    ("text", "exact", "unit"),
    [
        ("20 us", Fraction(1, 50_000), "s"),
        ("0.1 V + 0.2 V", Fraction(3, 10), "V"),
        ("1 / 2 s", Fraction(1, 2), "Hz"),
        ("12 V/us * 3 us", Fraction(36), "V"),
        ("2 * (3 V - 1 V) / 4", Fraction(1), "V"),
        ("-(2 V)", Fraction(-2), "V"),
        ("2e4", Fraction(20_000), ""),
        ("10 V - 2 V - 3 V", Fraction(5), "V"),
        ("8 V / 2 / 2", Fraction(2), "V"),
        ("1 min", Fraction(60), "s"),
        ("5 keV", Fraction(5000), "eV"),
        ("1e8 /cm3", Fraction(10) ** 14, "/m3"),
    ],
)
def test_values_are_exact_and_keep_their_kind(text, exact, unit):
    found = value(text)
    assert (found.value, found.kind) == (exact, kind_of(unit))


def test_a_tenth_and_two_tenths_would_not_be_three_tenths_in_floats():
    assert 0.1 + 0.2 != 0.3
    assert float(value("0.1 V + 0.2 V")) == 0.3


@pytest.mark.parametrize(
    ("text", "name", "at"),
    [
        ("3 V + 2 s", "unit-mismatch", "2 s"),
        ("1 eV - 1 V", "unit-mismatch", "1 V"),
        ("1 K + 1 eV", "unit-mismatch", "1 eV"),
        ("1 V + 2 V + 3 s", "unit-mismatch", "3 s"),
        ("1 V / 0", "unit-mismatch", "0"),
        ("1 V / (2 V - 2 V)", "unit-mismatch", "(2 V - 2 V)"),
        ("3 V ± 1 s", "unit-mismatch", "1 s"),
        ("3 V ± (-1 V)", "unit-mismatch", "(-1 V)"),
        ("1e40 * 1e40", "too-large", "1e40 * 1e40"),
        ("1 / 1e40 / 1e40", "too-large", "1 / 1e40 / 1e40"),
    ],
)
def test_a_mistake_points_at_the_operand_that_makes_it(text, name, at):
    assert wrong(text) == [(name, at)]


def test_a_value_with_a_spread_cannot_be_calculated_with():
    spread = Spread(Fraction(3), Fraction(1), kind_of("V"))
    assert wrong("a + 1 V", a=spread) == [("unit-mismatch", "a")]
    assert wrong("2 V * a ± 1 V", a=spread) == [("unit-mismatch", "a")]


def test_a_text_is_no_value():
    names = Told()
    assert evaluate(String("words", HERE), names) is UNKNOWN
    assert names.found == [("unit-mismatch", HERE, "a value with its unit is needed here")]


def test_everything_wrong_in_an_expression_is_reported():
    assert wrong("(1 V + 1 s) * (2 V + 2 s)") == [
        ("unit-mismatch", "1 s"),
        ("unit-mismatch", "2 s"),
    ]


def test_what_was_reported_before_is_not_reported_again():
    assert wrong("unheard + 1 V") == []


@pytest.mark.parametrize(
    ("text", "half"),
    [
        ("200 K ± 10 %", 20),
        ("200 K ± 10 K", 10),
        ("200 K +- 5 K", 5),
        ("-200 K ± 10 %", 20),
        ("200 ± 10 %", 20),
        ("200 ± 10", 10),
        ("200 ± 2 * 10 %", 40),
        ("200 ± (5 % + 5 %)", 20),
        ("200 ± 20 % / 2", 20),
        ("200 ± share", 20),
        ("-(200) ± 1", 1),
    ],
)
def test_a_spread_in_per_cent_is_a_share_of_its_value(text, half):
    found = value(text, share=value("10 %"))
    assert isinstance(found, Spread)
    assert found.half_width == half


def test_minus_turns_the_value_and_keeps_the_spread():
    spread = value("3 V ± 1 V")
    assert value("-a", a=spread) == Spread(Fraction(-3), Fraction(1), kind_of("V"))


def chain(operator: str, number: Fraction, count: int) -> Operand:
    """The tree of `n op n op n …`, which grows to the left."""
    node: Operand = Number(number, "", HERE)
    for _ in range(count - 1):
        node = Binary(operator, node, Number(number, "", HERE), HERE)
    return node


def test_a_chain_of_ten_thousand_terms_is_added_without_deep_recursion():
    assert evaluate(chain("+", Fraction(1, 1000), 10_000), Told()) == Quantity(Fraction(10))


def test_a_runaway_product_is_stopped_early():
    names = Told()
    assert evaluate(chain("*", 1 + Fraction(1, 10**9), 500), names) is UNKNOWN
    assert {found[0] for found in names.found} == {"too-large"}


@given(st.lists(st.sampled_from("+-*"), max_size=8), st.data())
def test_chains_equal_exact_arithmetic_from_left_to_right(operators, data):
    numbers = data.draw(
        st.lists(
            st.fractions(min_value=-50, max_value=50, max_denominator=64),
            min_size=len(operators) + 1,
            max_size=len(operators) + 1,
        )
    )
    node: Operand = Number(numbers[0], "", HERE)
    expected = numbers[0]
    for operator, number in zip(operators, numbers[1:], strict=True):
        node = Binary(operator, node, Number(number, "", HERE), HERE)
        step = {"+": expected + number, "-": expected - number, "*": expected * number}
        expected = step[operator]
    assert evaluate(node, Told()) == Quantity(expected)


@given(st.integers(-(10**9), 10**9), st.sampled_from(["V", "mV", "uV", "kV"]))
def test_a_unit_is_a_factor_and_nothing_else(count, unit):
    one = evaluate(Number(Fraction(1), unit, HERE), Told())
    many = evaluate(Number(Fraction(count), unit, HERE), Told())
    assert isinstance(one, Quantity)
    assert isinstance(many, Quantity)
    assert many.value == count * one.value


def test_an_unknown_unit_of_a_hand_made_tree_is_reported():
    names = Told()
    assert evaluate(Number(Fraction(1), "furlong", HERE), names) is UNKNOWN
    assert names.found[0][:2] == ("unit-mismatch", HERE)


@pytest.mark.parametrize(
    ("given_", "unit", "sign", "fine"),
    [
        (Quantity(Fraction(3), kind_of("V")), "V", "any", True),
        (Quantity(Fraction(3), kind_of("s")), "V", "any", False),
        (Quantity(Fraction(0), kind_of("s")), "s", "not negative", True),
        (Quantity(Fraction(0), kind_of("s")), "s", "positive", False),
        (Quantity(Fraction(-1), kind_of("s")), "s", "not negative", False),
        (Spread(Fraction(1), Fraction(1), kind_of("K")), "K", "positive", True),
        (Spread(Fraction(1), Fraction(2), kind_of("K")), "K", "positive", False),
        (Quantity(Fraction(0)), "V", "any", False),
    ],
)
def test_kind_and_sign_are_judged(given_, unit, sign, fine):
    names = Told()
    assert needs(given_, kind_of(unit), sign, HERE, "`over`", names) is fine
    assert len(names.found) == (not fine)


def test_zero_without_a_unit_is_not_zero_volts():
    names = Told()
    assert not needs(Quantity(Fraction(0)), kind_of("V"), "any", HERE, "`to`", names)
    assert names.found[0][2] == "`to` needs a voltage (V), and this is 0"


def test_values_are_spoken_in_base_units():
    assert spoken(Quantity(Fraction(-4500), kind_of("V"))) == "-4500 V"
    assert spoken(Spread(Fraction(8), Fraction(2), PLAIN)) == "8 ± 2"
    assert spoken(Share(Fraction(1, 10))) == "0.1"
    assert sample(kind_of("K")) == "'12 K'"
    assert sample(kind_of("s")) == "'20 ms'"
