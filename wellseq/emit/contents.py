"""Everything that a published folder holds but its manifest, found by looking into `files/`.

A module there has `write(cleared)` which yields (path inside the folder, its bytes in pieces);
pieces are made while they are written, so a long table never stands in memory as a whole.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from importlib import import_module
from pathlib import Path

from wellseq.checks.judging import Cleared


def contents(cleared: Cleared) -> Iterator[tuple[str, Iterable[bytes]]]:
    """Path and content of every file, in the order of the modules' names."""
    for name in file_kinds():
        yield from import_module(f"wellseq.emit.files.{name}").write(cleared)


def file_kinds() -> tuple[str, ...]:
    """The names of the kinds of file, in alphabetical order."""
    folder = Path(__file__).parent / "files"
    return tuple(sorted(file.stem for file in folder.glob("*.py") if file.stem != "__init__"))
