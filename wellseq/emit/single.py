"""Pieces of bytes → one new file, whole or not at all: flushed, through no link, over no file."""

from __future__ import annotations

import hashlib
import os
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

from wellseq.emit.lock import NO_FOLLOW, sole_writer
from wellseq.emit.swap import sync_folder


class CannotPublish(Exception):
    """Nothing can be written there; the sentence says why, and nothing was changed."""


@dataclass(frozen=True, slots=True)
class Written:
    """A file as written: its SHA-256 in hexadecimal digits, its length in bytes."""

    sha256: str
    size: int


def write_new(path: Path, pieces: Iterable[bytes]) -> Written:
    """Write and flush a file that must not be there yet; raises OSError."""
    flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | getattr(os, "O_BINARY", 0) | NO_FOLLOW
    digest = hashlib.sha256()
    size = 0
    with os.fdopen(os.open(path, flags, 0o644), "wb") as stream:
        for piece in pieces:
            stream.write(piece)
            digest.update(piece)
            size += len(piece)
        stream.flush()
        os.fsync(stream.fileno())
    return Written(digest.hexdigest(), size)


def write_whole(target: Path, pieces: Iterable[bytes]) -> Written:
    """Write a file under another name and rename it, so that it is there whole or not at all.

    Raises CannotPublish when something of that name is there already, or it cannot be written.
    """
    if target.name in ("", "..") or not target.parent.is_dir():
        raise CannotPublish(f"{target}: there is no folder {target.parent} to write a file in")
    fresh = target.with_name(f".{target.name}.wellseq-new")
    try:
        with sole_writer(target.with_name(f".{target.name}.wellseq-lock")):
            fresh.unlink(missing_ok=True)
            if os.path.lexists(target):
                raise CannotPublish(f"{target}: this is there already; it is left alone")
            try:
                written = write_new(fresh, pieces)
                os.rename(fresh, target)
            finally:
                fresh.unlink(missing_ok=True)
            sync_folder(target.parent)
    except BlockingIOError as error:
        raise CannotPublish(f"{target}: another wellseq is writing this file just now") from error
    except OSError as error:
        raise CannotPublish(f"{target}: {cause(error)}") from error
    return written


def cause(error: OSError) -> str:
    """Why something cannot be written, as the end of a sentence."""
    reason = (error.strerror or str(error) or type(error).__name__).lower()
    return f"it cannot be written: {reason}"
