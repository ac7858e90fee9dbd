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
from pathlib import Path
from typing import TypeVar

from wellseq.base.finding import Finding, Verdict
from wellseq.base.names import printable
from wellseq.base.place import Place
from wellseq.reread.claims import UNSOUND as CLAIMS_UNSOUND
from wellseq.reread.claims import judge_claims
from wellseq.reread.content import content_id
from wellseq.reread.drives import UNSOUND as DRIVES_UNSOUND
from wellseq.reread.drives import read_drives
from wellseq.reread.neighbours import too_far_apart
from wellseq.reread.plan import SCHEMA, SCHEMA_VERSION, Plan, plan
from wellseq.reread.reading import Part, Unsound, canonical, parse
from wellseq.reread.rules import wrongs
from wellseq.reread.table import UNSOUND as TABLE_UNSOUND
from wellseq.reread.table import Table, read_table

MANIFEST = "manifest.json"
CLAIMS = "claims.json"
CAUTIONS = "cautions.md"
MANIFEST_BYTES_MAX = 256 * 2**20
CHECKS = (
    "folder-unreadable",
    "manifest-unsound",
    "file-missing",
    "file-strange",
    "file-altered",
    "table-unsound",
    "drives-unsound",
    "claims-unsound",
    "content-differs",
)
"""The names of everything that can be wrong with a folder."""

Result = TypeVar("Result")


def verify(folder: Path, shown: str | None = None) -> tuple[Finding, ...]:
    """Everything wrong with a published folder; empty when it is as wellseq wrote it.

    `shown` is the folder's name in the findings' places.  Never raises for what is in the folder.
    """
    return _Reader(folder, str(folder) if shown is None else shown).read()


class _Reader:
    """One reading of one folder; findings gather as it goes."""

    def __init__(self, folder: Path, shown: str) -> None:
        self.folder = folder
        self.shown = shown.rstrip("/") or shown
        self.found: list[Finding] = []
        self.files: dict[str, bytes] = {}

    def read(self) -> tuple[Finding, ...]:
        """Manifest, hashes, meaning: each only while what it rests on is sound."""
        manifest = self._try(self._manifest)
        if manifest is None:
            return tuple(self.found)
        self._try(lambda: self._hashes(manifest))
        if self.found:
            # What the tables say has no meaning while their bytes are not the ones written.
            return tuple(self.found)
        self._try(lambda: self._judge(manifest))
        return tuple(self.found)

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

    def _manifest(self) -> Part:
        content = self._bytes(MANIFEST, MANIFEST_BYTES_MAX, "folder-unreadable")
        manifest = parse(content, MANIFEST, "manifest-unsound")
        manifest.word("schema", SCHEMA)
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

    # meaning

    def _judge(self, manifest: Part) -> None:
        made = plan(manifest)
        self._listed(manifest, made)
        tables: list[Table] = []
        drives: list[list[list[str]]] = []
        for block in made.blocks:
            tables.append(read_table(self._of(block.table, TABLE_UNSOUND), made, block))
            if block.drives is None:
                drives.append([])
            else:
                content = self._of(block.drives, DRIVES_UNSOUND)
                drives.append(read_drives(content, block, made.rings))
        if content_id(made, tables, drives) != made.content_id:
            raise Unsound("content-differs", MANIFEST, "the tables are not those of its content id")
        self._say_all(wrongs(made, tables))
        self._say_all(too_far_apart(made, tables, drives))
        claims = parse(self._of(CLAIMS, CLAIMS_UNSOUND), CLAIMS, CLAIMS_UNSOUND)
        self._say_all(judge_claims(claims, made))

    def _listed(self, manifest: Part, made: Plan) -> None:
        """The copies of the sources are the ones named, and no file is there for nothing."""
        expected = {CLAIMS, CAUTIONS}
        expected |= {block.table for block in made.blocks}
        expected |= {block.drives for block in made.blocks if block.drives is not None}
        for source in manifest.parts("sources"):
            path = source.text("file")
            expected.add(path)
            content = self._of(path, "manifest-unsound")
            if hashlib.sha256(content).hexdigest() != source.text("sha256"):
                raise source.wrong("sha256", "that of the copy in the folder")
        if expected != set(self.files):
            odd = min(expected ^ set(self.files))
            raise Unsound("manifest-unsound", MANIFEST, f"{odd} has no part in this folder")

    def _of(self, path: str, name: str) -> bytes:
        content = self.files.get(path)
        if content is None:
            raise Unsound(name, MANIFEST, f"the manifest does not list {path}")
        return content


def _cause(error: OSError) -> str:
    return (error.strerror or type(error).__name__).lower()
