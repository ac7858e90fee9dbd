"""The sequences that come with the house are clear: nothing stands between them and a table."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from wellseq.checks.judging import clear
from wellseq.model.headers import OUTSIDE
from wellseq.pipeline import compile_file
from wellseq.text.parse import parse
from wellseq.text.tree import Statement

HERE = Path(__file__).resolve().parents[2] / "sequences"
FILES = {str(path.relative_to(HERE)): path for path in sorted(HERE.rglob("*.well"))}


def plays(path: Path) -> bool:
    """Whether a file has a sequence, and is no library for others."""
    statements = parse(path.read_text("utf-8"), path.name).statements
    verbs = [item.verb.text for item in statements if isinstance(item, Statement) and item.verb]
    assert set(verbs) <= set(OUTSIDE)
    return "sequence" in verbs


PLAYED = [name for name, path in FILES.items() if plays(path)]


@pytest.mark.parametrize("name", PLAYED)
def test_a_sequence_is_clear(name: str) -> None:
    case = compile_file(FILES[name])
    assert [f"{one.place}: {one.name}: {one.message}" for one in case.findings if one.blocks] == []
    assert clear(case) is not None


def test_the_three_scenarios_are_there() -> None:
    folders = {name.split("/")[0] for name in PLAYED}
    assert {"electron_bench", "positron_bench", "saltmarsh"} <= folders


def test_a_file_without_a_sequence_is_used_by_one_beside_it() -> None:
    texts = [FILES[name].read_text("utf-8") for name in PLAYED]
    for name in FILES.keys() - set(PLAYED):
        written = Path(*Path(name).parts[1:]).as_posix()
        assert any(re.search(rf'^use +"{re.escape(written)}"', text, re.M) for text in texts), name


def test_the_electrons_are_let_go_at_ten_depths() -> None:
    case = compile_file(FILES["electron_bench/depths.well"])
    assert case.sequence is not None
    assert case.wells is not None
    verbs = [item.verb for item in case.sequence.items if hasattr(item, "verb")]
    assert verbs.count("release") == verbs.count("load") == 10
    waits = [one for one in case.wells.held if float(one.end_s - one.start_s) > 1.99]
    depths = [one.certified_V for one in waits]
    assert len(depths) == 10
    assert depths == sorted(depths)
    assert depths[0] > 2.4
    assert depths[-1] > 50.0


def test_the_positrons_are_stacked_by_twenty_catches() -> None:
    case = compile_file(FILES["positron_bench/stack.well"])
    assert case.timeline is not None
    assert [block.trigger for block in case.timeline.blocks[1:]] == ["pulse_sent"] * 20
    assert case.wells is not None
    assert sum(one.energetic for one in case.wells.held) >= 20
    assert len(case.wells.ways_out) == 1


@pytest.mark.parametrize(
    ("name", "before", "after", "finding"),
    [
        ("electron_bench/depths.well", "through E6..E8", "through E7, E8", "no-way-out"),
        ("electron_bench/depths.well", "0.6 * height", "0.9 * height", "requirement-not-met"),
        (
            "positron_bench/stack.well",
            "throw G1 to pos10",
            "expect cage closed",
            "cloud-not-placed",
        ),
        ("positron_bench/stack.well", "P2, P8 = 0 V; P3, P7 = 130 V; ", "", "well-too-shallow"),
    ],
)
def test_a_slip_in_a_sequence_is_seen(
    name: str, before: str, after: str, finding: str, tmp_path: Path
) -> None:
    text = FILES[name].read_text("utf-8")
    assert before in text
    for trap in FILES[name].parent.glob("*.trap.toml"):
        (tmp_path / trap.name).write_bytes(trap.read_bytes())
    path = tmp_path / FILES[name].name
    path.write_text(text.replace(before, after), "utf-8")
    assert finding in {one.name for one in compile_file(path).findings if one.blocks}
