"""Where the exact copies of the sources stand inside a published folder.

The copies keep their places relative to one another, so the folder's own copy of the sequence
compiles again.  Names are taken relative to the sequence file's folder, so that they do not depend
on where the program was started.
"""

from __future__ import annotations

import posixpath
from collections.abc import Iterable
from dataclasses import dataclass

from wellseq.checks.case import Case

FOLDER = "sources"
_ANYWHERE = "/" + "/".join(["up"] * 64)


@dataclass(frozen=True, slots=True)
class Copy:
    """One source: name as shown, path inside the folder and as seen from the sequence, bytes."""

    shown: str
    path: str
    written_as: str
    content: bytes


def written_names(case: Case) -> dict[str, str]:
    """File name as shown → path as seen from the sequence, which no working directory changes."""
    return {copy.shown: copy.written_as for copy in copies(case)}


def copies(case: Case) -> tuple[Copy, ...]:
    """Copies of the sequence (first), of what it uses, and of the trap file."""
    if case.sequence is None or case.trap is None:
        return ()
    files = {source.shown: source.content for source in case.sequence.sources}
    if case.trap.file and case.trap.file not in files:
        files[case.trap.file] = case.trap.source.encode("utf-8")
    main = case.sequence.file if case.sequence.file in files else next(iter(files), "")
    home = posixpath.dirname(_plain(main))
    names = {shown: _relative(_plain(shown), home) for shown in files}
    ups = max((name.split("/").count("..") for name in names.values()), default=0)
    below = _free_name(names.values())
    order = sorted(files, key=lambda shown: (shown != main, names[shown]))
    found = []
    for shown in order:
        inside = posixpath.normpath(posixpath.join(*[below] * ups, names[shown]))
        found.append(Copy(shown, f"{FOLDER}/{inside}", names[shown], files[shown]))
    return tuple(found)


def _plain(shown: str) -> str:
    return posixpath.normpath(shown)


def _relative(shown: str, home: str) -> str:
    """The path from the sequence's folder; `..` at its start is kept, the real folders unknown."""
    if posixpath.isabs(shown) or posixpath.isabs(home):
        return posixpath.relpath(shown, home) if posixpath.isabs(home) else shown.lstrip("/")
    return posixpath.relpath(posixpath.join(_ANYWHERE, shown), posixpath.join(_ANYWHERE, home))


def _free_name(names: Iterable[str]) -> str:
    """A folder name for the sequence's own folder that no source uses for another."""
    taken = {part for name in names for part in name.split("/")}
    name = "here"
    while name in taken:
        name += "_"
    return name
