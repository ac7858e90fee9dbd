"""A file → its bytes, their text, its tree; what cannot be read is a mistake, not an exception."""

from __future__ import annotations

import os
import stat
from pathlib import Path

from wellseq.base.finding import Mistake
from wellseq.base.names import printable
from wellseq.base.place import Place
from wellseq.base.unsaved import buffer_of
from wellseq.text.parse import SIZE_MAX, parse
from wellseq.text.tree import Tree

_UTF16 = (b"\xff\xfe", b"\xfe\xff")


def read_source(path: Path, shown: str) -> Tree | Mistake:
    """Read one sequence file; `shown` is the name that places and messages bear."""
    data = read_bytes(path, shown)
    if isinstance(data, Mistake):
        return data
    text = decode(data, shown)
    return text if isinstance(text, Mistake) else parse(text, shown)


def read_bytes(path: Path, shown: str) -> bytes | Mistake:
    """The content of a regular file of at most SIZE_MAX bytes, read once.

    The kind is asked before and after opening: opening a device may move something, and a pipe
    that nobody writes to would wait for ever.
    """
    name = printable(shown)
    data = buffer_of(path)
    if data is not None:
        return data if len(data) <= SIZE_MAX else _too_long(shown)
    try:
        kind = _kind(os.stat(path).st_mode)
        if kind:
            return _unreadable(shown, f"'{name}' is {kind}, not a file", "name a text file")
        flags = os.O_RDONLY | getattr(os, "O_NONBLOCK", 0) | getattr(os, "O_BINARY", 0)
        with os.fdopen(os.open(path, flags), "rb") as file:
            kind = _kind(os.fstat(file.fileno()).st_mode)
            if kind:
                return _unreadable(shown, f"'{name}' is {kind}, not a file", "name a text file")
            data = file.read(SIZE_MAX + 1)
    except FileNotFoundError:
        return _unreadable(shown, f"there is no file '{name}'", "look at the spelling of the path")
    except PermissionError:
        return _unreadable(shown, f"'{name}' may not be read", "ask for the right to read it")
    except (OSError, ValueError):
        return _unreadable(shown, f"'{name}' cannot be read", "look at the path and the disk")
    return data if len(data) <= SIZE_MAX else _too_long(shown)


def _too_long(shown: str) -> Mistake:
    message = f"'{printable(shown)}' has more than {SIZE_MAX // 1_000_000} MB"
    return Mistake("too-large", Place(shown), message, "a sequence is a text of statements")


def decode(data: bytes, shown: str) -> str | Mistake:
    """The text of strict UTF-8, without its byte order mark."""
    if data.startswith(_UTF16) or b"\0" in data[:4]:
        message = f"'{printable(shown)}' is not UTF-8; it looks like UTF-16"
        return _unreadable(shown, message, "save the file as UTF-8")
    try:
        return data.decode("utf-8").removeprefix("\ufeff")
    except UnicodeDecodeError as error:
        return _not_utf8(data, error.start, shown)


def _not_utf8(data: bytes, offset: int, shown: str) -> Mistake:
    """Point at the first byte that is no UTF-8 and say what it is in Latin-1."""
    before = data[:offset].decode("utf-8").removeprefix("\ufeff")
    lines = before.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    line, column = len(lines), len(lines[-1]) + 1
    place = Place(shown, line, column, line, column + 1)
    message = f"the byte {data[offset]:#04x} is not UTF-8"
    letter = data[offset : offset + 1].decode("latin-1")
    if letter.isprintable():
        message += f"; the file looks like Latin-1, where it is '{letter}'"
    return Mistake("unreadable-file", place, message, "save the file as UTF-8")


def _kind(mode: int) -> str:
    """What a path is when it is no regular file, else the empty text."""
    if stat.S_ISREG(mode):
        return ""
    if stat.S_ISDIR(mode):
        return "a folder"
    if stat.S_ISFIFO(mode):
        return "a pipe"
    return "a device" if stat.S_ISCHR(mode) or stat.S_ISBLK(mode) else "something else"


def _unreadable(shown: str, message: str, hint: str) -> Mistake:
    return Mistake("unreadable-file", Place(shown), message, hint)
