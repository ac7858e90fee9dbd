"""Copies of the sources keep their places relative to one another."""

from __future__ import annotations

from dataclasses import replace

import made_case
import pytest

from wellseq.emit.files.copies import write
from wellseq.emit.sources import copies
from wellseq.model.sequence import SourceFile


def paths(main: str, trap_file: str, *used: str) -> dict[str, str]:
    case = made_case.case()
    assert case.sequence is not None
    assert case.trap is not None
    trap = case.trap.model_copy(update={"file": trap_file})
    sources = tuple(SourceFile(shown, shown.encode()) for shown in (main, trap_file, *used))
    sequence = replace(case.sequence, file=main, trap=trap, sources=sources)
    moved = replace(case, trap=trap, sequence=sequence)
    return {copy.shown: copy.path.removeprefix("sources/") for copy in copies(moved)}


def test_files_beside_the_sequence_stay_beside_it() -> None:
    assert paths("night.well", "a.trap.toml", "common/gates.well") == {
        "night.well": "night.well",
        "a.trap.toml": "a.trap.toml",
        "common/gates.well": "common/gates.well",
    }


@pytest.mark.parametrize("start", ["", "/home/x/", "../../y/", "here/"])
def test_files_above_the_sequence_stay_above_it(start: str) -> None:
    found = paths(f"{start}runs/night.well", f"{start}a.trap.toml", f"{start}common/gates.well")
    assert list(found.values()) == ["here/night.well", "a.trap.toml", "common/gates.well"]


def test_the_sequence_s_own_folder_gets_a_name_that_no_source_has() -> None:
    found = paths("runs/night.well", "here/a.trap.toml")
    assert found == {"runs/night.well": "here_/night.well", "here/a.trap.toml": "here/a.trap.toml"}


@pytest.mark.parametrize("main", ["night.well", "../night.well", "/x/night.well", "a/b/night.well"])
@pytest.mark.parametrize("trap_file", ["a.trap.toml", "../../a.trap.toml", "/a.trap.toml", "c/a"])
def test_no_copy_lies_outside_the_folder(main: str, trap_file: str) -> None:
    for path in paths(main, trap_file).values():
        assert not path.startswith(("/", "../"))
        assert ".." not in path.split("/")


def test_copies_are_byte_for_byte() -> None:
    found = {path: b"".join(pieces) for path, pieces in write(made_case.cleared())}
    assert found == {
        "sources/night.well": made_case.TEXT.encode(),
        "sources/gorse.trap.toml": made_case.TRAP.encode(),
    }
