"""Open buffers → what the engine says of them; the files on the disk stand for whatever is closed.

A change in one buffer concerns every open sequence that reads it: used files and trap files count.
"""

from __future__ import annotations

import os
from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property
from pathlib import Path

from wellseq.base.finding import Mistake
from wellseq.base.unsaved import unsaved
from wellseq.checks.case import Case
from wellseq.checks.judging import judge
from wellseq.editor.names import Index
from wellseq.emit.examined import Examined, examined
from wellseq.model.library import beside
from wellseq.model.trap import Trap
from wellseq.model.trap_file import read_trap
from wellseq.pipeline import compile_file
from wellseq.review.picture import Picture, picture
from wellseq.text.parse import parse
from wellseq.text.read import decode, read_bytes
from wellseq.text.tree import Statement, Tree


@dataclass(frozen=True)
class Looked:
    """A sequence as the engine saw it last: its text then, the case, and what a report says."""

    text: str
    case: Case
    thing: Examined
    reads: frozenset[str]

    @cached_property
    def picture(self) -> Picture:
        """Figures per step, made when somebody asks."""
        return picture(self.case)


@dataclass
class Documents:
    """Every open buffer by its path, and what was found in each sequence among them."""

    texts: dict[str, str] = field(default_factory=dict)
    looked: dict[str, Looked] = field(default_factory=dict)
    _trees: dict[str, tuple[str, Tree]] = field(default_factory=dict)
    _indices: dict[str, tuple[Tree, Index]] = field(default_factory=dict)
    _traps: dict[str, tuple[str, Trap | None]] = field(default_factory=dict)

    def set(self, path: str, text: str) -> None:
        """A buffer was opened or changed."""
        self.texts[path] = text

    def close(self, path: str) -> None:
        """A buffer was closed: its file on the disk counts again."""
        self.texts.pop(path, None)
        self.looked.pop(path, None)

    def text(self, path: str) -> str | None:
        """The text of a file, from its buffer or else from the disk; None when there is none."""
        if path in self.texts:
            return self.texts[path]
        content = read_bytes(Path(path), path)
        text = content if isinstance(content, Mistake) else decode(content, path)
        return None if isinstance(text, Mistake) else text

    def tree(self, path: str) -> Tree:
        """The tree of a file; an empty one when it cannot be read."""
        text = self.text(path) or ""
        if path not in self._trees or self._trees[path][0] != text:
            self._trees[path] = text, parse(text, path)
        return self._trees[path][1]

    def index(self, path: str) -> Index:
        """The names of a file: where each is defined and mentioned."""
        tree = self.tree(path)
        if path not in self._indices or self._indices[path][0] is not tree:
            self._indices[path] = tree, Index(tree)
        return self._indices[path][1]

    def uses(self, path: str) -> list[str]:
        """The files that a file uses, by their paths."""
        return [beside(path, written) for written in self.index(path).uses]

    def trap(self, path: str) -> Trap | None:
        """The trap of a sequence, None when it names none or the file is wrong."""
        written = self.index(path).trap
        file = beside(path, written) if written else self._trap_of_users(path)
        if not file:
            return None
        text = self.text(file) or ""
        if file not in self._traps or self._traps[file][0] != text:
            with unsaved(self.buffers()):
                self._traps[file] = text, read_trap(Path(file), file)[0]
        return self._traps[file][1]

    def _trap_of_users(self, path: str) -> str:
        """The trap of an open sequence that reads this file."""
        for looked in self.looked.values():
            if os.path.realpath(path) in looked.reads and looked.case.trap is not None:
                return looked.case.trap.file
        return ""

    def buffers(self) -> Mapping[Path, bytes]:
        """What stands for files while their buffers are open."""
        return {
            Path(path): text.encode("utf-8", "surrogatepass") for path, text in self.texts.items()
        }

    def look(self, path: str) -> Looked:
        """Examine one open file by its buffer and those of the files that it reads."""
        text = self.texts.get(path, "")
        with unsaved(self.buffers()):
            if path.endswith(".well") and self._is_sequence(path):
                case = compile_file(path, shown=path)
            else:
                case = self._alone(path)
        # A file that cannot be read just now is read again when it changes.
        before = self.looked[path].reads if path in self.looked else frozenset()
        index = self.index(path)
        named = [*index.uses, *([index.trap] if index.trap else [])]
        files = [*(source.shown for source in case.sources), *(beside(path, one) for one in named)]
        reads = before | {os.path.realpath(file) for file in files}
        looked = Looked(text, case, examined(case), reads)
        self.looked[path] = looked
        return looked

    def _is_sequence(self, path: str) -> bool:
        """Whether a text is more than a file for others; one with mistakes counts as a sequence."""
        tree = self.tree(path)
        verbs = [
            one.verb.text for one in tree.statements if isinstance(one, Statement) and one.verb
        ]
        return bool(tree.mistakes) or "sequence" in verbs

    def _alone(self, path: str) -> Case:
        """What can be said of a file by itself: a trap file, or a file for others to use."""
        if path.endswith(".toml"):
            return judge(Case(Path(path), path, mistakes=read_trap(Path(path), path)[1]))
        # Files of rules are judged where they apply: with a sequence and its trap.
        mistakes = self.tree(path).mistakes if path.endswith(".well") else ()
        return judge(Case(Path(path), path, mistakes=mistakes))

    def concerned(self, path: str) -> list[str]:
        """The open sequences to examine when a buffer changed: itself, and all that read it."""
        real = os.path.realpath(path)
        others = [
            other for other, looked in self.looked.items() if other != path and real in looked.reads
        ]
        return [path, *others]
