"""One file, whole or not at all, and never over anything that is there."""

from __future__ import annotations

import os
from collections.abc import Iterator
from pathlib import Path

import pytest

from wellseq.emit.lock import sole_writer
from wellseq.emit.single import CannotPublish, write_whole


def beside(folder: Path) -> list[str]:
    return sorted(path.name for path in folder.iterdir())


def test_a_file_is_written_and_nothing_is_left_beside_it(tmp_path: Path) -> None:
    written = write_whole(tmp_path / "a.npy", [b"one", b"two"])
    assert (tmp_path / "a.npy").read_bytes() == b"onetwo"
    assert written.size == 6
    assert beside(tmp_path) == ["a.npy"]


@pytest.mark.parametrize("kind", ["file", "folder", "link", "dangling"])
def test_what_is_there_is_left_alone(tmp_path: Path, kind: str) -> None:
    target = tmp_path / "a.npy"
    if kind == "file":
        target.write_bytes(b"years of work")
    elif kind == "folder":
        target.mkdir()
    else:
        target.symlink_to(tmp_path / ("elsewhere" if kind == "dangling" else "."))
    before = beside(tmp_path)
    with pytest.raises(CannotPublish, match="is there already"):
        write_whole(target, [b"new"])
    assert beside(tmp_path) == before
    assert kind != "file" or target.read_bytes() == b"years of work"


@pytest.mark.parametrize("name", ["..", "nowhere/a.npy", "/"])
def test_a_target_must_be_a_new_name_in_a_folder(tmp_path: Path, name: str) -> None:
    with pytest.raises(CannotPublish):
        write_whole(tmp_path / name, [b"new"])


def test_a_source_that_fails_leaves_nothing(tmp_path: Path) -> None:
    def failing() -> Iterator[bytes]:
        yield b"a beginning"
        raise OSError(28, "No space left on device")

    with pytest.raises(CannotPublish, match="no space left"):
        write_whole(tmp_path / "a.npy", failing())
    assert beside(tmp_path) == []


def test_leftovers_of_a_killed_writer_are_cleaned(tmp_path: Path) -> None:
    (tmp_path / ".a.npy.wellseq-new").write_bytes(b"half")
    (tmp_path / ".a.npy.wellseq-lock").write_bytes(b"")
    write_whole(tmp_path / "a.npy", [b"whole"])
    assert beside(tmp_path) == ["a.npy"]


def test_two_writers_at_once_are_told(tmp_path: Path) -> None:
    with (
        sole_writer(tmp_path / ".a.npy.wellseq-lock"),
        pytest.raises(CannotPublish, match="another wellseq"),
    ):
        write_whole(tmp_path / "a.npy", [b"new"])
    assert not os.path.lexists(tmp_path / "a.npy")
