"""Every byte of a small published folder is changed in turn: the second reader must see each.

    python tests/trials/flips.py [STRIDE]

A folder with all forms is published; then one byte after another is changed in one bit (which one
goes round with the place) and the folder is read.
"""

from __future__ import annotations

import sys
import tempfile
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [path for path in (str(ROOT), str(ROOT / "tests" / "emit")) if path not in sys.path]

import made_case  # noqa: E402

from wellseq.emit.publish import write_folder  # noqa: E402
from wellseq.reread.folder import verify  # noqa: E402


def trial(home: Path, stride: int) -> tuple[int, list[str]]:
    """(bytes changed, those that were not seen) with every `stride`-th byte of the whole folder."""
    folder = home / "out"
    write_folder(made_case.cleared(), folder, verify, ("hdf5", "npz"))
    changed, missed, place = 0, [], 0
    for path in sorted(path for path in folder.rglob("*") if path.is_file()):
        content = path.read_bytes()
        with path.open("r+b") as stream:
            for at in range(-place % stride, len(content), stride):
                _put(stream, at, content[at] ^ (1 << (at % 8)))
                changed += 1
                if not verify(folder):
                    missed.append(f"{path.name} {at}")
                _put(stream, at, content[at])
        place += len(content)
    assert verify(folder) == ()
    return changed, missed


def _put(stream: object, at: int, value: int) -> None:
    stream.seek(at)  # type: ignore[attr-defined]
    stream.write(bytes([value]))  # type: ignore[attr-defined]
    stream.flush()  # type: ignore[attr-defined]


def main() -> int:
    """Run the long trial and print its figures; 1 when a byte was missed."""
    stride = int(sys.argv[1]) if len(sys.argv) > 1 else 1
    with tempfile.TemporaryDirectory() as home:
        changed, missed = trial(Path(home), stride)
    print(f"{changed} bytes changed one at a time, {len(missed)} not seen", *missed[:10])
    return int(bool(missed))


if __name__ == "__main__":
    sys.exit(main())
