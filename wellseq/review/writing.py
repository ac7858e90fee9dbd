"""Put new bytes in the place of a file, whole or not at all; links and odd files are left alone."""

from __future__ import annotations

import os
import stat
from contextlib import suppress
from pathlib import Path


class CannotWrite(Exception):
    """A file cannot be written; the sentence says why, and nothing was changed."""


def replace_file(path: Path, content: bytes) -> None:
    """Write a file through a temporary one beside it, keeping the permissions of the old one.

    Raises CannotWrite.
    """
    fresh = path.with_name(f".{path.name}.wellseq-new")
    try:
        mode = _mode(path)
        with suppress(FileNotFoundError):
            fresh.unlink()
        flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | getattr(os, "O_BINARY", 0)
        with os.fdopen(os.open(fresh, flags, 0o644 if mode is None else mode), "wb") as stream:
            stream.write(content)
            stream.flush()
            os.fsync(stream.fileno())
        if mode is not None:
            os.chmod(fresh, mode)
        os.replace(fresh, path)
    except OSError as error:
        with suppress(OSError):
            fresh.unlink()
        reason = (error.strerror or type(error).__name__).lower()
        raise CannotWrite(f"{path} cannot be written: {reason}") from error


def _mode(path: Path) -> int | None:
    """The permissions of a regular file, None when there is none.  Raises CannotWrite."""
    try:
        status = os.lstat(path)
    except FileNotFoundError:
        return None
    if not stat.S_ISREG(status.st_mode):
        raise CannotWrite(f"{path} is no regular file; it is left alone")
    return stat.S_IMODE(status.st_mode)
