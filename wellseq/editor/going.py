"""A name in a file → where it is defined, and everywhere it is mentioned."""

from __future__ import annotations

import os
import re
from collections.abc import Iterator
from pathlib import Path

from wellseq.base.names import RESERVED, normal
from wellseq.base.place import Place
from wellseq.base.quantity import QuantityError, unit_of
from wellseq.base.unsaved import unsaved
from wellseq.editor.documents import Documents
from wellseq.editor.names import Item, Symbol
from wellseq.emit.excerpt import lines_of
from wellseq.model.library import BROUGHT, beside
from wellseq.model.written import is_name
from wellseq.pipeline import compile_file, table_hash
from wellseq.review.tidying import files_of
from wellseq.text.tree import Statement, String

FILES_MAX = 2000
"""The most files that are looked through for mentions of a name that others may use."""
_NAMED = re.compile(r'^(\s*name\s*=\s*)"([^"]*)"')


class CannotRename(Exception):
    """A name stays as it is; the sentence says why."""


def definition(
    documents: Documents, path: str, line: int, column: int
) -> tuple[Place, Place] | None:
    """The place of a name where it is defined, and of the whole definition."""
    index = documents.index(path)
    for text, place in index.label_mentions:
        if place.line == line and place.column <= column <= place.end_column:
            label = index.labels.get(text)
            return (label, label) if label is not None else None
    for item in index.statements:
        written = _file_named(item, line, column)
        if written:
            file = Place(beside(path, written))
            return file, file
    found = symbol_at(documents, path, line, column)
    if found is not None:
        return found.place, found.statement
    mention = index.mention_at(line, column)
    return _in_trap(documents, path, mention.name) if mention is not None else None


def _file_named(item: Item, line: int, column: int) -> str:
    """The path of a `use` or `trap` when a spot is in it."""
    if not isinstance(item, Statement) or item.verb is None:
        return ""
    first = item.operands[0] if item.operands else None
    if item.verb.text not in ("use", "trap") or not isinstance(first, String):
        return ""
    place = first.place
    return first.text if place.line == line and place.column <= column <= place.end_column else ""


def symbol_at(documents: Documents, path: str, line: int, column: int) -> Symbol | None:
    """What the name at a spot means, in this file or in one that it uses."""
    index = documents.index(path)
    mention = index.mention_at(line, column)
    if mention is None:
        return None
    own = index.own(mention.name, mention.around)
    if own is not None:
        return own
    for file in documents.uses(path):
        there = documents.index(file).own(mention.name)
        if there is not None and there.sort in BROUGHT:
            return there
    return None


def _in_trap(documents: Documents, path: str, name: str) -> tuple[Place, Place] | None:
    trap = documents.trap(path)
    if trap is None:
        return None
    for number, line in enumerate(lines_of(documents.text(trap.file) or ""), start=1):
        match = _NAMED.match(line)
        if match and normal(match[2]) == name:
            column = len(match[1]) + 2
            place = Place(trap.file, number, column, number, column + len(match[2]))
            return place, place
    return None


def mentions(documents: Documents, path: str, line: int, column: int) -> list[Place]:
    """Every place where the name at a spot stands, in all files that may mean it."""
    symbol = symbol_at(documents, path, line, column)
    if symbol is None:
        return []
    home = symbol.place.file
    found = list(documents.index(home).mentions_of(symbol))
    if symbol.within is None and symbol.sort in BROUGHT:
        for other in _users(documents, path, home):
            index = documents.index(other)
            found += [
                mention.place
                for mention in index.mentions
                if mention.name == symbol.name and index.own(mention.name, mention.around) is None
            ]
    return sorted(found)


def _users(documents: Documents, path: str, home: str) -> Iterator[str]:
    """The files that use another one: open ones, and those in the folder of the trap."""
    trap = documents.trap(path)
    folder = os.path.dirname(trap.file if trap is not None else home)
    files = dict.fromkeys(documents.texts)
    for number, file in enumerate(files_of([folder])):
        if number >= FILES_MAX:
            raise CannotRename(f"more than {FILES_MAX} files stand in {folder}")
        files.setdefault(file)
    real = os.path.realpath(home)
    for file in files:
        if os.path.realpath(file) == real or not file.endswith(".well"):
            continue
        if real in {os.path.realpath(used) for used in documents.uses(file)}:
            yield file


def rename(documents: Documents, path: str, line: int, column: int, new: str) -> list[Place]:
    """The places to write a new name at.

    Raises CannotRename where the name cannot be changed, the new one cannot be a name, or where
    the files would say something else afterwards.
    """
    new = normal(new)
    places = mentions(documents, path, line, column)
    if not places:
        raise CannotRename("no name of a sequence stands here; names of the trap are in its file")
    _must_be_free(new)
    texts = {file: documents.text(file) or "" for file in sorted({place.file for place in places})}
    changed = {file: renamed(text, places, file, new) for file, text in texts.items()}
    sequences = sorted({path, *texts})
    before = _hashes(documents, sequences, {})
    if _hashes(documents, sequences, changed) != before:
        raise CannotRename(f"with '{new}' in its place, the files would say something else")
    return places


def renamed(text: str, places: list[Place], file: str, new: str) -> str:
    """A text with a new name at these places."""
    mark = "\ufeff" if text.startswith("\ufeff") else ""
    lines = re.split(r"(\r\n|\n|\r)", text.removeprefix("\ufeff"))
    for place in sorted((one for one in places if one.file == file), reverse=True):
        line = lines[2 * (place.line - 1)]
        lines[2 * (place.line - 1)] = line[: place.column - 1] + new + line[place.end_column - 1 :]
    return mark + "".join(lines)


def _must_be_free(new: str) -> None:
    if not is_name(new):
        raise CannotRename(f"'{new}' is not spelled like a name: letters, digits and '_'")
    if new in RESERVED or new == "others":
        raise CannotRename(f"'{new}' is a word of the language")
    try:
        unit_of(new)
    except QuantityError:
        return
    raise CannotRename(f"'{new}' is a unit")


def _hashes(
    documents: Documents, paths: list[str], changed: dict[str, str]
) -> list[tuple[str | None, int]]:
    """The table and the number of mistakes of each file, with some texts changed."""
    buffers = dict(documents.buffers())
    buffers |= {Path(file): text.encode() for file, text in changed.items()}
    found = []
    with unsaved(buffers):
        for path in paths:
            hash_ = table_hash(path)
            count = 0 if hash_ else sum(one.blocks for one in compile_file(path).findings)
            found.append((hash_, count))
    return found
