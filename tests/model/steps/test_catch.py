"""`catch`: wait for a bunch, close the gate behind it."""

from __future__ import annotations

from fractions import Fraction

import pytest

from wellseq.model.effects import Caught

BLOCK = "between G1 and G2; at -4.5 kV; closing 620 ns after arrival"


def test_a_new_block_then_the_gate_then_the_cloud(drawn):
    assert drawn(f"catch bunch {{ {BLOCK} }}") == [
        ("await_trigger", "arrival", None),
        ("close_gate", "G1", "G2", -4500.0, Fraction(62, 10**8)),
        ("note", Caught("bunch", "G1", "G2")),
    ]


def test_the_wait_may_be_given_here(drawn):
    assert drawn(f"catch bunch {{ {BLOCK}; within 3 s }}")[0][-1] == 3


def test_clauses_stand_in_the_block_on_one_line_on_several_or_without_it(bench):
    in_lines = "catch bunch {\n" + BLOCK.replace("; ", "\n") + "\n}"
    bare = f"catch bunch {BLOCK.replace(';', '')}"
    steps = [bench.step(line) for line in (f"catch bunch {{ {BLOCK} }}", in_lines, bare)]
    assert steps[0] == steps[1] == steps[2]


@pytest.mark.parametrize(
    ("clauses", "expected"),
    [
        (
            BLOCK.replace("-4.5 kV", "-4.4 kV"),
            ("voltage-out-of-range", "-4.4 kV", "the switch of 'G1' has no level -4400 V"),
        ),
        (
            BLOCK.replace("G1", "E1"),
            (
                "voltage-out-of-range",
                "E1",
                "the near gate 'E1' hangs on the converter 'out_E1', and only a switch closes fast "
                "enough",
            ),
        ),
        (
            BLOCK.replace("arrival", "knock"),
            (
                "syntax",
                "knock",
                "`catch` needs `within` and a time: the trap file gives no longest wait "
                "for 'knock'",
            ),
        ),
        (
            BLOCK.replace("G2", "G1"),
            ("syntax", "catch", "a catch needs two gates, and 'G1' is the near one already"),
        ),
        (
            BLOCK.replace("; at -4.5 kV", ""),
            ("syntax", "catch", "`catch` needs `at` and a voltage"),
        ),
        (
            f"{BLOCK}; hold for 1 s",
            (
                "syntax",
                "hold for 1 s",
                "between these braces `catch` takes: between, and, at, closing, after, within",
            ),
        ),
    ],
)
def test_what_it_refuses(bench, clauses, expected):
    assert bench.refused(f"catch bunch {{ {clauses} }}") == [expected]


def test_it_cannot_stand_in_a_lane(bench):
    refused = bench.refused(f"alongside {{ lane {{ catch bunch {{ {BLOCK} }} }} }}")
    assert refused == [("syntax", "catch", "`catch` cannot stand in a lane")]


def test_another_step_has_no_braces_for_its_clauses(bench):
    assert [name for name, _, _ in bench.refused("hold { for 1 s }")] == ["syntax", "syntax"]
