"""One writer at a time: a lock beside the target that dies with the process that holds it."""

from __future__ import annotations

import os
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

try:
    import fcntl
except ImportError:
    fcntl = None  # type: ignore[assignment]

NO_FOLLOW = getattr(os, "O_NOFOLLOW", 0) | getattr(os, "O_CLOEXEC", 0)


@contextmanager
def sole_writer(lock: Path) -> Iterator[None]:
    """Hold the lock file for the length of a `with`; the file is gone afterwards.

    Raises BlockingIOError when another process holds it, OSError when it cannot be made.
    """
    descriptor = _locked(lock)
    try:
        yield
    finally:
        # Unlinked while still held: whoever opened it before this sees another file at the name.
        os.unlink(lock)
        os.close(descriptor)


def _locked(lock: Path) -> int:
    if fcntl is None:
        try:
            return os.open(lock, os.O_RDWR | os.O_CREAT | os.O_EXCL, 0o644)
        except FileExistsError as error:
            raise BlockingIOError(*error.args) from error
    descriptor = os.open(lock, os.O_RDWR | os.O_CREAT | NO_FOLLOW, 0o644)
    try:
        fcntl.flock(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
        if not os.path.samestat(os.fstat(descriptor), os.stat(lock)):
            raise BlockingIOError(0, "the lock changed hands", str(lock))
    except FileNotFoundError as error:
        os.close(descriptor)
        raise BlockingIOError(*error.args) from error
    except OSError:
        os.close(descriptor)
        raise
    return descriptor
