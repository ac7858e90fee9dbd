"""A file → its text in the one layout, given only when the rewrite is proved to be harmless.

Proved means: laid out once more it is the same, its tree is the same, its comments are the same and
in the same order, and the tables that it comes to have the same content id.
"""

from __future__ import annotations

import os
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from difflib import unified_diff
from pathlib import Path

from wellseq.base.finding import Mistake
from wellseq.base.unsaved import unsaved
from wellseq.emit.excerpt import lines_of
from wellseq.pipeline import table_hash
from wellseq.text.parse import parse
from wellseq.text.read import decode, read_bytes
from wellseq.text.same import same
from wellseq.text.tidy import comments, tidy


@dataclass(frozen=True, slots=True)
class Tidied:
    """A file before and after; `refused` says why it is left as it is, when there is a reason.

    `readable` is False when there was no text to lay out.
    """

    shown: str
    before: str
    after: str
    refused: str = ""
    readable: bool = True

    @property
    def changed(self) -> bool:
        """Whether there is anything to write."""
        return not self.refused and self.after != self.before


def tidied(path: Path, shown: str, content: bytes | None = None) -> Tidied:
    """Lay out a file, or `content` in its place; the proof is part of it.  Never raises."""
    data = read_bytes(path, shown) if content is None else content
    text = data if isinstance(data, Mistake) else _text(data, shown)
    if isinstance(text, Mistake):
        return Tidied(shown, "", "", text.message, readable=False)
    after = tidy(text)
    if after is None:
        first = parse(text.removeprefix("\ufeff"), shown).mistakes[0]
        where = f"line {first.place.line}, column {first.place.column}"
        return Tidied(shown, text, text, f"it has mistakes, the first in {where}: {first.message}")
    if after != text:
        doubt = _doubt(path, text, after)
        if doubt:
            return Tidied(shown, text, text, f"{doubt}; it is left as it is")
    return Tidied(shown, text, after)


def _text(data: bytes, shown: str) -> str | Mistake:
    """The text with its byte order mark, which belongs to what is kept."""
    text = decode(data, shown)
    if isinstance(text, str) and data.startswith(b"\xef\xbb\xbf"):
        return f"\ufeff{text}"
    return text


def _doubt(path: Path, before: str, after: str) -> str:
    """What a rewrite would change; empty when it is proved to change nothing."""
    if tidy(after) != after:
        return "its layout does not settle"
    if not same(parse(before, ""), parse(after, "")):
        return "another layout would say something else"
    if comments(before) != comments(after):
        return "a comment would be lost"
    hashes = set()
    for text in (before, after):
        with unsaved({path: text.encode()}):
            hashes.add(table_hash(path))
    return "its table would be another one" if len(hashes) > 1 else ""


def difference(one: Tidied) -> str:
    """What a rewrite would change, as a unified difference."""
    before, after = ([f"{line}\n" for line in lines_of(text)] for text in (one.before, one.after))
    return "".join(unified_diff(before, after, f"{one.shown} as it is", f"{one.shown} tidy"))


def files_of(names: Iterable[str]) -> Iterator[str]:
    """Files as named, and every `*.well` below a folder, in order; hidden folders are left out."""
    for name in names:
        if not os.path.isdir(name):
            yield name
            continue
        for where, folders, files in os.walk(name):
            folders[:] = sorted(one for one in folders if not one.startswith("."))
            for file in sorted(files):
                if file.endswith(".well"):
                    yield Path(where, file).as_posix()
