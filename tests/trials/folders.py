"""Published folders damaged at random, with hashes that fit again: findings, never an exception.

    python tests/trials/folders.py [FOLDERS] [SEED]

Each folder gets one to four changes: bytes, lines, cells, numbers of the manifest or of the claims,
pieces cut out or doubled.  Half of them are sealed again, so that the meaning is read and not only
the hashes.
"""

from __future__ import annotations

import copy
import json
import random
import shutil
import sys
import tempfile
import time
import traceback
from collections import Counter
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
HERE = [str(ROOT), str(ROOT / "tests" / "emit"), str(ROOT / "tests" / "reread")]
sys.path[:0] = [path for path in HERE if path not in sys.path]

import made_case  # noqa: E402
from resealing import canonical, reseal  # noqa: E402

from wellseq.emit.publish import write_folder  # noqa: E402
from wellseq.reread.folder import CHECKS, verify  # noqa: E402

NUMBERS = [0, -1, 1, 2**31, 2**62, 2**70, 0.5, -0.0, 1e308, 5e-324]
WORDS = ["", "x", "1/0", "1/3", "lv1", "hv", "..", "/", "block-1-run.csv", "closed", "nan"]
VALUES = [*NUMBERS, *WORDS, None, True, [], {}, [[]], [1, 2], {"a": 1}]
SECONDS_MAX = 2.0


def trial(home: Path, folders: int, seed: int) -> tuple[Counter[str], list[str]]:
    """(names of findings, with how often; faults): an exception, a strange name, or over 2 s."""
    chance = random.Random(seed)
    whole = home / "whole"
    write_folder(made_case.cleared(), whole, verify, ("hdf5", "npz"))
    kept = {path: path.read_bytes() for path in sorted(whole.rglob("*")) if path.is_file()}
    work = home / "work"
    shutil.copytree(whole, work)
    places = {path: work / path.relative_to(whole) for path in kept}
    names: Counter[str] = Counter()
    faults: list[str] = []
    for number in range(folders):
        changed = {chance.choice(list(places)) for _ in range(chance.randint(1, 3))}
        for path in sorted(changed):
            places[path].write_bytes(damaged(chance, path.name, kept[path]))
        try:
            if chance.random() < 0.5:
                _reseal(work)
            start = time.process_time()
            found = {finding.name for finding in verify(work)}
            took = time.process_time() - start
            if not found <= set(CHECKS) or took > SECONDS_MAX:
                faults.append(f"folder {number}: {sorted(found)} in {took:.1f} s")
            names.update(found or {"nothing found"})
        except Exception:
            faults.append(f"folder {number}: {traceback.format_exc()}")
        for path in (*changed, whole / "manifest.json", *_descriptions(whole)):
            places[path].write_bytes(kept[path])
    return names, faults


def _descriptions(whole: Path) -> list[Path]:
    return sorted(whole.glob("*-metadata.json"))


def _reseal(folder: Path) -> None:
    """Make the hashes fit as far as what is there still can be read by the forger's tool."""
    try:
        reseal(folder)
    except (ValueError, LookupError, TypeError, AttributeError, OSError):
        return


def damaged(chance: random.Random, name: str, content: bytes) -> bytes:
    """A file with something wrong in it."""
    if name.endswith(".json") and chance.random() < 0.7:
        return _changed_json(chance, content)
    if name.endswith(".csv") and chance.random() < 0.6:
        return _changed_cells(chance, content)
    for _ in range(chance.randint(1, 4)):
        at, length = chance.randrange(len(content) + 1), chance.choice([1, 1, 2, 8, 100])
        kind = chance.randrange(4)
        piece = bytes(chance.randrange(256) for _ in range(min(length, 8)))
        middle = (piece, b"", content[at : at + length] * 2, b"\0" * length)[kind]
        content = content[:at] + middle + content[at + length :]
    return content


def _changed_json(chance: random.Random, content: bytes) -> bytes:
    document = json.loads(content)
    for _ in range(chance.randint(1, 3)):
        inner: object = document
        while isinstance(inner, dict | list) and inner:
            key = chance.choice(list(inner) if isinstance(inner, dict) else range(len(inner)))
            deeper = inner[key]
            if not isinstance(deeper, dict | list) or not deeper or chance.random() < 0.15:
                inner[key] = _value(chance, deeper)
                break
            inner = deeper
    return canonical(document)


def _value(chance: random.Random, before: object) -> object:
    if isinstance(before, int | float) and not isinstance(before, bool) and chance.random() < 0.5:
        return before + chance.choice([1, -1, 1e-3, -before, before])
    return copy.deepcopy(chance.choice(VALUES))


def _changed_cells(chance: random.Random, content: bytes) -> bytes:
    rows = [row.split(",") for row in content.decode().split("\r\n")]
    for _ in range(chance.randint(1, 4)):
        row = chance.choice(rows)
        at = chance.randrange(len(row))
        cell = row[at]
        choices = [
            str(chance.choice(NUMBERS)),
            chance.choice(WORDS),
            cell[:-1],
            cell * 2,
            f"{cell}0",
        ]
        row[at] = chance.choice(choices)
    if chance.random() < 0.2:
        rows.insert(chance.randrange(len(rows)), list(chance.choice(rows)))
    return "\r\n".join(map(",".join, rows)).encode()


def main() -> int:
    """Run the long trial and print its figures; 1 when there was a fault."""
    folders = int(sys.argv[1]) if len(sys.argv) > 1 else 50_000
    seed = int(sys.argv[2]) if len(sys.argv) > 2 else 1
    with tempfile.TemporaryDirectory() as home:
        names, faults = trial(Path(home), folders, seed)
    print(f"{folders} damaged folders, {len(faults)} faults;", dict(names.most_common()))
    print("".join(faults[:3]), end="")
    return int(bool(faults))


if __name__ == "__main__":
    sys.exit(main())
