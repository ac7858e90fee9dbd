"""Descriptions and reports of rounding under the second reader: every word is worked out again."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from resealing import canonical, reseal

from wellseq.reread.folder import verify

TABLE = "block-1-run.csv-metadata.json"
TIMES, LEVELS = "rounded-times.csv", "rounded-levels.csv"


def names(folder: Path) -> set[str]:
    return {finding.name for finding in verify(folder)}


def _places(value: object, path: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
    if isinstance(value, dict):
        return [place for key, inner in value.items() for place in _places(inner, (*path, key))]
    if isinstance(value, list):
        return [place for at, inner in enumerate(value) for place in _places(inner, (*path, at))]
    return [path]


def test_every_single_value_of_a_description_counts(folder: Path) -> None:
    path = folder / TABLE
    before = path.read_bytes()
    places = _places(json.loads(before))
    assert len(places) > 80
    for place in places[::7]:
        document = json.loads(before)
        inner = document
        for key in place[:-1]:
            inner = inner[key]
        value = inner[place[-1]]
        inner[place[-1]] = value + 1 if isinstance(value, int | float) else f"{value}x"
        path.write_bytes(canonical(document))
        reseal(folder)
        found = names(folder)
        assert found == {"description-unsound"}, place


def test_a_description_of_another_table_is_found(folder: Path) -> None:
    (folder / TABLE).write_bytes((folder / f"{TIMES}-metadata.json").read_bytes())
    reseal(folder)
    assert names(folder) == {"description-unsound"}


@pytest.mark.parametrize(
    ("report", "old", "new"),
    [
        (TIMES, "0.000333,", "0.000334,"),
        (TIMES, "-0.000000333333333333", "0.000000333333333333"),
        (TIMES, ",shutter,", ",shuttle,"),
        (TIMES, "0.000333333333333333,0.000333,-0.00000033", "0.0003335,0.000333,-0.00000050"),
        (TIMES, "1,shutter,", "3,shutter,"),
        (TIMES, "night.well,4,", "other.well,4,"),
        (TIMES, "night.well,4,", "night.well,four,"),
        (TIMES, "asked_s", "wanted_s"),
        (TIMES, "\r\n", "\n"),
        (TIMES, "0.000333333333333333", "nan"),
        (LEVELS, "lv3,", "hv,"),
        (LEVELS, ",100.0,", ",100.01,"),
        (LEVELS, ",100.0,", ",inf,"),
        (LEVELS, ",100.0,", ",1e2,"),
        (LEVELS, "emitted_V", "given_V"),
    ],
)
def test_a_report_that_contradicts_itself_is_found(
    folder: Path, report: str, old: str, new: str
) -> None:
    path = folder / report
    content = path.read_bytes().decode()
    assert old in content
    path.write_bytes(content.replace(old, new, 1 if old != "\r\n" else -1).encode())
    reseal(folder)
    assert names(folder) == {"roundings-unsound"}


@pytest.mark.parametrize("report", [TIMES, LEVELS])
def test_the_largest_error_comes_first(folder: Path, report: str) -> None:
    path = folder / report
    head, *rows = path.read_bytes().decode().split("\r\n")
    path.write_bytes("\r\n".join([head, *rows[-2::-1], ""]).encode())
    reseal(folder)
    (finding,) = verify(folder)
    assert "from the largest to the least" in finding.message


def test_half_a_clock_may_be_used_up_and_no_more(folder: Path) -> None:
    """A line for lv3, clock 2 us: an error of 1 us stands, three more attoseconds do not."""
    path = folder / TIMES
    head, *rows = path.read_bytes().decode().split("\r\n")
    fair = "2,lv3,night.well,5,0.000001,0.000002,0.000001"
    unfair = "2,lv3,night.well,5,0.000000999999999997,0.000002,0.000001000000000003"
    for line, wanted in ((fair, set()), (unfair, {"roundings-unsound"})):
        path.write_bytes("\r\n".join([head, line, *rows]).encode())
        reseal(folder)
        assert names(folder) == wanted


def test_a_code_that_is_not_that_of_its_volts_is_found(folder: Path) -> None:
    path = folder / LEVELS
    head, *rows = path.read_bytes().decode().split("\r\n")
    cells = rows[0].split(",")
    cells[head.split(",").index("code")] = str(int(cells[head.split(",").index("code")]) + 1)
    path.write_bytes("\r\n".join([head, ",".join(cells), *rows[1:]]).encode())
    reseal(folder)
    assert names(folder) == {"roundings-unsound"}
