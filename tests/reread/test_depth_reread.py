"""Depths worked out again from the folder alone: true claims stand, and forged ones do not."""

from __future__ import annotations

import json
import re
import shutil
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest
from resealing import canonical, edit_codes, reseal

from wellseq.base.data import data_folder
from wellseq.base.finding import Finding
from wellseq.pipeline import build
from wellseq.reread import depth
from wellseq.reread.folder import read_folder, verify

CLOCK_s = Fraction(1, 10**6)
Claim = dict[str, Any]
MOTION = """\
hold for 10 s
  ramp { E4 = -30 V } over 20 ms
  hold for 2 s
  ramp { E2, E4 = -45 V } over 50 ms smoothly
  evaporate electrons through E4 to 8 V over 2 s
  hold for 1 s"""


@pytest.fixture(scope="module")
def bench(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The sequence that `wellseq new` writes with more motion, published; not to be touched."""
    home = tmp_path_factory.mktemp("bench")
    shutil.copytree(data_folder("grammar") / "start", home / "start")
    file = home / "start" / "first.well"
    text = file.read_text("utf-8")
    assert "hold for 10 s\n  require depth of electrons above 20 V" in text
    file.write_text(re.sub(r"hold for 10 s\n.*above 20 V", MOTION, text), "utf-8")
    case = build(file, home / "out")
    assert not case.blocked, case.blocked
    return home / "out"


@pytest.fixture
def copy(bench: Path, tmp_path: Path) -> Path:
    return Path(shutil.copytree(bench, tmp_path / "out"))


def claimed(folder: Path, change: Callable[[list[Claim]], None]) -> tuple[Finding, ...]:
    """What is found once the claims are changed and sealed again."""
    path = folder / "claims.json"
    document = json.loads(path.read_bytes())
    change(document["claims"])
    path.write_bytes(canonical(document))
    reseal(folder)
    return verify(folder)


def longest(claims: list[Claim]) -> Claim:
    return max(claims, key=lambda one: one["ticks"][1] - one["ticks"][0])


def test_what_was_built_holds_and_it_is_said_what_was_examined(bench: Path) -> None:
    reading = read_folder(bench)
    assert reading.findings == ()
    assert reading.meaning is not None
    examined = reading.meaning.examined
    claims = json.loads((bench / "claims.json").read_bytes())["claims"]
    long = [one for one in claims if Fraction(one["end_s"]) - Fraction(one["start_s"]) > CLOCK_s]
    # A stretch that is no longer than rounding may move its ends has no instant of its own.
    assert examined.judged == len(long) > 6
    assert examined.stretches == len(claims)
    assert examined.instants > 40
    assert 0 < examined.least_V < 100
    assert f"{examined.instants} instants of {examined.judged} of " in reading.examined


def test_a_claim_of_more_than_there_is_is_found(copy: Path) -> None:
    def flatter(claims: list[Claim]) -> None:
        side = longest(claims)["left"]
        side["certified_V"] += 3.0
        side["best_V"] += 3.0

    (finding,) = claimed(copy, flatter)
    assert finding.name == "depth-not-held"
    assert "were certified" in finding.message


def test_as_much_as_there_is_may_be_claimed(copy: Path) -> None:
    # Companion: up to what was taken off for everything else, a larger claim is true.
    def flatter(claims: list[Claim]) -> None:
        side = longest(claims)["left"]
        spare = side["losses_V"]["calibration"] + side["losses_V"]["patch"]
        side["certified_V"] += spare
        side["best_V"] += spare

    assert claimed(copy, flatter) == ()


def test_a_floor_above_what_is_sure_is_found(copy: Path) -> None:
    def demand(claims: list[Claim]) -> None:
        side = longest(claims)["right"]
        # What was taken off is said to be next to nothing, so that the claims agree in themselves.
        for cause in ("calibration", "noise", "patch", "half_code", "stray", "lag", "shape"):
            side["losses_V"][cause] = 0.0
        side["certified_V"] = side["best_V"] - 0.02
        side["floor_V"] = side["certified_V"]

    (finding,) = claimed(copy, demand)
    assert finding.name == "depth-not-held"
    assert "are demanded" in finding.message


@pytest.mark.parametrize(
    ("key", "low", "high"),
    [("well_m", -0.5, 0.5), ("well_m", 0.0, 0.0)],
)
def test_another_region_for_the_well_is_found(
    copy: Path, key: str, low: float, high: float
) -> None:
    def widen(claims: list[Claim]) -> None:
        claim = longest(claims)
        claim[key] = [low, high] if high else [claim["right"]["region_m"][1] - 1e-3] * 2

    assert {one.name for one in claimed(copy, widen)} == {"depth-not-held"}


def test_a_far_barrier_does_not_count_beyond_a_dip(copy: Path) -> None:
    """A side that reaches out over the next well flatters: the dip before it ends the side."""

    def reach(claims: list[Claim]) -> None:
        claim = longest(claims)
        low, high = claim["left"]["region_m"]
        claim["left"]["region_m"] = [low - 0.5, high]

    assert claimed(copy, reach) == ()


def test_codes_that_take_the_wall_away_are_found_by_the_depth(copy: Path) -> None:
    manifest = json.loads((copy / "manifest.json").read_bytes())
    claim = longest(json.loads((copy / "claims.json").read_bytes())["claims"])
    wall = claim["left"]["barrier_m"]
    (electrode,) = [
        one for one in manifest["trap"]["electrodes"] if one["from_m"] <= wall <= one["to_m"]
    ]
    table = manifest["blocks"][0]["table"]
    head, *rows = [line.split(",") for line in (copy / table).read_text().splitlines()]
    code = head.index(f"{electrode['output']}.code")
    first, last = claim["ticks"]
    held = [at for at, row in enumerate(rows) if first <= int(row[0]) < last]
    standing = int(rows[held[0]][code])
    middle = (
        2
        ** next(
            one["bits"]
            for one in manifest["trap"]["converters"]
            if one["name"] == electrode["output"]
        )
        - 1
    ) // 2
    moved = standing + (middle - standing) // 2
    edit_codes(copy, table, electrode["output"], dict.fromkeys(held, moved))
    reseal(copy)
    assert "depth-not-held" in {one.name for one in verify(copy)}


def test_a_bore_that_is_not_known_is_not_passed_in_silence(copy: Path) -> None:
    def closed(manifest: dict[str, Any]) -> None:
        manifest["trap"]["ends"] = "closed"

    reseal(copy, closed)
    assert "NOT worked out again" in read_folder(copy).examined


def test_the_work_is_bounded(bench: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(depth, "INSTANTS_MAX", 10)
    reading = read_folder(bench)
    assert reading.meaning is not None
    examined = reading.meaning.examined
    assert examined.judged < examined.stretches
    assert examined.instants < 10 + 2 * (depth.SPREAD + 8)
    # The tightest stretch is among those that were looked at.
    whole = depth.Examined()
    monkeypatch.undo()
    whole = read_folder(bench).meaning.examined  # type: ignore[union-attr]
    assert examined.least_V <= whole.least_V * 1.5
