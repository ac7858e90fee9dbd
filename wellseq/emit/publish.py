"""`Cleared` → a published folder, whole or not at all; `Draft` → one whose name says so.

A temporary sibling is filled, flushed, read back by a second reader and renamed into place; an
older folder is replaced only when wellseq made it and nobody added to it.  Whatever fails, what
stood at the target before still stands there.  (On network file systems the rename is atomic on the
server; what fsync promises there is up to the server.)
"""

from __future__ import annotations

import json
import os
from collections.abc import Callable, Sequence
from pathlib import Path

from wellseq.base.finding import Finding
from wellseq.emit.contents import contents, missing
from wellseq.emit.keys import Draft, Key, opens
from wellseq.emit.lock import sole_writer
from wellseq.emit.manifest import DRAFT_SCHEMA, MANIFEST, SCHEMA, manifest
from wellseq.emit.single import CannotPublish, Written, cause, write_new
from wellseq.emit.swap import put_in_place, remove, restore, sync_folder

__all__ = ["CannotPublish", "Miswritten", "refuse_foreign", "write_folder"]
Reread = Callable[[Path], Sequence[Finding]]
MANIFEST_BYTES_MAX = 256 * 2**20
DRAFT_ENDING = "-draft"
"""How the name of a draft's folder ends."""


class Miswritten(Exception):
    """What was written does not read back as what was cleared: a fault of wellseq's own."""


def write_folder(key: Key, target: Path, reread: Reread, also: Sequence[str] = ()) -> None:
    """Write the tables, reports and copies of a cleared case to a folder named `target`.

    `also` names further forms of every table.  `reread` judges the finished folder by other code
    before it is published.  Raises TypeError for anything but a key cut by `clear` or the key of a
    draft, CannotPublish when the folder cannot be written or must not be replaced, Miswritten when
    `reread` finds anything.
    """
    if not opens(key):
        raise TypeError("only what was cleared is published")
    if isinstance(key, Draft) and not target.name.endswith(DRAFT_ENDING):
        raise CannotPublish(f"{target}: the folder of a draft has a name that ends in -draft")
    needed = missing(also)
    if needed:
        raise CannotPublish(f"{target}: {needed}")
    if target.name in ("", "..") or target.is_mount():
        raise CannotPublish(f"{target}: name a folder to write, inside an existing one")
    if not target.parent.is_dir():
        raise CannotPublish(f"{target}: there is no folder {target.parent}")
    lock = target.with_name(f".{target.name}.wellseq-lock")
    try:
        with sole_writer(lock):
            _replace(key, target, reread, also)
    except BlockingIOError as error:
        raise CannotPublish(f"{target}: another wellseq is writing this folder just now") from error
    except OSError as error:
        raise CannotPublish(f"{target}: {cause(error)}") from error


def _replace(key: Key, target: Path, reread: Reread, also: Sequence[str]) -> None:
    fresh = target.with_name(f".{target.name}.wellseq-new")
    aside = target.with_name(f".{target.name}.wellseq-old")
    restore(target, aside)
    # The lock is held, so whatever has these names is left over from a build that was killed.
    remove(fresh)
    remove(aside)
    refuse_foreign(target)
    try:
        os.mkdir(fresh)
        _fill(fresh, key, also)
        wrong = reread(fresh)
        if wrong:
            said = "; ".join(f"{finding.message} [{finding.name}]" for finding in wrong[:3])
            raise Miswritten(f"what was written does not read back as it was cleared: {said}")
        put_in_place(fresh, target, aside)
    finally:
        remove(fresh)
        if target.exists():
            remove(aside)


def _fill(folder: Path, key: Key, also: Sequence[str]) -> None:
    """Write every file and, last, the manifest that has all their hashes."""
    written: dict[str, Written] = {}
    for path, pieces in contents(key, also):
        if path in written:
            raise ValueError(f"two files want the name {path}")
        if not (folder / path).parent.is_dir():
            (folder / path).parent.mkdir(parents=True)
        written[path] = write_new(folder / path, pieces)
    write_new(folder / MANIFEST, [manifest(key, written, also)])
    for inner in sorted(file for file in folder.rglob("*") if file.is_dir()):
        sync_folder(inner)
    sync_folder(folder)


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
    if not isinstance(document, dict) or document.get("schema") not in (SCHEMA, DRAFT_SCHEMA):
        return None
    files = document.get("files")
    return set(files) if isinstance(files, dict) else None
