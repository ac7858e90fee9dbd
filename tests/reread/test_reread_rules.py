"""What a forger with all hashes at hand still cannot pass off: the meaning of the bytes."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from resealing import canonical, edit_cell, edit_code, edit_codes, reseal

from wellseq.base.finding import Finding
from wellseq.reread.folder import verify

RUN, CAUGHT = "block-1-run.csv", "block-2-bunch.csv"


def only(folder: Path) -> Finding:
    (finding,) = verify(folder)
    return finding


@pytest.mark.parametrize(
    ("column", "text", "says"),
    [
        ("lv1.code", "65536", "is no value of lv1"),
        ("lv1.code", "-1", "is no value of lv1"),
        ("lv1.code", "032767", "is no value of lv1"),
        ("lv1.code", "１２", "is no value of lv1"),
        ("lv1.code", "9" * 400, "is no value of lv1"),
        ("lv1.code", "1_0", "is no value of lv1"),
        ("lv1.V", "0.0", "code 32767 of lv1 is"),
        ("lv1.V", "nan", "code 32767 of lv1 is"),
        ("hv.level", "2", "is no value of hv"),
        ("shutter", "ajar", "is no state of shutter"),
        ("shutter", '"open"', "holds no quotes"),
        ("shutter", "open,open", "11 cells stand here"),
        ("tick", "1", "the first row is not at tick 0"),
    ],
)
def test_a_cell_that_cannot_be_is_found(folder: Path, column: str, text: str, says: str) -> None:
    edit_cell(folder, RUN, 0, column, text)
    reseal(folder)
    finding = only(folder)
    assert finding.name == "table-unsound"
    assert says in finding.message


def test_a_tick_that_does_not_rise_is_found_at_its_line(folder: Path) -> None:
    edit_cell(folder, RUN, 5, "tick", "0")
    reseal(folder)
    assert "do not rise" in only(folder).message
    assert only(folder).place.line == 7


def test_lines_must_end_in_crlf(folder: Path) -> None:
    path = folder / RUN
    path.write_bytes(path.read_bytes().replace(b"\r\n", b"\n"))
    reseal(folder)
    assert only(folder).name == "table-unsound"


def test_a_row_more_or_less_is_found(folder: Path) -> None:
    path = folder / RUN
    lines = path.read_bytes().split(b"\r\n")
    path.write_bytes(b"\r\n".join([*lines[:4], *lines[5:]]))
    reseal(folder)
    assert "were written" in only(folder).message


def test_a_table_that_stops_early_is_found(folder: Path) -> None:
    path = folder / RUN
    lines = path.read_bytes().split(b"\r\n")
    path.write_bytes(b"\r\n".join([*lines[:-2], b""]))

    def fewer(manifest: dict[str, Any]) -> None:
        manifest["blocks"][0]["rows"] -= 1

    reseal(folder, fewer)
    assert any("before the end of the block" in one.message for one in verify(folder))


def rows_of(folder: Path, table: str, column: str) -> tuple[list[int], list[str]]:
    head, *rows = [line.split(",") for line in (folder / table).read_text().splitlines()]
    return [int(row[0]) for row in rows], [row[head.index(column)] for row in rows]


def test_a_change_off_its_clock_is_found(folder: Path) -> None:
    # lv3 has a clock of 2 us, 200 ticks; rows of the shutter fall between.
    ticks, codes = rows_of(folder, RUN, "lv3.code")
    row = next(at for at, tick in enumerate(ticks) if tick % 200 and at)
    edit_codes(folder, RUN, "lv3", {at: int(codes[at]) + 1 for at in range(row, len(ticks))})
    reseal(folder)
    assert any("lv3 changes off its clock" in finding.message for finding in verify(folder))


def test_a_drawn_line_that_bends_off_its_clock_is_found(folder: Path) -> None:
    # lv2 draws lines on a clock of 10 us, 1000 ticks; other rows must lie on its lines.
    ticks, codes = rows_of(folder, RUN, "lv2.code")
    row = next(at for at, tick in enumerate(ticks) if tick % 1000 and tick > 300_000)
    edit_code(folder, RUN, row, "lv2", int(codes[row]) + 2)
    reseal(folder)
    assert [finding.message for finding in verify(folder)] == ["lv2 changes off its clock"]


def test_one_code_beside_a_drawn_line_is_rounding(folder: Path) -> None:
    ticks, codes = rows_of(folder, RUN, "lv2.code")
    row = next(at for at, tick in enumerate(ticks) if tick % 1000 and tick > 300_000)
    messages = []
    for step in (-1, 1):
        edit_code(folder, RUN, row, "lv2", int(codes[row]) + step)
        reseal(folder)
        messages.append([finding.message for finding in verify(folder)])
    # The exact line lies between two codes, so at least one of the two steps stays within a code.
    assert [] in messages


def slower(folder: Path, name: str, slew_V_per_s: float) -> None:
    def change(manifest: dict[str, Any]) -> None:
        for one in manifest["trap"]["converters"]:
            if one["name"] == name:
                one["slew_V_per_s"] = slew_V_per_s

    reseal(folder, change)


@pytest.mark.parametrize(
    ("name", "fair", "unfair"),
    # lv1: 100 V in 10 ms in steps of 90 mV to 9 us; lv2: 5 V in 10 ms by a half-cosine.
    [("lv1", 1.1e4, 0.9e4), ("lv2", 5.0 / 10e-3 * 1.58, 5.0 / 10e-3 * 1.4)],
)
def test_a_slew_that_is_not_kept_is_found(
    folder: Path, name: str, fair: float, unfair: float
) -> None:
    slower(folder, name, fair)
    assert verify(folder) == ()
    slower(folder, name, unfair)
    assert f"{name} changes faster than its slew" in only(folder).message


@pytest.mark.parametrize("name", ["lv1", "hv", "shutter"])
def test_another_end_is_found(folder: Path, name: str) -> None:
    def change(manifest: dict[str, Any]) -> None:
        end = manifest["end"]
        end["codes"]["lv1"] += name == "lv1"
        end["levels"]["hv"] += name == "hv"
        end["states"]["shutter"] = "closed" if name == "shutter" else "open"

    reseal(folder, change)
    assert f"{name} ends at" in only(folder).message


def test_more_rows_than_the_card_holds_are_found(folder: Path) -> None:
    def change(manifest: dict[str, Any]) -> None:
        manifest["limits"]["table_rows"] = 100

    reseal(folder, change)
    found = verify(folder)
    assert len(found) == 2
    assert all(" rows, the card holds 100" in finding.message for finding in found)


def limited(folder: Path, pair: int, limit_V: float) -> list[str]:
    def change(manifest: dict[str, Any]) -> None:
        manifest["trap"]["neighbours"][pair]["limit_V"] = limit_V

    reseal(folder, change)
    return [finding.message for finding in verify(folder)]


def test_neighbours_too_far_apart_are_found(folder: Path) -> None:
    # C1 goes to 100 V while C2 goes from -1 V to 4 V: 96 V at the end, and never more.
    assert limited(folder, 0, 96.01) == []
    assert limited(folder, 0, 95.9)[0] == "C1 and C2 stand more than 95.9 V apart"


def test_an_edge_counts_as_both_of_its_levels(folder: Path) -> None:
    # G4 is thrown from lv3 (20 V) to -900 V beside R3 on lv3 itself: 920 V once the edge is over.
    assert limited(folder, 2, 920.1) == []
    assert limited(folder, 2, 919.9) == ["R3 and G4 stand more than 919.9 V apart"]


def test_a_drive_adds_its_amplitude(folder: Path) -> None:
    # R3 stands at 20 V, driven with 0.5 V until C2 has reached -0.74 V or so (from -1 V).
    worst = 20.018 + 1.0 + 0.5
    assert limited(folder, 1, worst + 0.05) == []
    assert limited(folder, 1, worst - 0.1) != []
    assert worst - 0.1 > 20.018 + 1.0


def claims(folder: Path, **changes: object) -> list[str]:
    path = folder / "claims.json"
    document = json.loads(path.read_bytes())
    claim = document["claims"][0]
    for key, value in changes.items():
        side, _, inner = key.partition("__")
        if inner:
            claim[side][inner] = value
        else:
            claim[key] = value
    path.write_bytes(canonical(document))
    reseal(folder)
    return [finding.name for finding in verify(folder)]


@pytest.mark.parametrize(
    "changes",
    [
        {"right__certified_V": 0.4},
        {"right__certified_V": None},
        {"right__certified_V": 3.9},
        {"left__floor_V": 8.1},
        {"left__region_m": [0.03, 0.01]},
        {"well_m": [0.018, 0.012]},
        {"start_s": "1/0"},
        {"end_s": "1"},
        {"ticks": [100001, 300000]},
        {"charge_sign": 0},
        {"block": 3},
        {"left": 1},
    ],
)
def test_a_claim_that_proves_less_than_it_should_is_found(
    folder: Path, changes: dict[str, object]
) -> None:
    assert set(claims(folder, **changes)) == {"claims-unsound"}


def test_a_claim_exactly_at_its_floor_is_sound(folder: Path) -> None:
    assert claims(folder, right__certified_V=0.5) == []


def test_a_shallow_claim_needs_its_step_s_allowance(folder: Path) -> None:
    def allow(manifest: dict[str, Any]) -> None:
        manifest["allowances"][0]["name"] = "well-too-shallow"

    assert claims(folder, right__certified_V=0.4) == ["claims-unsound"]
    reseal(folder, allow)
    assert verify(folder) == ()


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("0.001,0.003", "0.003,0.001"),
        ("0.001,0.003", "0.0010,0.003"),
        ("0.001,0.003", "0.001,3"),
        ("200000.0", "2e5"),
        ("200000.0", "inf"),
        (",0.5,1,", ",0.5,3,"),
        (",0.5,1,", ",0.0,1,"),
        ("270.0", "360.0"),
        ("270.0", ""),
        ("R3,", "C1,"),
        ("ring,", "rings,"),
        ("\r\n", "\n"),
    ],
)
def test_a_drive_that_cannot_be_is_found(folder: Path, old: str, new: str) -> None:
    path = folder / "drives-1-run.csv"
    content = path.read_bytes().decode()
    assert old in content
    path.write_bytes(content.replace(old, new).encode())
    reseal(folder)
    assert only(folder).name == "drives-unsound"


def test_rows_exchanged_between_folders_are_found_by_the_content_id(folder: Path) -> None:
    edit_code(folder, RUN, 0, "lv3", 2595)

    def keep_the_old_id(manifest: dict[str, Any]) -> None:
        manifest["content_id"] = before

    before = json.loads((folder / "manifest.json").read_bytes())["content_id"]
    reseal(folder, keep_the_old_id)
    assert only(folder).name == "content-differs"


def test_a_stray_beyond_the_staircase_needs_an_allowance(folder: Path) -> None:
    def stray(manifest: dict[str, Any]) -> None:
        manifest["blocks"][0]["strays_V"]["lv1"] = 0.051

    reseal(folder, stray)
    assert only(folder).name == "manifest-unsound"

    def allow(manifest: dict[str, Any]) -> None:
        manifest["allowances"][0]["name"] = "steps-too-coarse"

    reseal(folder, allow)
    assert verify(folder) == ()
