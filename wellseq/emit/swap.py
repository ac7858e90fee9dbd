"""Put a finished folder in the place of an older one, so that a kill leaves the old or the new.

Where the kernel can exchange two names at once (Linux, renameat2(2) with RENAME_EXCHANGE) there is
no instant without a folder; elsewhere the old one is renamed aside first, and `restore` of the next
build brings it back if that build died between the two renames.
"""

from __future__ import annotations

import ctypes
import errno
import os
import shutil
import sys
from collections.abc import Callable
from pathlib import Path

_AT_FDCWD = -100
_RENAME_EXCHANGE = 2
_NOT_HERE = (errno.ENOSYS, errno.EINVAL, errno.ENOTSUP, errno.EPERM)


def put_in_place(fresh: Path, target: Path, aside: Path) -> None:
    """Rename `fresh` to `target`; what stood there is at `fresh` or `aside` afterwards.

    Raises OSError with the old folder back at `target`.
    """
    if not target.exists():
        os.rename(fresh, target)
        _settle(target, lambda: os.rename(target, fresh))
    elif exchange(fresh, target):
        _settle(target, lambda: exchange(fresh, target))
    else:
        os.rename(target, aside)
        try:
            os.rename(fresh, target)
        except OSError:
            os.rename(aside, target)
            raise
        _settle(target, lambda: _back(fresh, target, aside))


def _back(fresh: Path, target: Path, aside: Path) -> None:
    os.rename(target, fresh)
    os.rename(aside, target)


def _settle(target: Path, undo: Callable[[], object]) -> None:
    try:
        sync_folder(target.parent)
    except OSError:
        undo()
        raise


def exchange(one: Path, other: Path) -> bool:
    """Exchange two names in one step; False where the system cannot.

    Raises OSError when the system can but did not.
    """
    if not sys.platform.startswith("linux"):
        return False
    rename = getattr(ctypes.CDLL(None, use_errno=True), "renameat2", None)
    if rename is None:
        return False
    paths = (os.fsencode(one), os.fsencode(other))
    if rename(_AT_FDCWD, paths[0], _AT_FDCWD, paths[1], _RENAME_EXCHANGE) == 0:
        return True
    number = ctypes.get_errno()
    if number in _NOT_HERE:
        return False
    raise OSError(number, os.strerror(number), str(other))


def restore(target: Path, aside: Path) -> None:
    """Bring back an old folder that a killed build had put aside and not yet replaced."""
    if aside.is_dir() and not aside.is_symlink() and not target.exists():
        os.rename(aside, target)


def remove(leftover: Path) -> None:
    """Remove a folder of our own, or a link at its name; what cannot be removed stays behind."""
    if leftover.is_symlink():
        leftover.unlink(missing_ok=True)
    else:
        shutil.rmtree(leftover, ignore_errors=True)


def sync_folder(folder: Path) -> None:
    """Flush a folder's entries to the disk (fsync of the folder itself)."""
    if not hasattr(os, "O_DIRECTORY"):
        return
    descriptor = os.open(folder, os.O_RDONLY | os.O_DIRECTORY)
    try:
        os.fsync(descriptor)
    finally:
        os.close(descriptor)
