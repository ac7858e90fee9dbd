"""Names, decimals, drive tables, claims and the content id."""

from __future__ import annotations

import csv
import io
import json
from dataclasses import replace
from fractions import Fraction

import made_case
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.emit.blocks import decimal, table_name
from wellseq.emit.content import content_id
from wellseq.emit.contents import also_kinds, contents, file_kinds
from wellseq.emit.files.claims_json import write as write_claims
from wellseq.emit.files.drives_csv import write as write_drives
from wellseq.timeline.shipped import Shipped


@given(st.fractions(0, 10**6))
def test_decimals_are_exact_or_rounded_to_the_nearest(seconds: Fraction) -> None:
    text = decimal(seconds)
    assert abs(Fraction(text) - seconds) <= Fraction(1, 2 * 10**18)
    assert not text.endswith((".", ".0"))


@pytest.mark.parametrize(
    ("seconds", "text"),
    [("0", "0"), ("1/8", "0.125"), ("130", "130"), ("1/3", "0.333333333333333333")],
)
def test_decimal(seconds: str, text: str) -> None:
    assert decimal(Fraction(seconds)) == text


def test_a_block_s_file_is_named_by_number_and_trigger() -> None:
    run, caught = made_case.blocks()
    assert table_name(run) == "block-1-run.csv"
    assert table_name(replace(caught, trigger="bündel/../x")) == "block-2-b_ndel_x.csv"


def test_every_kind_of_file_is_found_and_no_name_is_given_twice() -> None:
    assert {"claims_json", "copies", "csvw_json", "drives_csv", "table_csv"} <= set(file_kinds())
    assert also_kinds() == ("hdf5", "npz")
    plain = [path for path, _ in contents(made_case.cleared())]
    names = [path for path, _ in contents(made_case.cleared(), also_kinds())]
    assert len(set(names)) == len(names) == len(plain) + 4


def test_drives_are_a_table_with_a_column_per_sector() -> None:
    ((name, pieces),) = write_drives(made_case.cleared())
    (row,) = csv.DictReader(io.StringIO(b"".join(pieces).decode(), newline=""))
    assert name == "drives-1-run.csv"
    assert row == {
        "ring": "R3",
        "start_s": "0.001",
        "stop_s": "0.003",
        "from_Hz": "200000.0",
        "to_Hz": "1600000.0",
        "amplitude_V": "0.5",
        "order": "1",
        "phase_1_deg": "0.0",
        "phase_2_deg": "270.0",
        "phase_3_deg": "180.0",
        "phase_4_deg": "90.0",
    }


def test_claims_give_regions_bounds_floors_and_losses() -> None:
    ((name, pieces),) = write_claims(made_case.cleared())
    document = json.loads(b"".join(pieces))
    (claim,) = document["claims"]
    assert name == "claims.json"
    assert claim["ticks"] == [100000, 300000]
    assert claim["right"]["certified_V"] == 3.5
    assert claim["right"]["floor_V"] == 0.5
    assert claim["right"]["losses_V"]["calibration"] == 0.3
    assert (claim["well_m"], claim["left"]["region_m"]) == ([0.034, 0.042], [0.006, 0.034])


def shipped() -> Shipped:
    found = made_case.case().shipped
    assert found is not None
    return found


def test_the_content_id_changes_with_every_code_level_state_tick_and_drive() -> None:
    whole = shipped()
    first, second = whole.blocks
    seen = {content_id(whole)}
    for field in ("ticks", "codes", "levels", "states"):
        bent = getattr(first, field).copy()
        bent[-1] += 1
        seen.add(content_id(replace(whole, blocks=(replace(first, **{field: bent}), second))))
    block = replace(first.block, drives=())
    seen.add(content_id(replace(whole, blocks=(replace(first, block=block), second))))
    seen.add(content_id(replace(whole, blocks=(first,))))
    assert len(seen) == 7


def test_the_content_id_is_the_same_every_time() -> None:
    assert content_id(shipped()) == content_id(shipped())
