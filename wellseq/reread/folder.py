"""A published folder → findings, from its bytes alone.

Nothing of the code that wrote the folder is used here, only the words of `base/`: a fault in the
writer and the same fault in its reader would agree with each other.  Whatever is malformed becomes
a finding; every file is opened once, links are not followed.
"""

from __future__ import annotations

import hashlib
import os
import stat
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from pathlib import Path
from typing import TypeVar

from wellseq.base.finding import Finding, Verdict
from wellseq.base.names import printable
from wellseq.base.place import Place
from wellseq.reread.meaning import Meaning, judge, read_meaning
from wellseq.reread.plan import DRAFT_SCHEMA, SCHEMA, SCHEMA_VERSION
from wellseq.reread.reading import Part, Unsound, canonical, parse

MANIFEST = "manifest.json"
MANIFEST_BYTES_MAX = 256 * 2**20
CHECKS = (
    "folder-unreadable",
    "folder-is-draft",
    "manifest-unsound",
    "file-missing",
    "file-strange",
    "file-altered",
    "table-unsound",
    "drives-unsound",
    "description-unsound",
    "form-unsound",
    "roundings-unsound",
    "claims-unsound",
    "depth-not-held",
    "content-differs",
)
"""The names of everything that can be wrong with a folder."""

Result = TypeVar("Result")


@dataclass(frozen=True, slots=True)
class Reading:
    """What came of a folder: findings, what was examined in words, and what the folder says.

    `meaning` is None unless nothing at all was found.
    """

    findings: tuple[Finding, ...]
    examined: str
    meaning: Meaning | None


def verify(folder: Path, shown: str | None = None) -> tuple[Finding, ...]:
    """Everything wrong with a published folder; empty when it is as wellseq wrote it.

    `shown` is the folder's name in the findings' places.  Never raises for what is in the folder.
    """
    return read_folder(folder, shown).findings


def read_folder(folder: Path, shown: str | None = None) -> Reading:
    """Read and judge a published folder; never raises for what is in it."""
    reader = _Reader(folder, str(folder) if shown is None else shown)
    reader.read()
    findings = tuple(reader.found)
    said = reader.meaning.examined.sentence() if reader.meaning is not None else ""
    return Reading(findings, said, None if findings else reader.meaning)


def verify_draft(folder: Path) -> tuple[Finding, ...]:
    """Everything wrong with the bytes of a draft; what they mean is not judged."""
    reader = _Reader(folder, str(folder))
    reader.bytes_of_draft()
    return tuple(reader.found)


