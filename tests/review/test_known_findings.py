"""Known findings: accepted with a reason and a day, listed all the same, stale ones found."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from wellseq.review.known import HEADING, accept, listed, read_known

DAY = ("--on", "2026-05-12")


@pytest.fixture
def failing(bench: Path, spoil) -> Path:
    """A sequence with a few findings that block."""
    spoil("wall = 50 V", "wall = 80 V")
    return bench


def write(wellseq, *more: str) -> tuple[int, str, str]:
    words = ("--accept", "old supply", *DAY, "--known", "known.list")
    return wellseq("check", "first.well", *words, *more)


def test_accepted_findings_are_listed_and_decide_nothing(failing: Path, wellseq) -> None:
    assert wellseq("check", "first.well")[0] == 1
    code, _, told = write(wellseq)
    assert code == 0
    assert "accepted, 0 taken off" in told
    code, out, _ = wellseq("check", "first.well", "--known", "known.list")
    assert code == 0
    assert "FAILS, known  voltage-out-of-range" in out
    assert "known  old supply (2026-05-12)" in out
    assert "nothing new, " in out
    assert "a build refuses it" in out
    code, out, _ = wellseq("check", "first.well", "--known", "known.list", "--format", "lines")
    assert code == 0
    assert ": note: " in out
    assert ": error: " not in out


def test_they_still_keep_the_table_from_being_built(failing: Path, wellseq) -> None:
    write(wellseq)
    assert wellseq("build", "first.well", "-o", "out")[0] == 1
    assert not (failing / "out").exists()


def test_the_list_is_sorted_one_a_line_and_written_the_same_twice(failing: Path, wellseq) -> None:
    write(wellseq)
    text = (failing / "known.list").read_text("utf-8")
    heading, *entries = text.splitlines()
    assert heading == HEADING
    assert entries == sorted(entries)
    assert len(entries) > 1
    write(wellseq)
    assert (failing / "known.list").read_text("utf-8") == text


def test_edits_elsewhere_keep_them_known_and_a_worse_one_is_new(
    failing: Path, wellseq, spoil
) -> None:
    write(wellseq)
    spoil("\n\nlet", "\n\n# a remark\n\nlet")
    assert wellseq("check", "first.well", "--known", "known.list")[0] == 0
    spoil("wall = 80 V", "wall = 90 V")
    code, out, _ = wellseq("check", "first.well", "--known", "known.list")
    assert code == 1
    assert "FAILS  voltage-out-of-range" in out
    assert "known-not-met" in out


def test_an_entry_that_nothing_meets_is_a_finding(failing: Path, wellseq, spoil) -> None:
    write(wellseq)
    spoil("wall = 80 V", "wall = 50 V")
    code, out, _ = wellseq("check", "first.well", "--known", "known.list", "--format", "lines")
    assert code == 1
    assert "known.list:2:1: error: " in out
    assert "[known-not-met]" in out
    code, _, told = write(wellseq)
    assert code == 0
    assert told.startswith("known.list: 0 accepted, ")
    assert (failing / "known.list").read_text("utf-8") == f"{HEADING}\n"


def test_entries_of_files_that_were_not_examined_stay(failing: Path, wellseq, spoil) -> None:
    (failing / "second.well").write_bytes((failing / "first.well").read_bytes())
    wellseq("check", ".", "--known", "known.list", "--accept", "both", *DAY)
    count = (failing / "known.list").read_text("utf-8").count("\n")
    assert wellseq("check", "first.well", "--known", "known.list")[0] == 0
    write(wellseq)
    assert (failing / "known.list").read_text("utf-8").count("\n") == count
    # A file that broke hides its findings: they are not gone.
    spoil("hold for 10 s", "hold for 10 V")
    code, out, _ = wellseq("check", "first.well", "--known", "known.list")
    assert code == 1
    assert "known-not-met" not in out


def test_what_keeps_a_file_from_being_examined_is_never_accepted(
    bench: Path, wellseq, spoil
) -> None:
    spoil("hold for 10 s", "hold for 10 V")
    code, _, told = write(wellseq)
    assert code == 1
    assert "was not examined wholly" in told
    assert wellseq("check", "first.well", "--known", "known.list")[0] == 1


@pytest.mark.parametrize(
    "line",
    [
        "<<<<<<< ours",
        '"first.well" slew-too-fast 0123 2026-05-12 "why"',
        f'"first.well" slew-too-fast {"0" * 24} 2026-13-12 "why"',
        f'"first.well" slew-too-fast {"0" * 24} 2026-05-12 ""',
        f'"first.well" slew-too-fast {"0" * 24} 2026-05-12',
    ],
)
def test_a_list_with_a_line_that_cannot_be_read_accepts_nothing(
    line: str, failing: Path, wellseq
) -> None:
    write(wellseq)
    with (failing / "known.list").open("a", encoding="utf-8") as stream:
        stream.write(f"{line}\n")
    code, out, _ = wellseq("check", "first.well", "--known", "known.list")
    assert code == 78
    assert "known-unreadable" in out
    assert "FAILS  voltage-out-of-range" in out
    before = (failing / "known.list").read_bytes()
    assert write(wellseq)[0] == 78
    assert (failing / "known.list").read_bytes() == before


def test_a_list_that_is_not_there_is_78(failing: Path, wellseq) -> None:
    assert wellseq("check", "first.well", "--known", "nowhere.list")[0] == 78


@pytest.mark.parametrize(
    "words",
    [
        ["--accept", "why"],
        ["--on", "2026-05-12"],
        ["--accept", "why", *DAY],
        ["--known", "k", "--accept", " ", *DAY],
        ["--known", "k", "--accept", "why", "--on", "today"],
        ["--known", "k", "--accept", "why", *DAY, "--changed-since", "HEAD"],
    ],
)
def test_options_that_do_not_go_together_are_64(bench: Path, wellseq, words: list[str]) -> None:
    code, out, told = wellseq("check", "first.well", *words)
    assert (code, out) == (64, "")
    assert told.startswith("wellseq: ")


def test_the_list_is_found_from_anywhere(failing: Path, wellseq, monkeypatch) -> None:
    write(wellseq)
    monkeypatch.chdir(failing.parent)
    words = ("check", "bench/first.well", "--known", "bench/known.list", "--format", "json")
    code, out, _ = wellseq(*words)
    assert code == 0
    assert all(
        finding["known"] for finding in json.loads(out)["findings"] if finding["verdict"] == "fail"
    )


def test_equal_findings_are_counted(failing: Path) -> None:
    from wellseq.emit.examined import examined
    from wellseq.pipeline import compile_file

    thing = examined(compile_file("first.well"))
    known = read_known(failing / "k", may_lack=True)
    text, added, _ = listed([thing, thing], known, "why", "2026-05-12")
    (failing / "k").write_text(text, "utf-8")
    one, _ = accept([thing], read_known(failing / "k"))[0], None
    assert all(finding.known for finding in one.findings if finding.blocks)
    rest = accept([thing], read_known(failing / "k"))[-1]
    assert len(rest.findings) == added // 2
