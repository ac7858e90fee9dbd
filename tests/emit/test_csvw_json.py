"""What stands beside every CSV for readers of CSV on the Web: types, ranges, units, scale."""

from __future__ import annotations

import csv
import io
import json
import re
from typing import Any

import made_case
import pytest

from wellseq.emit.contents import contents

Document = dict[str, Any]
VARIABLE = re.compile(r"(?:[A-Za-z0-9_]|%[0-9A-F]{2})+(?:\.(?:[A-Za-z0-9_]|%[0-9A-F]{2})+)*")
"""A variable of a URI template, RFC 6570 sec. 2.3; W3C asks it of a column's name."""


@pytest.fixture(scope="module")
def folder() -> dict[str, bytes]:
    made = contents(made_case.cleared())
    return {path: b"".join(pieces) for path, pieces in made if ".csv" in path}


def described(folder: dict[str, bytes]) -> dict[str, Document]:
    return {
        path.removesuffix("-metadata.json"): json.loads(content)
        for path, content in folder.items()
        if path.endswith("-metadata.json")
    }


def test_every_table_is_described_and_nothing_else(folder: dict[str, bytes]) -> None:
    tables = {path for path in folder if path.endswith(".csv")}
    assert set(described(folder)) == tables
    assert len(tables) == 5
    for table, document in described(folder).items():
        assert document["url"] == table
        assert document["@context"][0] == "http://www.w3.org/ns/csvw"


def test_columns_are_those_of_the_table_in_order(folder: dict[str, bytes]) -> None:
    for table, document in described(folder).items():
        head = next(csv.reader(io.StringIO(folder[table].decode(), newline="")))
        columns = document["tableSchema"]["columns"]
        assert [column["titles"] for column in columns] == head
        names = [column["name"] for column in columns]
        assert len(set(names)) == len(names)
        assert all(VARIABLE.fullmatch(name) for name in names)


def fits(cell: str, datatype: str | Document) -> bool:
    """Whether a cell is of a datatype, by the rules of W3C sec. 6.4 as far as they are used."""
    kind = {"base": datatype} if isinstance(datatype, str) else datatype
    if kind["base"] == "string":
        return re.fullmatch(kind.get("format", ".*"), cell) is not None
    forms = {"integer": r"-?\d+", "decimal": r"-?\d+(\.\d+)?", "double": r"-?\d+(\.\d+)?(e-?\d+)?"}
    number = re.fullmatch(forms[kind["base"]], cell)
    low, high = kind.get("minimum", float("-inf")), kind.get("maximum", float("inf"))
    return number is not None and low <= float(cell) <= high


def test_every_cell_is_of_its_type_and_in_its_range(folder: dict[str, bytes]) -> None:
    for table, document in described(folder).items():
        _, *rows = csv.reader(io.StringIO(folder[table].decode(), newline=""))
        columns = document["tableSchema"]["columns"]
        for row in rows:
            for column, cell in zip(columns, row, strict=True):
                fine = fits(cell, column["datatype"]) or (not cell and not column["required"])
                assert fine, (table, column["titles"], cell)


@pytest.mark.parametrize(
    ("cell", "datatype"),
    [
        ("65536", {"base": "integer", "minimum": 0, "maximum": 65535}),
        ("1.5", {"base": "integer"}),
        ("ajar", {"base": "string", "format": "closed|open"}),
        ("nan", "double"),
    ],
)
def test_the_yardstick_can_fail(cell: str, datatype: str | Document) -> None:
    assert not fits(cell, datatype)


def properties(column: Document) -> dict[str, object]:
    return {one["schema:name"]: one["schema:value"] for one in column["schema:additionalProperty"]}


def test_units_and_scale_turn_codes_into_the_volts_beside_them(folder: dict[str, bytes]) -> None:
    columns = described(folder)["block-1-run.csv"]["tableSchema"]["columns"]
    by_title = {column["titles"]: column for column in columns}
    rows = list(csv.DictReader(io.StringIO(folder["block-1-run.csv"].decode(), newline="")))
    for name in ("lv1", "lv2", "lv3"):
        scale = properties(by_title[f"{name}.code"])
        volts = by_title[f"{name}.V"]
        assert (volts["schema:unitText"], volts["schema:unitCode"]) == ("V", "VLT")
        factor, offset = float(str(scale["scale_factor"])), float(str(scale["add_offset"]))
        for row in rows:
            assert abs(int(row[f"{name}.code"]) * factor + offset - float(row[f"{name}.V"])) < 1e-12
    assert properties(by_title["tick"])["exact_s"] == "1/100000000"
    assert properties(by_title["hv.level"]) == {"level 0": "lv3", "level 1": "-900.0_V"}
