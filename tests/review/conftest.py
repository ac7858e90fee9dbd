"""A repository with the files to start from, and a way to run git in it."""

from __future__ import annotations

import os
import shutil
import subprocess
from collections.abc import Callable
from pathlib import Path

import pytest

from wellseq.base.data import data_folder
from wellseq.cli.main import main


@pytest.fixture
def bench(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A copy of the files to start from; the working directory."""
    folder = tmp_path / "bench"
    shutil.copytree(data_folder("grammar") / "start", folder)
    monkeypatch.chdir(folder)
    return folder


@pytest.fixture
def git(bench: Path, tmp_path: Path) -> Callable[..., str]:
    """Run git in the bench, which is a repository with one commit."""
    environment = {
        **os.environ,
        **{f"GIT_{who}_NAME": "someone" for who in ("AUTHOR", "COMMITTER")},
        **{f"GIT_{who}_EMAIL": "someone@invalid" for who in ("AUTHOR", "COMMITTER")},
        "HOME": str(tmp_path),
    }

    def run(*words: str) -> str:
        done = subprocess.run(
            ["git", *words], cwd=bench, env=environment, capture_output=True, text=True, check=True
        )
        return done.stdout

    run("init", "--quiet")
    run("add", ".")
    run("commit", "--quiet", "-m", "start")
    return run


@pytest.fixture
def wellseq(capsys: pytest.CaptureFixture[str]) -> Callable[..., tuple[int, str, str]]:
    """Run the command line in this process: status, standard output, standard error."""

    def run(*words: str) -> tuple[int, str, str]:
        capsys.readouterr()
        code = main(words)
        captured = capsys.readouterr()
        return code, captured.out, captured.err

    return run


@pytest.fixture
def spoil(bench: Path) -> Callable[[str, str], None]:
    """Replace a piece of the sequence."""

    def replace(old: str, new: str, file: str = "first.well") -> None:
        text = (bench / file).read_bytes().decode()
        assert old in text
        (bench / file).write_bytes(text.replace(old, new, 1).encode())

    return replace
