"""`use`: other files of the trap's tree → their patterns, procedures and lets.

A file is opened once, however often it is used.  Nothing outside the trap's folder is opened, by
whatever path or link; nothing that is no regular file.
"""

from __future__ import annotations

import os
import posixpath
from dataclasses import dataclass, field
from pathlib import Path, PurePosixPath, PureWindowsPath

from wellseq.base.finding import Mistake
from wellseq.base.names import printable
from wellseq.base.place import Place
from wellseq.model.declare import declare
from wellseq.model.headers import Header, read_header
from wellseq.model.reporter import Reporter
from wellseq.model.scope import FileScope
from wellseq.model.sequence import SourceFile
from wellseq.model.trap import Trap
from wellseq.text.parse import parse
from wellseq.text.read import decode, read_bytes
from wellseq.text.tree import String

DEPTH_MAX = 16
"""How far files may use files that use files."""
USES_MAX = 256
"""The most `use` statements of one file."""
BROUGHT = ("let", "pattern", "procedure")


def beside(file: str, path: str) -> str:
    """The name, as shown, of a file whose path is written in another."""
    return posixpath.normpath(posixpath.join(posixpath.dirname(file), path))


def why_not_relative(path: str) -> str:
    """Why a written path is none that may stand in a file; empty when it may."""
    if not path.strip() or "\0" in path:
        return "a path is needed here"
    if "\\" in path:
        return "between folders stands '/'"
    if PurePosixPath(path).is_absolute() or PureWindowsPath(path).drive:
        return "no absolute path may stand here; write it relative to this file"
    return ""


@dataclass(slots=True)
class Chain:
    """The files that led here, from the one that is read for its own sake in: path and name."""

    paths: tuple[Path, ...]
    shown: tuple[str, ...]


@dataclass(slots=True)
class Library:
    """Every file met so far; `root` is the folder that no used file may stand outside of."""

    trap: Trap | None
    trap_path: Path | None
    root: Path
    reporter: Reporter
    sources: list[SourceFile] = field(default_factory=list)
    _opened: dict[Path, FileScope | None] = field(default_factory=dict)

    def bring_all(self, header: Header, scope: FileScope, chain: Chain) -> None:
        """Open every file that a header uses and enter its names into the scope."""
        if len(header.uses) > USES_MAX:
            place = header.uses[USES_MAX].place
            self._refuse(
                place, f"a file uses at most {USES_MAX} others; this and more are left out"
            )
        brought: set[FileScope] = set()
        for use in header.uses[:USES_MAX]:
            there = self._open(use, chain)
            if there is None or there in brought:
                continue
            brought.add(there)
            for item in there.own(*BROUGHT):
                scope.bring(item, use.place)

    def _refuse(self, place: Place, message: str, hint: str = "") -> None:
        self.reporter.add(Mistake("import-refused", place, message, hint))

    def _open(self, use: String, chain: Chain) -> FileScope | None:
        path = self._allowed(use, chain)
        if path is None:
            return None
        shown = beside(chain.shown[-1], use.text)
        if path in chain.paths:
            circle = (*chain.shown[chain.paths.index(path) :], shown)
            self._refuse(use.place, f"files use each other in a circle: {' → '.join(circle)}")
            return None
        if path not in self._opened:
            self._opened[path] = None
            self._opened[path] = self._read(path, shown, use.place, chain)
        return self._opened[path]

    def _allowed(self, use: String, chain: Chain) -> Path | None:
        """The real path of a used file, None when it may not be opened."""
        why = why_not_relative(use.text)
        if why:
            self._refuse(use.place, why, 'use "common/gates.well"')
            return None
        if len(chain.paths) > DEPTH_MAX:
            self._refuse(use.place, f"files use files more than {DEPTH_MAX} deep here")
            return None
        written = printable(use.text)
        try:
            path = Path(os.path.realpath(chain.paths[-1].parent / use.text, strict=True))
        except (OSError, ValueError):
            self._refuse(use.place, f"there is no file '{written}'", "relative to this file")
            return None
        if not path.is_relative_to(self.root):
            hint = "only files in the trap file's folder and below it may be used"
            self._refuse(use.place, f"'{written}' lies outside the trap's folder", hint)
            return None
        if not path.is_file():
            self._refuse(use.place, f"'{written}' is no regular file")
            return None
        return path

    def _read(self, path: Path, shown: str, place: Place, chain: Chain) -> FileScope | None:
        content = read_bytes(path, shown)
        text = content if isinstance(content, Mistake) else decode(content, shown)
        if isinstance(content, Mistake) or isinstance(text, Mistake):
            why = content if isinstance(content, Mistake) else text
            self._refuse(place, f"'{shown}' cannot be used: {getattr(why, 'message', '')}")
            return None
        self.sources.append(SourceFile(shown, content))
        tree = parse(text, shown)
        for mistake in tree.mistakes:
            self.reporter.add(mistake)
        header = read_header(tree, self.reporter)
        self._same_trap(header, path)
        spoilt = tuple(mistake.place for mistake in tree.mistakes)
        scope = FileScope(
            shown, self.trap, self.reporter, used=True, unread=tree.unread, spoilt=spoilt
        )
        self.bring_all(header, scope, Chain((*chain.paths, path), (*chain.shown, shown)))
        declare(scope, header, {})
        return scope

    def _same_trap(self, header: Header, path: Path) -> None:
        """A used file may leave its trap out; it must not be for another one."""
        if header.trap is None or self.trap_path is None:
            return
        other = os.path.realpath(path.parent / header.trap.text)
        if Path(other) != self.trap_path:
            hint = "a used file may leave its `trap` out"
            self._refuse(header.trap.place, "this file is for another trap", hint)
