"""`assume`: a measured value with its reason."""

from __future__ import annotations

import pytest

from wellseq.model.effects import Assumed


@pytest.mark.parametrize(
    ("written", "effect"),
    [
        ("temperature of bunch 140 K ± 40 K", ("temperature", "bunch", 140.0, 40.0, "K")),
        ("number of plus 2e6 ± 10 %", ("number", "plus", 2e6, 2e5, "")),
        ("radius of plus 0.7 mm", ("radius", "plus", 0.0007, 0.0, "m")),
        ("density of plus 1e8 /cm3 ± 20 %", ("density", "plus", 1e14, 2e13, "/m3")),
    ],
)
def test_the_value_is_noted_in_base_units(drawn, written, effect):
    assert drawn(f'assume {written} because "log 311"') == [("note", Assumed(*effect, "log 311"))]


def test_the_value_may_be_a_let(bench):
    (item,) = bench.items('assume number of plus many because "log"', "let many = 2e6 ± 5 %")
    assert float(item.step.value.half_width) == 1e5


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        (
            'assume temperature of bunch 5 eV because "log"',
            ("unit-mismatch", "5 eV", "the value needs a temperature (K), and this is 5 eV"),
        ),
        (
            'assume temperature of bunch 5 K ± 6 K because "log"',
            ("unit-mismatch", "5 K ± 6 K", "the value cannot be below zero, and this is 5 ± 6 K"),
        ),
        (
            "assume temperature of bunch 5 K",
            ("syntax", "assume", "`assume` needs `because` and a text in quotes"),
        ),
        (
            'assume temperature of bunch because "log"',
            ("syntax", "assume", "`assume` needs a value"),
        ),
        (
            'assume temperature of bunch 5 K because " "',
            ("syntax", '" "', "`because` says nothing"),
        ),
        (
            'assume depth of bunch 5 V because "log"',
            ("unknown-name", "depth", "'depth' is no quantity that can be named here"),
        ),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]
