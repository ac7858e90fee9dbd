"""`rotate`: a drive on a sectored ring, in the sense of the cloud's own rotation."""

from __future__ import annotations

from fractions import Fraction

import pytest

from wellseq.model.effects import Acted

LINE = "rotate bunch on R6 from 0.2 MHz to 1.6 MHz at 0.5 V for 20 s"


def drive(order: int, sense: int, ring: str = "R6"):
    more = {"order": order, "sense": sense}
    return ("drive", ring, 200_000.0, 1_600_000.0, 0.5, Fraction(20), more)


@pytest.mark.parametrize("sense", [1, -1])
def test_it_turns_with_the_cloud_and_backwards_against_it(drawn, pen, sense):
    pen.senses = {"bunch": sense}
    assert drawn(LINE) == [drive(1, sense), ("note", Acted("bunch"))]
    assert drawn(f"{LINE} backwards")[0] == drive(1, -sense)


def test_a_quadrupole_is_of_order_two(drawn):
    assert drawn(f"{LINE} quadrupole backwards")[0] == drive(2, -1)


def test_four_sectors_turn_a_dipole_but_no_quadrupole(bench, drawn):
    assert drawn(LINE.replace("R6", "R4"))[0] == drive(1, 1, "R4")
    refused = bench.refused(f"{LINE.replace('R6', 'R4')} quadrupole")
    assert refused == [
        (
            "unknown-name",
            "quadrupole",
            "a quadrupole drive on the 4 sectors of 'R4' does not rotate",
        )
    ]


def test_a_wave_sampled_at_n_angles_turns_one_way_only_for_n_above_twice_its_order():
    # Phases of order m at n angles are those of order m - n: the two waves are told apart by their
    # order alone, and at n = 2 m both are equally large, which is a standing wave.
    turns_one_way = {(m, n): abs(m) < abs(m - n) for m in (1, 2) for n in (4, 6, 8)}
    assert [pair for pair, fine in turns_one_way.items() if not fine] == [(2, 4)]


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        (
            LINE.replace("R6", "E1"),
            ("unknown-name", "E1", "'E1' has no sectors, and a drive needs a sectored ring"),
        ),
        (
            LINE.replace("0.2 MHz", "3 us"),
            ("unit-mismatch", "3 us", "`from` needs a frequency (Hz), and this is 3e-06 s"),
        ),
        (
            LINE.replace("at 0.5 V", "at 0 V"),
            ("unit-mismatch", "0 V", "`at` needs a value above zero, and this is 0 V"),
        ),
        (LINE.replace("at 0.5 V ", ""), ("syntax", "rotate", "`rotate` needs `at` and a voltage")),
        (f"{LINE} sideways", ("syntax", "sideways", "`rotate` does not take 'sideways'")),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]
