"""Unit potentials on disk, found again by content: the same geometry is solved only once.

An entry is a plain `.npy` file named by its key, followed by 32 bytes of SHA-256 over the key and
the file; NumPy reads it as it is (what follows the array is ignored), never with pickle.  The key
is the SHA-256 of everything the numbers depend on and of nothing else: no time, no path.  An entry
that is cut short, altered, of another shape or under another name is ignored and built anew.  A
folder that cannot be written is no cache, silently.  Writers move a finished file into place, so
readers and other writers never meet half an entry.  At most 64 entries stay; the oldest go.

Folder: $WELLSEQ_CACHE, else `wellseq` in the platform's cache folder.
"""

from __future__ import annotations

import hashlib
import os
import sys
import tempfile
from collections.abc import Callable, Iterable
from contextlib import suppress
from io import BytesIO
from pathlib import Path

import numpy as np

from wellseq.fields.hermite import FloatArray

ENTRIES_MAX = 64
_DIGEST_BYTES = 32
_HEADER_BYTES_MAX = 4096


def folder() -> Path | None:
    """Where entries are kept, or None when no home folder is known."""
    chosen = os.environ.get("WELLSEQ_CACHE")
    if chosen:
        return Path(chosen)
    with suppress(RuntimeError):
        return _platform_folder() / "wellseq"
    return None


def _platform_folder() -> Path:
    if sys.platform == "win32":
        local = os.environ.get("LOCALAPPDATA")
        return Path(local) if local else Path.home() / "AppData" / "Local"
    if sys.platform == "darwin":
        return Path.home() / "Library" / "Caches"
    named = os.environ.get("XDG_CACHE_HOME", "")
    return Path(named) if os.path.isabs(named) else Path.home() / ".cache"


def key_of(parts: Iterable[str | float | int]) -> str:
    """The SHA-256 (hex) of a sequence of words and numbers; floats count to their last bit."""
    text = "\0".join(
        f"{type(part).__name__}:{part.hex() if isinstance(part, float) else part}" for part in parts
    )
    return hashlib.sha256(text.encode("utf-8")).hexdigest()


def remembered(key: str, shape: tuple[int, ...], build: Callable[[], FloatArray]) -> FloatArray:
    """The float64 array of this key and shape: from the disk if a sound entry is there, else built.

    `build` is called at most once; what it raises passes through.
    """
    place = folder()
    if place is None:
        return build()
    path = place / f"{key}.npy"
    found = _load(path, key, shape)
    if found is None:
        found = build()
        _store(path, key, found)
    return found


def _load(path: Path, key: str, shape: tuple[int, ...]) -> FloatArray | None:
    expected = 8 * int(np.prod(shape)) + _DIGEST_BYTES
    try:
        with path.open("rb") as file:
            # The size is looked at first, so that a planted giant is not read into memory.
            if not 0 < os.fstat(file.fileno()).st_size - expected <= _HEADER_BYTES_MAX:
                return None
            content = memoryview(file.read())
        body, digest = content[:-_DIGEST_BYTES], content[-_DIGEST_BYTES:]
        if _digest(key, body) != bytes(digest):
            return None
        array = np.load(BytesIO(body), allow_pickle=False)
    except (OSError, ValueError):
        return None
    if not isinstance(array, np.ndarray) or array.shape != shape or array.dtype != np.float64:
        return None
    return array


def _store(path: Path, key: str, array: FloatArray) -> None:
    body = BytesIO()
    np.save(body, np.ascontiguousarray(array), allow_pickle=False)
    content = body.getbuffer()
    part = ""
    try:
        path.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        handle, part = tempfile.mkstemp(suffix=".part", dir=path.parent)
        with os.fdopen(handle, "wb") as file:
            file.write(content)
            file.write(_digest(key, content))
        os.replace(part, path)
        _trim(path.parent)
    except OSError:
        if part:
            with suppress(OSError):
                os.unlink(part)


def _digest(key: str, body: memoryview) -> bytes:
    return hashlib.sha256(key.encode("ascii") + body).digest()


def _trim(place: Path) -> None:
    """Remove the oldest files of ours beyond the limit; parts left by a killed writer count."""
    aged = []
    for path in place.iterdir():
        if path.suffix in (".npy", ".part"):
            with suppress(OSError):
                aged.append((path.stat().st_mtime_ns, path.name, path))
    for _, _, path in sorted(aged)[: max(0, len(aged) - ENTRIES_MAX)]:
        with suppress(OSError):
            path.unlink()
