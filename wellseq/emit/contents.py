"""Everything that a published folder holds but its manifest, found by looking into two folders.

A module of `files/` or `also/` has `write(key)` which yields (path inside the folder, its bytes in
pieces); pieces are made while they are written, so a long table never stands in memory as a whole.
What is in `files/` is always written, what is in `also/` when it is asked for by name; a module
there has `missing()` too, which says what must be installed first.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from importlib import import_module
from pathlib import Path

from wellseq.emit.keys import Key


def contents(key: Key, also: Iterable[str] = ()) -> Iterator[tuple[str, Iterable[bytes]]]:
    """Path and content of every file, in the order of the modules' names."""
    for name in file_kinds():
        yield from import_module(f"wellseq.emit.files.{name}").write(key)
    for name in sorted(set(also)):
        yield from import_module(f"wellseq.emit.also.{name}").write(key)


def missing(also: Iterable[str]) -> str:
    """What keeps further forms from being written, as a sentence; empty when nothing does."""
    for name in sorted(set(also)):
        if name not in also_kinds():
            return f"'{name}' is no form of a table: {', '.join(also_kinds())}"
        needed: str = import_module(f"wellseq.emit.also.{name}").missing()
        if needed:
            return needed
    return ""


def file_kinds() -> tuple[str, ...]:
    """The names of the kinds of file that are always written, in alphabetical order."""
    return _modules("files")


def also_kinds() -> tuple[str, ...]:
    """The names of the further forms of a table, in alphabetical order."""
    return _modules("also")


def _modules(folder: str) -> tuple[str, ...]:
    files = (Path(__file__).parent / folder).glob("*.py")
    return tuple(sorted(file.stem for file in files if file.stem != "__init__"))
