"""Asked, emitted, error: every edge and every level of a sequence, the largest error first."""

from __future__ import annotations

import csv
import io
from fractions import Fraction

import made_case
import pytest

from wellseq.emit.columns import scale_of
from wellseq.emit.files.roundings_csv import HEADS, LEVELS, TIMES, write
from wellseq.model.trap import Converter

Row = dict[str, str]


def reports() -> dict[str, list[Row]]:
    found = {}
    for name, pieces in write(made_case.cleared()):
        reader = csv.DictReader(io.StringIO(b"".join(pieces).decode(), newline=""))
        found[name] = list(reader)
        assert tuple(reader.fieldnames or ()) == HEADS[name]
    return found


def test_every_edge_is_there_with_what_its_clock_made_of_it() -> None:
    times = reports()[TIMES]
    shutter = next(row for row in times if row["output"] == "shutter")
    # A third of a millisecond on a clock of 1 us.
    assert shutter["asked_s"] == "0.000333333333333333"
    assert shutter["emitted_s"] == "0.000333"
    assert shutter["error_s"] == "-0.000000333333333333"
    assert times[0] is shutter
    where = {(row["block"], row["output"], row["asked_s"]) for row in times}
    assert {("1", "lv1", "0.001"), ("1", "lv1", "0.011"), ("2", "hv", "0.000001")} <= where
    assert len(where) == len(times)
    assert {row["file"] for row in times} == {"night.well"}
    assert {row["line"] for row in times} == {"4", "5"}


def test_every_level_is_there_with_what_its_codes_made_of_it() -> None:
    trap = made_case.trap()
    levels = reports()[LEVELS]
    asked = {(row["output"], row["at_s"], float(row["asked_V"])) for row in levels}
    assert ("lv1", "0", 0.0) in asked
    assert ("lv1", "0.011", 100.0) in asked
    assert ("lv3", "0.004", 0.0) in asked
    for row in levels:
        converter = trap.output(row["output"])
        assert isinstance(converter, Converter)
        start, slope, bottom = scale_of(converter)
        exact = Fraction(start + slope * int(row["code"]), bottom)
        assert float(row["emitted_V"]) == float(exact)
        assert abs(exact - Fraction(float(row["asked_V"]))) <= Fraction(slope, bottom) / 2


@pytest.mark.parametrize(("report", "unit"), [(TIMES, "s"), (LEVELS, "V")])
def test_the_largest_comes_first_and_errors_are_differences(report: str, unit: str) -> None:
    rows = reports()[report]
    errors = [abs(float(row[f"error_{unit}"])) for row in rows]
    assert errors == sorted(errors, reverse=True)
    assert errors[0] > 0
    for row in rows:
        difference = float(row[f"emitted_{unit}"]) - float(row[f"asked_{unit}"])
        assert abs(difference - float(row[f"error_{unit}"])) < 1e-15
