"""More than 20,000 damaged files: no exception, nothing slow, no memory, always a place to look at.

The files are compiled by `worker.py` in processes whose address space is bounded, so that a file
that would eat the machine ends as a failure here.  That the examination can fail is shown on calls
that raise, dawdle, say nothing, point beside the file or hoard memory.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
from collections.abc import Sequence
from pathlib import Path

import pytest
from mutations import SEQUENCES, mutated
from worker import Examined, examine

import wellseq
from wellseq.base.place import Place

WORKER = Path(__file__).with_name("worker.py")
ROOT = Path(wellseq.__file__).parent.parent
FRONT = (("sequence", 0, 4500), ("sequence", 4500, 9000))
TRAPS = (("trap", 0, 11_200),)
WHOLE = (("check", 0, 400), ("monsters", 0, 1000))
SECONDS = 400
MEMORY_BYTES = 512 * 2**20


def _run(stages: Sequence[tuple[str, int, int]], folder: Path) -> list[dict]:
    """Run stages side by side, each in its process; their reports."""
    paths = [str(ROOT), *filter(None, [os.environ.get("PYTHONPATH")])]
    environment = {
        **os.environ,
        "PYTHONPATH": os.pathsep.join(paths),
        "WELLSEQ_CACHE": str(folder),
        "OPENBLAS_NUM_THREADS": "1",
    }
    workers = [
        subprocess.Popen(
            [sys.executable, str(WORKER), *map(str, stage)],
            env=environment,
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            text=True,
        )
        for stage in stages
    ]
    reports = []
    try:
        for worker, stage in zip(workers, stages, strict=True):
            out, err = worker.communicate(timeout=SECONDS)
            assert worker.returncode == 0, f"{stage}: {err[-2000:]}"
            reports.append(json.loads(out))
    finally:
        for worker in workers:
            worker.kill()
            worker.wait()
    return reports


def _judge(reports: list[dict], files: int) -> None:
    faults = [fault for report in reports for fault in report["faults"]]
    assert not faults, f"{len(faults)} files:\n" + "\n".join(faults[:20])
    examined = sum(report["sound"] + report["mistaken"] for report in reports)
    assert examined == files
    assert all(report["memory_bytes"] < MEMORY_BYTES for report in reports)


def test_damaged_sequences_are_sound_or_say_what_is_wrong(tmp_path: Path) -> None:
    reports = _run(FRONT, tmp_path)
    _judge(reports, sum(last - first for _, first, last in FRONT))
    # Neither would the test say much if all damage were harmless, nor if all were fatal at once.
    sound = sum(report["sound"] for report in reports)
    assert 100 < sound < 2000


def test_traps_whole_checks_and_monsters_are_sound_or_say_what_is_wrong(tmp_path: Path) -> None:
    reports = _run([*TRAPS, *WHOLE], tmp_path)
    traps, checks, monsters = reports
    _judge(reports, 11_200 + 400 + monsters["sound"] + monsters["mistaken"])
    assert traps["sound"] > 100
    assert checks["sound"] > 0
    assert monsters["mistaken"] > 40


def test_there_are_at_least_twenty_thousand_different_files() -> None:
    assert sum(last - first for _, first, last in (*FRONT, *TRAPS)) >= 20_000
    some = {mutated(number, SEQUENCES) for number in range(1000)}
    assert len(some) > 950
    assert mutated(5, SEQUENCES) == mutated(5, SEQUENCES)


TEXTS = {"a.well": b"wellseq 1\nhold\n"}


def _raises() -> tuple[bool, list[Place]]:
    raise RecursionError("too deep")


def _dawdles() -> tuple[bool, list[Place]]:
    for _ in range(3_000_000):
        pass
    return True, []


@pytest.mark.parametrize(
    ("call", "fault"),
    [
        (_raises, "RecursionError"),
        (_dawdles, "took"),
        (lambda: (False, []), "nothing says why"),
        (lambda: (False, [Place("a.well", 4, 1, 4, 1)]), "line 4"),
        (lambda: (False, [Place("a.well", 0, 1, 1, 1)]), "line 0"),
        (lambda: (False, [Place("a.well", 2, 6, 2, 6)]), "2:6"),
        (lambda: (False, [Place("a.well", 2, 0, 2, 1)]), "2:0"),
        (lambda: (False, [Place("a.well", 2, 1, 2, 7)]), "2:7"),
        (lambda: (False, [Place("a.well", 2, 4, 2, 2)]), "ends before"),
        (lambda: (False, [Place("b.well", 1, 1, 1, 1)]), "no file"),
    ],
)
def test_the_examination_sees_what_is_at_fault(call: object, fault: str) -> None:
    assert fault in examine(call, TEXTS, seconds_max=0.01).fault


def test_the_examination_lets_good_results_pass() -> None:
    sound: Examined = examine(lambda: (True, []), TEXTS)
    assert (sound.fault, sound.sound) == ("", True)
    mistaken = examine(lambda: (False, [Place("a.well", 2, 1, 2, 6)]), TEXTS)
    assert (mistaken.fault, mistaken.sound) == ("", False)


def test_memory_is_bounded() -> None:
    hoard = "import worker; worker.bound_memory(); print(len(bytearray(600 * 2**20)))"
    done = subprocess.run(
        [sys.executable, "-c", hoard],
        env={**os.environ, "PYTHONPATH": os.pathsep.join([str(ROOT), str(WORKER.parent)])},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode != 0
    assert "MemoryError" in done.stderr
