"""`tidy` on files: proved rewrites only, nothing half written, standard input, folders."""

from __future__ import annotations

import io
import os
import sys
from itertools import count
from pathlib import Path

import pytest

from wellseq.pipeline import table_hash
from wellseq.review import tidying
from wellseq.review.tidying import tidied

MORE = count(1)
"""So that a text laid out twice gets longer each time."""
UNTIDY = b'wellseq 1;\r\ntrap   "bench.trap.toml"  # it\r\nlet a=3V\r\n'
TIDY = b'wellseq 1\r\ntrap "bench.trap.toml"  # it\r\nlet a = 3 V\r\n'


def test_the_files_to_start_from_are_tidy(bench: Path, wellseq) -> None:
    assert wellseq("tidy", "--check", ".") == (0, "", "")


def test_a_rewrite_keeps_the_table_and_the_permissions(bench: Path, wellseq, spoil) -> None:
    path = bench / "first.well"
    path.chmod(0o640)
    before, text = table_hash("first.well"), path.read_bytes()
    spoil("ramp cradle over 20 ms smoothly", "ramp   cradle\n over 20ms   smoothly ;")
    assert wellseq("tidy", "first.well")[:2] == (0, "first.well: laid out\n")
    assert table_hash("first.well") == before is not None
    assert path.stat().st_mode & 0o777 == 0o640
    assert path.read_bytes() != text
    assert wellseq("tidy", "first.well")[:2] == (0, "")
    assert sorted(os.listdir(bench)) == ["bench.trap.toml", "first.well"]


def test_check_and_diff_write_nothing(bench: Path, wellseq, spoil) -> None:
    spoil("hold for 10 s", "hold   for 10 s")
    before = (bench / "first.well").read_bytes()
    assert wellseq("tidy", "--check", "first.well") == (1, "first.well: would change\n", "")
    code, out, _ = wellseq("tidy", "--diff", ".")
    assert code == 1
    assert "-  hold   for 10 s\n+  hold for 10 s\n" in out
    assert (bench / "first.well").read_bytes() == before


def test_a_file_with_mistakes_is_left_alone(bench: Path, wellseq, spoil) -> None:
    spoil("hold for 10 s", "hold   for 10 sec")
    before = (bench / "first.well").read_bytes()
    code, out, told = wellseq("tidy", "first.well")
    assert (code, out) == (1, "")
    assert "first.well: it has mistakes, the first in line 21, column 17" in told
    assert (bench / "first.well").read_bytes() == before


def test_what_cannot_be_read_is_66(bench: Path, wellseq) -> None:
    assert wellseq("tidy", "nowhere.well", "first.well")[0] == 66
    (bench / "empty").mkdir()
    assert wellseq("tidy", "empty")[0] == 66


def test_a_link_and_a_full_disk_are_73(bench: Path, wellseq, spoil, monkeypatch) -> None:
    spoil("hold for 10 s", "hold   for 10 s")
    before = (bench / "first.well").read_bytes()
    (bench / "link.well").symlink_to("first.well")
    assert wellseq("tidy", "link.well")[0] == 73

    def full(*words: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    code, _, told = wellseq("tidy", "first.well")
    assert code == 73
    assert "no space left on device" in told
    assert (bench / "first.well").read_bytes() == before
    assert not list(bench.glob(".*"))


class Pipe:
    """Standard input and output as bytes."""

    def __init__(self, monkeypatch: pytest.MonkeyPatch) -> None:
        self.monkeypatch = monkeypatch
        self.out = io.BytesIO()

    def through(self, content: bytes, *words: str) -> tuple[int, bytes]:
        from wellseq.cli.main import main

        self.out = io.BytesIO()
        stream = io.TextIOWrapper(self.out, "utf-8", newline="", write_through=True)
        self.monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(content)))
        self.monkeypatch.setattr(sys, "stdout", stream)
        return main(["tidy", "-", *words]), self.out.getvalue()


def test_standard_input_goes_to_standard_output(bench: Path, monkeypatch) -> None:
    pipe = Pipe(monkeypatch)
    assert pipe.through(UNTIDY, "--as", "x.well") == (0, TIDY)
    assert pipe.through(TIDY, "--as", "x.well") == (0, TIDY)
    assert pipe.through(UNTIDY, "--as", "x.well", "--check")[0] == 1
    assert pipe.through(b"let a 3 V\n", "--as", "x.well") == (1, b"")
    assert pipe.through(UNTIDY) == (64, b"")


def test_the_proof_asks_for_tree_comments_table_and_rest(
    bench: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = bench / "first.well"
    text = path.read_text("utf-8")
    for change, said in (
        (lambda one: one.replace("10 s", "11 s"), "something else"),
        (lambda one: one.replace("# electrons", "# electron"), "comment would be lost"),
        (lambda one: one + "\n" * next(MORE), "does not settle"),
    ):
        monkeypatch.setattr(tidying, "tidy", change)
        one = tidied(path, "first.well", text.encode())
        assert said in one.refused
        assert not one.changed
    monkeypatch.setattr(tidying, "tidy", lambda one: one.rstrip() + "\n\n")
    hashes = iter(["a", "b"])
    monkeypatch.setattr(tidying, "table_hash", lambda path: next(hashes))
    assert "table would be another one" in tidied(path, "first.well", text.encode()).refused
