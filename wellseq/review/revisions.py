"""A file at a git revision → a copy of it on the disk, with everything that it may use beside it.

Only what a sequence can read is taken out of the repository: regular files of the folder that holds
the sequence and its trap.  Git is asked, never told: nothing in the repository changes.
"""

from __future__ import annotations

import os
import posixpath
import subprocess
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from tempfile import TemporaryDirectory

from wellseq.emit.outline import trap_named
from wellseq.text.parse import SIZE_MAX

READ = (".well", ".toml", ".rules")
"""What files of a sequence's tree end with."""
FILES_MAX = 4096
_REGULAR = (b"100644", b"100755")
_TOLD_BY_HOOKS = (
    *("GIT_DIR", "GIT_WORK_TREE", "GIT_INDEX_FILE", "GIT_PREFIX"),
    *("GIT_OBJECT_DIRECTORY", "GIT_COMMON_DIR", "GIT_NAMESPACE"),
)


class NoRevision(Exception):
    """Git cannot give a revision; the sentence says why."""


@contextmanager
def at_revision(path: Path, revision: str) -> Iterator[Path | None]:
    """Inside, the file as it was at a revision; None when it was not there then.

    Raises NoRevision when there is no git, no repository or no such revision.
    """
    top, inside = _repository(path)
    commit = _commit(top, revision)
    blobs = _blobs(top, commit, posixpath.dirname(inside), inside)
    if inside not in blobs:
        yield None
        return
    with TemporaryDirectory(prefix="wellseq-") as folder:
        for name, content in blobs.items():
            target = Path(folder, name)
            target.parent.mkdir(parents=True, exist_ok=True)
            target.write_bytes(content)
        yield Path(folder, inside)


def files_at(path: Path, revision: str) -> list[str]:
    """The `*.well` below a folder at a revision, as seen from that folder, in order.

    Raises NoRevision as `at_revision` does.
    """
    top, inside = _repository(path)
    root = "" if inside == "." else inside
    found = _listed(top, _commit(top, revision), root)
    start = f"{root}/" if root else ""
    names = [name for name in found if name.startswith(start) and name.endswith(".well")]
    return sorted(name.removeprefix(start) for name in names)


def _blobs(top: Path, commit: str, folder: str, file: str) -> dict[str, bytes]:
    """Path in the repository → bytes of everything a file may read."""
    own = _contents(top, _listed(top, commit, file))
    trap = trap_named(own[file].decode("utf-8", "replace"), file) if file in own else None
    if trap is None or trap.startswith(".."):
        return own
    root = posixpath.commonpath([folder, posixpath.dirname(trap)]) if folder else ""
    found = _listed(top, commit, root)
    return _contents(top, {name: blob for name, blob in found.items() if name.endswith(READ)})


def _listed(top: Path, commit: str, path: str) -> dict[str, str]:
    """Path → object name of every regular file at or below a path."""
    asked = ["ls-tree", "-r", "-z", "-l", "--full-tree", commit]
    listing = _git(top, *asked, *(["--", path] if path else []))
    found: dict[str, str] = {}
    for entry in listing.split(b"\0"):
        head, _, name = entry.partition(b"\t")
        words = head.split()
        if len(words) == 4 and words[0] in _REGULAR and int(words[3]) <= SIZE_MAX:
            found[os.fsdecode(name)] = words[2].decode()
    if len(found) > FILES_MAX:
        raise NoRevision(f"more than {FILES_MAX} files stand around '{path}' in the repository")
    return found


def _contents(top: Path, blobs: dict[str, str]) -> dict[str, bytes]:
    """The bytes of all objects, asked for in one call."""
    asked = "".join(f"{blob}\n" for blob in blobs.values()).encode()
    answer = _git(top, "cat-file", "--batch", given=asked) if blobs else b""
    found: dict[str, bytes] = {}
    at = 0
    for name in blobs:
        end = answer.index(b"\n", at)
        size = int(answer[at:end].split()[2])
        found[name] = answer[end + 1 : end + 1 + size]
        at = end + 1 + size + 1
    return found


def _repository(path: Path) -> tuple[Path, str]:
    """The top folder of the repository around a path, and the path inside it."""
    real = Path(os.path.realpath(path))
    folder = next((one for one in (real, *real.parents) if one.is_dir()), real.parent)
    try:
        said = _git(folder, "rev-parse", "--show-toplevel")
    except NoRevision:
        raise NoRevision(f"'{path}' is in no git repository") from None
    top = Path(os.path.realpath(os.fsdecode(said.removesuffix(b"\n"))))
    return top, real.relative_to(top).as_posix()


def _commit(top: Path, revision: str) -> str:
    try:
        return (
            _git(
                top,
                "rev-parse",
                "--verify",
                "--quiet",
                "--end-of-options",
                f"{revision}^{{commit}}",
            )
            .decode()
            .strip()
        )
    except NoRevision:
        raise NoRevision(f"there is no git revision '{revision}'") from None


def _git(folder: Path, *words: str, given: bytes = b"") -> bytes:
    # A hook's variables would make git look elsewhere than around the path that was given.
    kept = {key: value for key, value in os.environ.items() if key not in _TOLD_BY_HOOKS}
    try:
        done = subprocess.run(
            ["git", "-C", str(folder), *words],
            input=given,
            capture_output=True,
            check=False,
            env={**kept, "GIT_OPTIONAL_LOCKS": "0", "LC_ALL": "C"},
        )
    except OSError as error:
        raise NoRevision("git cannot be run here") from error
    if done.returncode:
        raise NoRevision(done.stderr.decode("utf-8", "replace").strip() or "git says no")
    return done.stdout
