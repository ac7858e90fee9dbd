"""`Cleared` → a published folder, whole or not at all.

A temporary sibling is filled, flushed, read back by a second reader and renamed into place; an
older folder is replaced only when wellseq made it and nobody added to it.  Whatever fails, what
stood at the target before still stands there.  (On network file systems the rename is atomic on the
server; what fsync promises there is up to the server.)
"""

from __future__ import annotations

import hashlib
import json
import os
from collections.abc import Callable, Iterable, Sequence
from pathlib import Path

from wellseq.base.finding import Finding
from wellseq.checks.judging import Cleared, clear
from wellseq.emit.contents import contents
from wellseq.emit.lock import NO_FOLLOW, sole_writer
from wellseq.emit.manifest import MANIFEST, SCHEMA, Written, manifest
from wellseq.emit.swap import put_in_place, remove, restore, sync_folder

Reread = Callable[[Path], Sequence[Finding]]
MANIFEST_BYTES_MAX = 256 * 2**20


class CannotPublish(Exception):
    """The folder cannot be written; the sentence says why, and nothing was changed."""


class Miswritten(Exception):
    """What was written does not read back as what was cleared: a fault of wellseq's own."""


def write_folder(cleared: Cleared, target: Path, reread: Reread) -> None:
    """Write the tables, reports and copies of a cleared case to a folder named `target`.

    `reread` judges the finished folder by other code before it is published.  Raises TypeError for
    anything but a key cut by `clear`, CannotPublish when the folder cannot be written or must not
    be replaced, Miswritten when `reread` finds anything.
    """
    if not isinstance(cleared, Cleared) or clear(cleared.case) is None:
        raise TypeError("only what was cleared is published")
    if target.name in ("", "..") or target.is_mount():
        raise CannotPublish(f"{target}: name a folder to write, inside an existing one")
    if not target.parent.is_dir():
        raise CannotPublish(f"{target}: there is no folder {target.parent}")
    lock = target.with_name(f".{target.name}.wellseq-lock")
    try:
        with sole_writer(lock):
            _replace(cleared, target, reread)
    except BlockingIOError as error:
        raise CannotPublish(f"{target}: another wellseq is writing this folder just now") from error
    except OSError as error:
        raise CannotPublish(f"{target}: {_cause(error)}") from error


def _replace(cleared: Cleared, target: Path, reread: Reread) -> None:
    fresh = target.with_name(f".{target.name}.wellseq-new")
    aside = target.with_name(f".{target.name}.wellseq-old")
    restore(target, aside)
    # The lock is held, so whatever has these names is left over from a build that was killed.
    remove(fresh)
    remove(aside)
    refuse_foreign(target)
    try:
        os.mkdir(fresh)
        _fill(fresh, cleared)
        wrong = reread(fresh)
        if wrong:
            said = "; ".join(f"{finding.message} [{finding.name}]" for finding in wrong[:3])
            raise Miswritten(f"what was written does not read back as it was cleared: {said}")
        put_in_place(fresh, target, aside)
    finally:
        remove(fresh)
        if target.exists():
            remove(aside)


def _fill(folder: Path, cleared: Cleared) -> None:
    """Write every file and, last, the manifest that has all their hashes."""
    written: dict[str, Written] = {}
    for path, pieces in contents(cleared):
        if path in written:
            raise ValueError(f"two files want the name {path}")
        if not (folder / path).parent.is_dir():
            (folder / path).parent.mkdir(parents=True)
        written[path] = _write(folder / path, pieces)
    _write(folder / MANIFEST, [manifest(cleared, written)])
    for inner in sorted(file for file in folder.rglob("*") if file.is_dir()):
        sync_folder(inner)
    sync_folder(folder)


def _write(path: Path, pieces: Iterable[bytes]) -> Written:
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


def refuse_foreign(target: Path) -> None:
    """Return when `target` is absent, empty, or a folder that wellseq made and nobody added to.

    Raises CannotPublish for a link, a file, or a folder that holds anything else.
    """
    if target.is_symlink():
        raise CannotPublish(f"{target}: this is a link; name the folder itself")
    if not target.exists():
        return
    if not target.is_dir():
        raise CannotPublish(f"{target}: there is a file of this name, not a folder")
    found = _inside(target)
    if not found:
        return
    listed = _listed(target / MANIFEST)
    if listed is None:
        raise CannotPublish(f"{target}: this folder was not made by wellseq; it is left alone")
    strange = sorted(found - listed - {MANIFEST})
    if strange:
        raise CannotPublish(
            f"{target}: it also holds {strange[0]}, which wellseq did not put there; "
            "move it away or name another folder"
        )


def _inside(folder: Path) -> set[str]:
    """Everything below the folder that is not itself a folder with something in it."""
    found: set[str] = set()
    for where, folders, files in os.walk(folder):
        names = list(files)
        names += [name for name in folders if (Path(where) / name).is_symlink()]
        if not names and not folders and Path(where) != folder:
            found.add(Path(where).relative_to(folder).as_posix())
        found.update((Path(where) / name).relative_to(folder).as_posix() for name in names)
    return found


def _listed(path: Path) -> set[str] | None:
    """The files that a manifest names, or None when it is no manifest of ours."""
    try:
        if path.is_symlink() or not path.is_file() or path.stat().st_size > MANIFEST_BYTES_MAX:
            return None
        document = json.loads(path.read_bytes())
    except (OSError, ValueError, RecursionError):
        return None
    if not isinstance(document, dict) or document.get("schema") != SCHEMA:
        return None
    files = document.get("files")
    return set(files) if isinstance(files, dict) else None


def _cause(error: OSError) -> str:
    reason = (error.strerror or type(error).__name__).lower()
    return f"it cannot be written: {reason}"
