"""A folder with the files that `wellseq new` writes, and a way to run the command line."""

from __future__ import annotations

import shutil
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import pytest

from wellseq.base.data import data_folder
from wellseq.cli.main import main


@dataclass(frozen=True, slots=True)
class Ran:
    """What a command did: exit status, standard output, standard error."""

    status: int
    out: str
    err: str


@pytest.fixture
def bench(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A copy of the files to start from; the working directory."""
    start = data_folder("grammar") / "start"
    folder = tmp_path / "bench"
    shutil.copytree(start, folder)
    monkeypatch.chdir(folder)
    return folder


@pytest.fixture
def run(capsys: pytest.CaptureFixture[str]) -> Callable[..., Ran]:
    """Run the command line in this process."""

    def ran(*arguments: str) -> Ran:
        capsys.readouterr()
        code = main(arguments)
        captured = capsys.readouterr()
        return Ran(code, captured.out, captured.err)

    return ran