class _Reader:
    """One reading of one folder; findings gather as it goes."""

    def __init__(self, folder: Path, shown: str) -> None:
        self.folder = folder
        self.shown = shown.rstrip("/") or shown
        self.found: list[Finding] = []
        self.files: dict[str, bytes] = {}
        self.meaning: Meaning | None = None

    def read(self) -> None:
        """Manifest, hashes, meaning: each only while what it rests on is sound."""
        manifest = self._try(lambda: self._manifest(SCHEMA))
        if manifest is None:
            return
        self._try(lambda: self._hashes(manifest))
        # What the tables say has no meaning while their bytes are not the ones written.
        if not self.found:
            self.meaning = self._try(lambda: read_meaning(manifest, self.files))
        meaning = self.meaning
        if meaning is not None:
            self._try(lambda: self._say_all(judge(manifest, meaning, self.files)))

    def bytes_of_draft(self) -> None:
        """Manifest and hashes of a draft."""
        manifest = self._try(lambda: self._manifest(DRAFT_SCHEMA))
        if manifest is not None:
            self._try(lambda: self._hashes(manifest))

    def _try(self, work: Callable[[], Result]) -> Result | None:
        try:
            return work()
        except Unsound as wrong:
            self._say(wrong)
        except (ArithmeticError, LookupError, TypeError, ValueError, RecursionError) as error:
            message = f"this could not be examined: {error}"
            self._say(Unsound("manifest-unsound", MANIFEST, message), Verdict.UNSURE)
        return None

    def _say(self, wrong: Unsound, verdict: Verdict = Verdict.FAIL) -> None:
        place = Place(f"{self.shown}/{wrong.file}", wrong.line, 1, wrong.line, 1)
        self.found.append(Finding(wrong.name, verdict, printable(wrong.message), place))

    def _say_all(self, wrongs_found: Iterable[Unsound]) -> None:
        for wrong in wrongs_found:
            self._say(wrong)

    # bytes

    def _bytes(self, path: str, most: int, name: str) -> bytes:
        """The bytes of a regular file of at most `most` bytes; no link is followed."""
        flags = os.O_RDONLY | getattr(os, "O_NOFOLLOW", 0) | getattr(os, "O_NONBLOCK", 0)
        try:
            descriptor = os.open(self.folder / path, flags | getattr(os, "O_BINARY", 0))
        except OSError as error:
            raise Unsound(name, path, f"it cannot be read: {_cause(error)}") from error
        with os.fdopen(descriptor, "rb") as stream:
            status = os.fstat(descriptor)
            if not stat.S_ISREG(status.st_mode):
                raise Unsound(name, path, "this is not a file")
            if status.st_size > most:
                raise Unsound(name, path, f"it is longer than the {most} bytes that were written")
            try:
                return stream.read(most + 1)
            except OSError as error:
                raise Unsound(name, path, f"it cannot be read: {_cause(error)}") from error

    def _manifest(self, schema: str) -> Part:
        content = self._bytes(MANIFEST, MANIFEST_BYTES_MAX, "folder-unreadable")
        manifest = parse(content, MANIFEST, "manifest-unsound")
        if schema == SCHEMA and manifest.text("schema") == DRAFT_SCHEMA:
            raise Unsound("folder-is-draft", MANIFEST, _against(manifest))
        manifest.word("schema", schema)
        manifest.whole("schema_version", SCHEMA_VERSION, SCHEMA_VERSION)
        digest = manifest.text("digest")
        rest = {key: value for key, value in manifest.values.items() if key != "digest"}
        if hashlib.sha256(canonical(rest)).hexdigest() != digest:
            raise Unsound("manifest-unsound", MANIFEST, "it was changed after it was written")
        return manifest

    def _hashes(self, manifest: Part) -> None:
        """Every file is there, nothing else is, and every byte is the one written."""
        files = manifest.part("files")
        self._say_all(
            Unsound("file-strange", path, "this file is not in the manifest")
            for path in sorted(self._present() - set(files.values) - {MANIFEST})
        )
        for path in sorted(files.values):
            entry = files.part(path)
            try:
                self._check(path, entry.whole("bytes"), entry.text("sha256"))
            except Unsound as wrong:
                self._say(wrong)

    def _check(self, path: str, size: int, sha256: str) -> None:
        if path.startswith("/") or ".." in path.split("/") or not path:
            raise Unsound("manifest-unsound", MANIFEST, f"'{path}' is no path inside the folder")
        if not os.path.lexists(self.folder / path):
            raise Unsound("file-missing", path, "this file is in the manifest but not here")
        content = self._bytes(path, size, "file-altered")
        if hashlib.sha256(content).hexdigest() != sha256:
            raise Unsound("file-altered", path, "its bytes are not the ones that were written")
        self.files[path] = content

    def _present(self) -> set[str]:
        found: set[str] = set()
        for where, folders, names in os.walk(self.folder):
            inside = Path(where).relative_to(self.folder)
            links = [name for name in folders if (Path(where) / name).is_symlink()]
            found.update((inside / name).as_posix() for name in [*names, *links])
            if not names and not folders and inside != Path("."):
                found.add(inside.as_posix())
        return found


def _against(manifest: Part) -> str:
    """What a draft says of itself."""
    names = sorted({part.text("name") for part in manifest.parts("stands_against_it")})
    said = f": {', '.join(names)}"[:200] if names else ""
    return f"this is a draft, written for looking at and not for playing{said}"


def _cause(error: OSError) -> str:
    return (error.strerror or type(error).__name__).lower()
