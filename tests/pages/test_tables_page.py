"""The chapter on tables: its examples are run on a folder that is built, and print what it says."""

from __future__ import annotations

import contextlib
import io
import re
import shutil
import time
from collections.abc import Iterator
from pathlib import Path

import h5py
import numpy as np
import pytest

from wellseq.base.data import data_folder
from wellseq.cli.main import main
from wellseq.emit.contents import also_kinds, contents
from wellseq.reread.folder import verify

PAGE = (data_folder("grammar") / "TABLES.md").read_text("utf-8")
EXAMPLE = re.compile(r"```python\n(.*?)```\n\n```text\n(.*?)```", re.DOTALL)
COMMAND = re.compile(r"^    wellseq (.*)$", re.MULTILINE)


@pytest.fixture(scope="module")
def home(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The files to start from, with every command of the page run in their folder."""
    folder = tmp_path_factory.mktemp("tables") / "first"
    shutil.copytree(data_folder("grammar") / "start", folder)
    commands = COMMAND.findall(PAGE)
    assert [command.split()[0] for command in commands] == ["build", "pour"]
    with contextlib.chdir(folder), contextlib.redirect_stdout(io.StringIO()):
        for command in commands:
            words = [word.strip("'") for word in re.findall(r"'[^']*'|\S+", command)]
            assert main(words) == 0, command
    return folder


def shown() -> Iterator[tuple[str, str]]:
    yield from EXAMPLE.findall(PAGE)


def test_examples_print_what_the_page_says(home: Path) -> None:
    """In order and in one space of names, as somebody would type them."""
    names: dict[str, object] = {}
    count = 0
    with contextlib.chdir(home):
        for code, said in shown():
            told = io.StringIO()
            with contextlib.redirect_stdout(told):
                exec(compile(code, "TABLES.md", "exec"), names)
            assert told.getvalue() == said, code
            count += 1
    assert count == PAGE.count("```python") == 7


def test_another_print_would_be_seen() -> None:
    code, said = next(shown())
    assert "print" in code
    assert said.strip()


def test_every_file_of_a_folder_has_its_line(home: Path) -> None:
    table = PAGE.split("## Blocks")[0]
    for path in (home / "tables").iterdir():
        stem = re.sub(r"^(block|drives)-1-run", r"\1-N-TRIGGER", path.name)
        known = f"`{stem}`" in table or f"`{stem}/`" in table or f"`{path.suffix}`" in table
        assert known or path.name.startswith(("cautions", "report", "rules", "rounded")), path.name


def test_arrays_and_data_sets_are_those_of_the_page(home: Path) -> None:
    section = PAGE.split("## NPZ")[1].split("## HDF5")[0]
    rows = [line.split("|")[1] for line in section.split("\n") if line.startswith("| `")]
    listed = {name for row in rows for name in re.findall(r"`(\w+)`", row)}
    with np.load(home / "tables" / "block-1-run.npz", allow_pickle=False) as held:
        assert set(held.files) == listed
    section = PAGE.split("## HDF5")[1].split("## Drives")[0]
    with h5py.File(home / "tables" / "block-1-run.h5") as file:
        for name in ("tick", "codes/lv1", "states/filament"):
            for attribute in file[name].attrs:
                assert f"`{attribute}`" in section, attribute
        for attribute in file.attrs:
            assert f"`{attribute}`" in section, attribute


def test_forms_and_words_of_the_page_are_those_of_the_program() -> None:
    assert {"hdf5", "npz"} == set(also_kinds())
    assert contents.__doc__
    section = PAGE.split("## A fixed rate")[1].split("## Drafts")[0]
    listed = re.findall(r"^\| `(\w+)` \|", section, re.MULTILINE)
    folder = data_folder("grammar").parent
    poured = (folder / "wellseq" / "emit" / "pour") if (folder / "wellseq").is_dir() else None
    if poured is not None:
        assert set(listed) == {path.stem for path in poured.glob("[a-z]*.py")}
    assert listed


def test_the_folder_of_the_page_verifies_in_bounded_time(home: Path) -> None:
    start = time.process_time()
    assert verify(home / "tables") == ()
    assert time.process_time() - start < 5


def test_lines_of_the_page_are_not_long() -> None:
    code = "".join(code + said for code, said in shown())
    for line in PAGE.split("\n"):
        assert len(line) <= 110 or line.startswith("|") or line in code, line
