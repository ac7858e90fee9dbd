"""Numbers as people write them."""

import math

import pytest

from wellseq.checks.numbers import amount, stretch


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (0.0, "V", "0 V"),
        (-4500.0, "V", "-4.5 kV"),
        (0.0199, "V", "19.9 mV"),
        (999.96, "V", "1 kV"),
        (2e-8, "s", "20 ns"),
        (3e-12, "s", "0.003 ns"),
        (1e-6, "V/V", "1 uV/V"),
        (65536.0, "rows", "65536 rows"),
        (1234567.0, "", "1234567"),
        (2.5e-7, "", "2.5e-07"),
        (math.nan, "V", "not known"),
        (math.inf, "V", "without bound"),
    ],
)
def test_four_figures_and_a_prefix(value, unit, text):
    assert amount(value, unit) == text


def test_a_stretch_of_time_says_when_and_how_long():
    assert stretch(2.0335, 2.03351) == "2.0335 s, for 10 us"
    assert stretch(2.03351, 2.0335) == "2.0335 s, for 10 us"
    assert stretch(0.0, 0.0) == "0 s"
    assert stretch(12.25, 12.25) == "12.25 s"
    assert stretch(1e-6, 1e-6) == "0.000001 s"
