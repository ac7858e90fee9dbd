"""Small broken files, each with the mistakes of a tired person: every mark met, nothing else found.

`# expect: NAME, NAME` stands on the line that a finding must point at, in the sequence or in the
trap file that it names.  Sets are compared, so that a missing finding and an extra one both fail.
"""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from wellseq.checks.judging import check_names
from wellseq.pipeline import compile_file

HERE = Path(__file__).parent
FILES = sorted(path.name for path in HERE.glob("*.well"))
MARK = re.compile(r"#\s*expect:\s*(.+)$")
TRAP = re.compile(r'^trap "(.+)"', re.MULTILINE)
Found = set[tuple[str, int, str]]
"""File, line, name of the finding."""


def marks_of(text: str, file: str) -> Found:
    """What the marks of one file promise."""
    return {
        (file, number, name.strip())
        for number, line in enumerate(text.splitlines(), start=1)
        if (mark := MARK.search(line))
        for name in mark[1].split(",")
    }


def promised(name: str, folder: Path) -> Found:
    """The marks of a sequence and of its trap file."""
    text = (folder / name).read_text("utf-8")
    trap = TRAP.search(text)
    marks = marks_of(text, name)
    if trap is not None:
        marks |= marks_of((folder / trap[1]).read_text("utf-8"), trap[1])
    return marks


def found(name: str, folder: Path, monkeypatch: pytest.MonkeyPatch) -> Found:
    """The findings that stand between a file and its table."""
    monkeypatch.chdir(folder)
    case = compile_file(name)
    return {(one.place.file, one.place.line, one.name) for one in case.findings if one.blocks}


@pytest.mark.parametrize("name", FILES)
def test_the_marks_are_met_and_nothing_else_is_found(
    name: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    assert found(name, HERE, monkeypatch) == promised(name, HERE)


@pytest.mark.parametrize("name", FILES)
def test_every_file_has_a_few_mistakes(name: str) -> None:
    assert 2 <= len(promised(name, HERE)) <= 8


def test_there_are_files_for_every_hour() -> None:
    names = {mark[2] for name in FILES for mark in promised(name, HERE)}
    assert len(FILES) >= 14
    assert names <= set(check_names())
    assert len(names) >= 25


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("hold for 20 sec", "hold for 20 s"),
        ("pattern cradle { E2, E6 = wall;", "pattern cradle { E2, E66 = wall;"),
    ],
    ids=["a mistake mended", "a mistake more"],
)
def test_a_missing_and_an_extra_finding_are_seen(
    old: str, new: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    text = (HERE / "units.well").read_text("utf-8")
    trap = (HERE / "night_shift.trap.toml").read_text("utf-8")
    (tmp_path / "night_shift.trap.toml").write_text(trap, "utf-8")
    (tmp_path / "units.well").write_text(text, "utf-8")
    assert found("units.well", tmp_path, monkeypatch) == promised("units.well", tmp_path)
    assert old in text
    (tmp_path / "units.well").write_text(text.replace(old, new), "utf-8")
    assert found("units.well", tmp_path, monkeypatch) != promised("units.well", tmp_path)
