"""The page of recipes: every block is run as it stands, in a repository made for it."""

from __future__ import annotations

import http.server
import json
import os
import re
import shutil
import subprocess
import sys
import threading
from collections.abc import Iterator
from pathlib import Path

import pytest

import wellseq
from wellseq.base.data import data_folder

PAGE = (data_folder("grammar") / "RECIPES.md").read_text("utf-8")
BLOCKS = dict(re.findall(r"^```\w+ (\S+)\n(.*?)^```", PAGE, re.M | re.S))
ROOT = str(Path(wellseq.__file__).parents[1])


@pytest.fixture
def repository(tmp_path: Path) -> Path:
    """A git repository with `sequences/`, committed, and `wellseq` on the path."""
    shutil.copytree(data_folder("grammar") / "start", tmp_path / "sequences")
    programs = tmp_path / "programs"
    programs.mkdir()
    (programs / "wellseq").write_text(f'#!/bin/sh\nexec "{sys.executable}" -m wellseq "$@"\n')
    (programs / "wellseq").chmod(0o755)
    (tmp_path / ".gitignore").write_text("programs\nhome\n")
    (tmp_path / "home").mkdir()
    for words in (["init", "--quiet"], ["add", "."], ["commit", "--quiet", "-m", "start"]):
        done(tmp_path, "git", *words)
    return tmp_path


def done(folder: Path, *words: str, **more: str) -> subprocess.CompletedProcess[str]:
    """Run a program in the repository."""
    names = {
        f"GIT_{who}_{what}": "someone" for who in ("AUTHOR", "COMMITTER") for what in ("NAME",)
    }
    mails = {f"GIT_{who}_EMAIL": "someone@invalid" for who in ("AUTHOR", "COMMITTER")}
    environment = {
        **os.environ,
        **names,
        **mails,
        **more,
        "HOME": str(folder / "home"),
        "PATH": f"{folder / 'programs'}:{os.environ['PATH']}",
        "PYTHONPATH": ROOT,
    }
    return subprocess.run(
        words, cwd=folder, env=environment, capture_output=True, text=True, check=False
    )


def spoil(repository: Path, old: str, new: str) -> None:
    path = repository / "sequences" / "first.well"
    text = path.read_text("utf-8")
    assert old in text
    path.write_text(text.replace(old, new, 1), "utf-8")


def shell(repository: Path, name: str, **more: str) -> subprocess.CompletedProcess[str]:
    return done(repository, "sh", "-c", BLOCKS[name], **more)


def test_every_block_is_run_here() -> None:
    here = Path(__file__).read_text("utf-8")
    assert len(BLOCKS) >= 8
    for name in BLOCKS:
        assert f'"{name}"' in here, name


def test_the_hook_refuses_what_does_not_pass(repository: Path) -> None:
    hook = repository / ".git" / "hooks" / "pre-commit"
    hook.write_text(BLOCKS["pre-commit"])
    hook.chmod(0o755)
    spoil(repository, "hold for 10 s", "hold for 500 s; throw E3 to nowhere")
    refused = done(repository, "git", "commit", "-q", "-a", "-m", "wrong")
    assert refused.returncode != 0
    assert "[unknown-name]" in refused.stdout + refused.stderr
    spoil(repository, "500 s; throw E3 to nowhere", "11   s")
    refused = done(repository, "git", "commit", "-q", "-a", "-m", "untidy")
    assert "would change" in refused.stdout + refused.stderr
    spoil(repository, "11   s", "11 s")
    assert done(repository, "git", "commit", "-q", "-a", "-m", "right").returncode == 0


GOT: list[bytes] = []


class _Receiver(http.server.BaseHTTPRequestHandler):
    def do_POST(self) -> None:
        GOT.append(self.rfile.read(int(self.headers["Content-Length"])))
        self.send_response(204)
        self.end_headers()

    def log_message(self, *arguments: object) -> None:
        """Say nothing."""


@pytest.fixture
def receiver() -> Iterator[str]:
    """A server on this machine that takes what is sent to it."""
    GOT.clear()
    with http.server.HTTPServer(("127.0.0.1", 0), _Receiver) as server:
        thread = threading.Thread(target=server.serve_forever, daemon=True)
        thread.start()
        yield f"http://127.0.0.1:{server.server_port}/"
        server.shutdown()
        thread.join()


def test_the_step_hands_findings_over_and_fails_with_them(repository: Path, receiver: str) -> None:
    (repository / "known.list").touch()
    spoil(repository, "wall = 50 V", "wall = 80 V")
    assert shell(repository, "ci-step", SARIF_RECEIVER=receiver).returncode == 1
    (spoilt,) = (json.loads(one)["runs"][0]["results"] for one in GOT)
    assert {one["ruleId"] for one in spoilt} >= {"voltage-out-of-range"}
    accepted = shell(repository, "known")
    assert accepted.returncode == 0, accepted.stderr
    assert shell(repository, "ci-step", SARIF_RECEIVER=receiver).returncode == 0
    assert json.loads(GOT[-1])["runs"][0]["results"][0]["suppressions"]


def test_a_comparison_says_what_changed(repository: Path) -> None:
    assert shell(repository, "compare").returncode == 0
    assert "othing physical changed" in (repository / "change.md").read_text("utf-8")
    spoil(repository, "wall = 50 V", "wall = 40 V")
    assert shell(repository, "compare").returncode == 1
    assert "**worse**" in (repository / "change.md").read_text("utf-8")


def test_make_builds_what_is_older(repository: Path) -> None:
    (repository / "Makefile").write_text(BLOCKS["Makefile"])
    ran = done(repository, "make")
    assert ran.returncode == 0, ran.stderr
    assert (repository / "tables" / "first" / "manifest.json").is_file()
    assert "othing to be done" in done(repository, "make").stdout
    assert done(repository, "make", "check").returncode == 0
    spoil(repository, "wall = 50 V", "wall = 80 V")
    future = (repository / "tables" / "first" / "manifest.json").stat().st_mtime + 10
    os.utime(repository / "sequences" / "first.well", (future, future))
    assert done(repository, "make").returncode != 0


def test_the_other_blocks_do_what_they_say(repository: Path) -> None:
    laid_out = shell(repository, "pipe")
    assert laid_out.returncode == 0
    assert laid_out.stdout.startswith("wellseq 1")
    assert shell(repository, "completion").returncode == 0
    for name in ("wellseq.bash", "_wellseq", "wellseq.fish"):
        assert "wellseq" in (repository / name).read_text("utf-8")


def test_the_group_to_install_is_there() -> None:
    group = re.search(r"wellseq\[(\w+)\]", BLOCKS["install"])
    assert group
    project = (Path(ROOT) / "pyproject.toml").read_text("utf-8")
    assert re.search(rf"^{group[1]} = \[$", project, re.M)
