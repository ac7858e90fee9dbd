"""`cool`: a hold during which the named clouds must be in the trap."""

from __future__ import annotations

from fractions import Fraction

import pytest

from wellseq.model.effects import Acted


def test_it_holds_and_acts_on_one_cloud_or_two(drawn):
    assert drawn("cool plus for 10 s") == [("hold", Fraction(10)), ("note", Acted("plus"))]
    assert drawn("cool bunch with cool_ones for 60 s") == [
        ("hold", Fraction(60)),
        ("note", Acted("bunch")),
        ("note", Acted("cool_ones")),
    ]


def test_until_is_refused_until_there_is_a_forecast(bench):
    ((name, at, message),) = bench.refused("cool bunch for 60 s until 150 K")
    assert (name, at) == ("unknown-name", "until")
    assert message.startswith("`until` needs the forecast of temperature")
    assert "assume" in message


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        ("cool bunch", ("syntax", "cool", "`cool` needs `for` and a time")),
        (
            "cool bunch with E1 for 1 s",
            ("unknown-name", "E1", "a cloud is needed here, and 'E1' is an electrode of the trap"),
        ),
        ("cool bunch, plus for 1 s", ("syntax", "plus", "`cool` does not take 'plus'")),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]
