"""File on disk → its text, or the reason why there is none.

The file is opened once and must be a regular file (no link, folder, device or pipe) of UTF-8, no
longer than the caller says; what was read is what everything after works from.
"""

from __future__ import annotations

import os
import re
import stat
from pathlib import Path

from wellseq.base.finding import Mistake
from wellseq.base.place import Place
from wellseq.base.unsaved import buffer_of
from wellseq.text.mistakes import quoted

# A pipe would block the opening, and a link could be put in place between two looks at the path.
_NOFOLLOW = getattr(os, "O_NOFOLLOW", 0) | getattr(os, "O_NONBLOCK", 0)
_BINARY = getattr(os, "O_BINARY", 0) | getattr(os, "O_CLOEXEC", 0)


def read_text(path: Path, shown: str, bytes_max: int) -> str | Mistake:
    """The text exactly as stored, byte order mark and line ends kept; never raises.

    `shown` is the name under which the mistake reports the file.
    """
    content = _bytes_of(path, bytes_max)
    if isinstance(content, str):
        return Mistake("unreadable-file", Place(shown), f"cannot read {quoted(shown)}: {content}")
    try:
        return content.decode("utf-8")
    except UnicodeDecodeError as error:
        return _not_utf8(content, error.start, shown)


def _bytes_of(path: Path, bytes_max: int) -> bytes | str:
    """The content, or the reason why there is none."""
    buffer = buffer_of(path)
    if buffer is not None:
        return buffer if len(buffer) <= bytes_max else _too_long(bytes_max)
    try:
        fault = _fault_of(os.lstat(path), bytes_max)
        if fault:
            return fault
        with open(os.open(path, os.O_RDONLY | _NOFOLLOW | _BINARY), "rb") as stream:
            # The file may have been replaced since it was looked at.
            fault = _fault_of(os.fstat(stream.fileno()), bytes_max)
            content = b"" if fault else stream.read(bytes_max + 1)
    except ValueError:
        return "this is not a file name"
    except FileNotFoundError:
        return "there is no such file"
    except PermissionError:
        return "reading it is not permitted"
    except OSError as error:
        return (error.strerror or "it cannot be opened").lower()
    return fault or (_too_long(bytes_max) if len(content) > bytes_max else content)


def _fault_of(status: os.stat_result, bytes_max: int) -> str:
    if stat.S_ISLNK(status.st_mode):
        return "it is a symbolic link; name the file itself"
    if stat.S_ISDIR(status.st_mode):
        return "it is a folder"
    if not stat.S_ISREG(status.st_mode):
        return "it is a device or a pipe, not a file"
    return _too_long(bytes_max) if status.st_size > bytes_max else ""


def _too_long(bytes_max: int) -> str:
    return f"it is longer than {bytes_max} bytes"


def _not_utf8(content: bytes, offset: int, shown: str) -> Mistake:
    if content[:2] in (b"\xff\xfe", b"\xfe\xff"):
        reason, place = "it is UTF-16", Place(shown)
    else:
        before = re.split(r"\r\n|\n|\r", content[:offset].decode("utf-8").removeprefix("\ufeff"))
        column = len(before[-1]) + 1
        place = Place(shown, len(before), column, len(before), column + 1)
        reason = f"byte 0x{content[offset]:02x} is not UTF-8"
    return Mistake(
        "unreadable-file", place, f"cannot read {quoted(shown)}: {reason}", "save it as UTF-8"
    )
