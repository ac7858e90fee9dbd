"""Answers of costly models, found again by content: the same question is worked out only once.

One file of plain JSON a sequence, in the folder of the field's cache: question (SHA-256 of
everything that the answer depends on) → numbers and words.  Floats are written so that they come
back to the last bit, so an answer from the disk and a new one are the same bytes.  A file that is
cut short, altered or of another make is ignored and built anew; a folder that cannot be written is
no cache, silently.  Of old answers those of the last run stay, and at most `OLD_MAX` others.
"""

from __future__ import annotations

import hashlib
import json
import os
import tempfile
from collections.abc import Callable, Iterable
from contextlib import suppress
from functools import cache
from pathlib import Path
from typing import Any

from wellseq.fields.cache import folder

OLD_MAX = 400
FILES_MAX = 32
BYTES_MAX = 64_000_000
_SUFFIX = ".answers"


class Memory:
    """The answers kept for one thing, named by its content."""

    def __init__(self, about: str) -> None:
        """`about`: what the file is for; whatever differs there shares no answers."""
        place = folder()
        name = hashlib.sha256(f"{_method()}\0{about}".encode()).hexdigest()
        self._path = None if place is None else place / f"{name}{_SUFFIX}"
        self._known: dict[str, Any] = {} if self._path is None else _load(self._path)
        self._used: dict[str, Any] = {}
        self._new = False

    def answer(self, question: Iterable[object], work: Callable[[], Any]) -> Any:
        """The answer to a question, from before or by `work`; lists, numbers, words, None only.

        Tuples come back as lists; `work` is called at most once, and what it raises passes through.
        """
        key = hashlib.sha256("\0".join(map(_spelled, question)).encode()).hexdigest()
        if key in self._used:
            return self._used[key]
        if key in self._known:
            found = self._known[key]
        else:
            found = json.loads(json.dumps(work()))
            self._new = True
        self._used[key] = found
        return found

    def keep(self) -> None:
        """Write what was asked, if any of it is new."""
        if self._path is None or not self._new:
            return
        old = [item for item in self._known.items() if item[0] not in self._used]
        _store(self._path, {**dict(old[-OLD_MAX:]), **self._used})


@cache
def _method() -> str:
    """What works out answers: the text of every model; one that has changed is asked anew."""
    digest = hashlib.sha256()
    for path in sorted(Path(__file__).parent.rglob("*.py")):
        digest.update(path.read_bytes())
    return digest.hexdigest()


def _spelled(part: object) -> str:
    if isinstance(part, float):
        return part.hex()
    if isinstance(part, bytes):
        return part.hex()
    return f"{type(part).__name__}:{part!r}"


def _load(path: Path) -> dict[str, Any]:
    try:
        with path.open("rb") as file:
            if os.fstat(file.fileno()).st_size > BYTES_MAX:
                return {}
            digest, _, body = file.read().partition(b"\n")
        if hashlib.sha256(path.name.encode() + body).hexdigest().encode() != digest:
            return {}
        found = json.loads(body)
    except (OSError, ValueError, RecursionError):
        return {}
    return found if isinstance(found, dict) else {}


def _store(path: Path, answers: dict[str, Any]) -> None:
    body = json.dumps(answers, separators=(",", ":")).encode()
    digest = hashlib.sha256(path.name.encode() + body).hexdigest().encode()
    part = ""
    try:
        path.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        handle, part = tempfile.mkstemp(suffix=".part", dir=path.parent)
        with os.fdopen(handle, "wb") as file:
            file.write(digest + b"\n" + body)
        os.replace(part, path)
        _trim(path.parent)
    except OSError:
        if part:
            with suppress(OSError):
                os.unlink(part)


def _trim(place: Path) -> None:
    aged = []
    for path in place.glob(f"*{_SUFFIX}"):
        with suppress(OSError):
            aged.append((path.stat().st_mtime_ns, path.name, path))
    for _, _, path in sorted(aged)[: max(0, len(aged) - FILES_MAX)]:
        with suppress(OSError):
            path.unlink()
