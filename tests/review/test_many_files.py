"""Several files and folders at once: all are told of, in order; silence is never a pass."""

from __future__ import annotations

import io
import json
import os
import pty
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

import wellseq as package
from wellseq.emit.formats import format_names
from wellseq.review.many import asked, examine_all

ROOT = str(Path(package.__file__).parents[1])


@pytest.fixture
def tree(bench: Path) -> Path:
    """A folder with two sequences, one file that one of them uses, and a hidden folder."""
    text = (bench / "first.well").read_text("utf-8")
    (bench / "common").mkdir()
    (bench / "common" / "walls.well").write_text("wellseq 1\nlet low = 40 V\n", "utf-8")
    (bench / "zeta.well").write_text(
        text.replace("\n\nlet", '\nuse "common/walls.well"\n\nlet').replace(
            "= -wall", "= -low - wall / 5"
        ),
        "utf-8",
    )
    (bench / ".hidden").mkdir()
    (bench / ".hidden" / "x.well").write_text("nonsense", "utf-8")
    return bench


def test_a_folder_stands_for_its_sequences_in_order(tree: Path, wellseq) -> None:
    code, out, told = wellseq("check", ".", "--format", "lines")
    assert code == 0, out
    assert [line.split(":")[0] for line in out.splitlines()] == ["first.well", "zeta.well"]
    assert told == ""


def test_a_file_that_nothing_uses_is_not_examined_and_says_so(tree: Path, wellseq) -> None:
    (tree / "common" / "spare.well").write_text("wellseq 1\nlet a = 1 V\n", "utf-8")
    for form in format_names():
        code, out, _ = wellseq("check", ".", "--format", form)
        assert code == 1
        assert "common/spare.well" in out


@pytest.mark.parametrize("form", format_names())
def test_zero_files_are_no_success(bench: Path, wellseq, form: str) -> None:
    (bench / "empty").mkdir()
    code, out, _ = wellseq("check", "empty", "--format", form)
    assert code == 66
    assert "no sequence stands in this folder" in out


@pytest.mark.parametrize("form", format_names())
def test_an_unreadable_file_among_good_ones_is_named(tree: Path, wellseq, form: str) -> None:
    code, out, _ = wellseq("check", "first.well", "nowhere.well", "zeta.well", "--format", form)
    assert code == 66
    assert "nowhere.well" in out
    if form == "json":
        files = json.loads(out)["files"]
        assert [file["cleared"] for file in files] == [True, False, True]


@pytest.mark.parametrize("form", format_names())
def test_a_file_that_does_not_parse_gives_a_report_in_every_form(
    bench: Path, wellseq, form: str
) -> None:
    (bench / "x.well").write_text("]]", "utf-8")
    code, out, _ = wellseq("check", "x.well", "--format", form)
    assert code == 1
    assert "syntax" in out


def test_several_processes_say_the_same_in_the_same_order(tree: Path) -> None:
    for number in range(4):
        shutil.copy(tree / "first.well", tree / f"copy{number}.well")
    (tree / "copy2.well").write_text("]]", "utf-8")
    wanted = asked(["."], {})
    told: list[tuple[int, int]] = []
    alone = examine_all(wanted, 1)
    together = examine_all(wanted, 2, lambda done, of: told.append((done, of)))
    assert together == alone
    assert len(alone) == 6
    assert told == [(done, 6) for done in range(1, 7)]


def test_standard_input_is_checked_under_its_name(bench: Path, wellseq, monkeypatch) -> None:
    text = (bench / "first.well").read_bytes()
    for content, status in ((text, 0), (text.replace(b"for 10 s", b"for 10 V"), 1)):
        monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(content)))
        code, out, _ = wellseq("check", "-", "--as", "new.well", "--format", "lines")
        assert code == status
        assert all(line.startswith("new.well:") for line in out.splitlines())
    assert not (bench / "new.well").exists()


@pytest.mark.parametrize("words", [["-"], ["-", "-", "--as", "x.well"]])
def test_standard_input_needs_one_name(bench: Path, wellseq, monkeypatch, words) -> None:
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(b"")))
    code, out, told = wellseq("check", *words)
    assert (code, out) == (64, "")
    assert "standard input" in told


def on_a_terminal(folder: Path, columns: int, *words: str, stderr: int | None = None) -> str:
    """What a command writes to a terminal of so many columns."""
    main, other = pty.openpty()
    import fcntl
    import struct
    import termios

    fcntl.ioctl(other, termios.TIOCSWINSZ, struct.pack("HHHH", 24, columns, 0, 0))
    environment = {key: value for key, value in os.environ.items() if key != "COLUMNS"}
    with subprocess.Popen(
        [sys.executable, "-m", "wellseq", *words],
        cwd=folder,
        stdin=other,
        stdout=other,
        stderr=other if stderr is None else stderr,
        env={**environment, "PYTHONPATH": ROOT, "TERM": "xterm", "NO_COLOR": "1"},
    ):
        os.close(other)
        pieces = []
        while True:
            try:
                piece = os.read(main, 65536)
            except OSError:
                break
            if not piece:
                break
            pieces.append(piece)
    os.close(main)
    return b"".join(pieces).decode().replace("\r\n", "\n")


def test_a_terminal_of_twenty_columns_is_enough(bench: Path, spoil) -> None:
    spoil("ramp cradle", "ramp cradl_with_a_name_that_is_longer_than_the_line")
    text = on_a_terminal(bench, 20, "check", "first.well")
    finding = text.split("first.well: not clear")[0]
    assert max(map(len, finding.splitlines())) <= 20
    assert "unknown-name" in finding


def test_progress_is_told_on_a_terminal_only(tree: Path, wellseq) -> None:
    text = on_a_terminal(tree, 80, "check", "first.well", "zeta.well")
    assert "checked 1 of 2" in text
    assert "\x1b[K" in text
    with open(os.devnull, "wb") as nowhere:
        quiet = on_a_terminal(tree, 80, "check", "first.well", "zeta.well", stderr=nowhere.fileno())
    assert "checked" not in quiet
    assert wellseq("check", "first.well", "zeta.well")[2] == ""
