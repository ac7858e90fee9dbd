"""Texts that stand for files while they are not on the disk: standard input, an editor's buffers.

Inside `unsaved` every reader of the house is given these bytes in the place of the file's own, so
that one engine serves command line and editor alike, used files and trap files included.
"""

from __future__ import annotations

import os
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from contextvars import ContextVar
from pathlib import Path

_BUFFERS: ContextVar[Mapping[str, bytes] | None] = ContextVar("buffers", default=None)


@contextmanager
def unsaved(buffers: Mapping[Path, bytes]) -> Iterator[None]:
    """Inside, these paths have these bytes; links on the way to them are followed first."""
    token = _BUFFERS.set({os.path.realpath(path): content for path, content in buffers.items()})
    try:
        yield
    finally:
        _BUFFERS.reset(token)


def buffer_of(path: Path) -> bytes | None:
    """The bytes that stand for a file, None when the file stands for itself."""
    buffers = _BUFFERS.get()
    if not buffers:
        return None
    try:
        return buffers.get(os.path.realpath(path))
    except (OSError, ValueError):
        return None
