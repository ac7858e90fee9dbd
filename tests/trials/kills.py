"""A build that replaces an older folder is killed at random instants: old or new, never torn.

    python tests/trials/kills.py [KILLS] [SEED]

A child writes two different folders in turn to one target, as fast as it can; it is killed with
SIGKILL after a random time of up to three builds.  After every kill the target must verify and be,
byte for byte, one of the two; and the next build must clean up whatever was left beside it.
"""

from __future__ import annotations

import os
import random
import signal
import sys
import tempfile
import time
from collections import Counter
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [path for path in (str(ROOT), str(ROOT / "tests" / "emit")) if path not in sys.path]

import made_case  # noqa: E402

from wellseq.emit.publish import write_folder  # noqa: E402
from wellseq.reread.folder import verify  # noqa: E402

FORMS = ("hdf5", "npz")


def everything(folder: Path) -> dict[str, bytes]:
    """Path → bytes of every file of a folder."""
    found = sorted(path for path in folder.rglob("*") if path.is_file())
    return {path.relative_to(folder).as_posix(): path.read_bytes() for path in found}


def trial(home: Path, kills: int, seed: int, forms: tuple[str, ...] = FORMS) -> Counter[str]:
    """How often which folder stood after a kill, how often something was torn or left over."""
    chance = random.Random(seed)
    target = home / "out"
    keys = [made_case.cleared(), made_case.cleared(findings=made_case.findings()[:2])]
    wholes = []
    start = time.perf_counter()
    for key in keys:
        write_folder(key, target, lambda folder: (), forms)
        wholes.append(everything(target))
    build_s = (time.perf_counter() - start) / len(keys)
    counts: Counter[str] = Counter(build_ms=round(build_s * 1e3))
    for _ in range(kills):
        child = os.fork()
        if not child:
            _write_for_ever(keys, target, forms)
        time.sleep(chance.uniform(0.0, 3 * build_s))
        os.kill(child, signal.SIGKILL)
        os.waitpid(child, 0)
        found = everything(target)
        counts["leftovers"] += len(list(home.iterdir())) > 1
        if found not in wholes or verify(target):
            counts["torn"] += 1
        else:
            counts[("first", "second")[wholes.index(found)]] += 1
    write_folder(keys[0], target, verify, forms)
    counts["left at the end"] = len(list(home.iterdir())) - 1
    return counts


def _write_for_ever(keys: list[object], target: Path, forms: tuple[str, ...]) -> None:
    try:
        while True:
            for key in keys:
                write_folder(key, target, lambda folder: (), forms)  # type: ignore[arg-type]
    finally:
        os._exit(1)


def main() -> int:
    """Run the long trial and print its figures; 1 when anything was torn."""
    kills = int(sys.argv[1]) if len(sys.argv) > 1 else 2000
    seed = int(sys.argv[2]) if len(sys.argv) > 2 else 1
    with tempfile.TemporaryDirectory() as home:
        counts = trial(Path(home), kills, seed)
    print(f"{kills} kills:", ", ".join(f"{name} {count}" for name, count in sorted(counts.items())))
    return int(counts["torn"] + counts["left at the end"] > 0)


if __name__ == "__main__":
    sys.exit(main())
