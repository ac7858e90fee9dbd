"""A short run of every trial; the long ones are one command each, in the head of its file."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import flips
import folders

HERE = Path(__file__).parent


def test_no_kill_tears_a_folder() -> None:
    # In a process of its own: it forks, and this one may have threads.
    done = subprocess.run(
        [sys.executable, "-W", "ignore", str(HERE / "kills.py"), "10", "3"],
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stdout + done.stderr
    assert "torn" not in done.stdout
    # Both folders were met: the kills did not all come at the same point of a build.
    assert "first" in done.stdout
    assert "second" in done.stdout


def test_no_changed_byte_goes_unseen(tmp_path: Path) -> None:
    changed, missed = flips.trial(tmp_path, stride=997)
    assert changed > 60
    assert missed == []


def test_no_damaged_folder_makes_the_reader_fail(tmp_path: Path) -> None:
    names, faults = folders.trial(tmp_path, 60, seed=5)
    assert faults == []
    # The damage reaches every part of the reader, not only its hashes.
    assert {"file-altered", "manifest-unsound", "table-unsound", "form-unsound"} <= set(names)
    assert names["nothing found"] < 8
