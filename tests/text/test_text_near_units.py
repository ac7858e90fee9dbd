"""Words that were meant as units, and words that were not."""

from __future__ import annotations

import re

import pytest

from wellseq.base.names import RESERVED
from wellseq.base.quantity import UNITS
from wellseq.text.near_units import near_unit

STATEMENT_WORDS = re.findall(
    r"\S+",
    "smoothly throughout exponentially quadrupole backwards off open closed keep steps times lane "
    "hold ramp x C4 height wall V/x x/s gain/wall evening_mixing",
)


@pytest.mark.parametrize(
    ("word", "unit"),
    [
        ("sec", "s"),
        ("secs", "s"),
        ("Seconds", "s"),
        ("secnds", "s"),
        ("msec", "ms"),
        ("usec", "us"),
        ("µsec", "us"),
        ("μsec", "us"),
        ("minutes", "min"),
        ("Volt", "V"),
        ("volts", "V"),
        ("kilovolts", "kV"),
        ("kv", "kV"),
        ("KV", "kV"),
        ("v", "V"),
        ("hz", "Hz"),
        ("khz", "kHz"),
        ("KHz", "kHz"),
        ("kelvin", "K"),
        ("k", "K"),
        ("ev", "eV"),
        ("Tesla", "T"),
        ("percent", "%"),
        ("V/usec", "V/us"),
        ("volts/sec", "V/s"),
        ("khz/s", "kHz/s"),
    ],
)
def test_a_unit_that_was_meant(word, unit):
    assert near_unit(word) == unit


@pytest.mark.parametrize(
    "word",
    [
        STATEMENT_WORDS,
        sorted(RESERVED),
        ["volt" * 100, "s" * 1000],
    ],
    ids=["words", "reserved", "long"],
)
def test_a_word_that_is_none(word):
    assert [near_unit(each) for each in word] == [None] * len(word)


def test_what_is_offered_is_a_unit():
    from wellseq.text import near_units

    assert set(near_units._SPELLED_OUT) <= set(UNITS)
