"""OLD or NEW as written on a command line → the sequences it stands for, each as a picture.

A side is a sequence, a published folder, a folder of sequences, or any of the first and the last at
a git revision: `REVISION:PATH`, the path as seen from here.
"""

from __future__ import annotations

import json
import os
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from pathlib import Path

from wellseq.base.finding import Finding, Verdict
from wellseq.base.place import Place
from wellseq.checks.case import Case
from wellseq.emit.content import content_id
from wellseq.emit.examined import Examined
from wellseq.emit.manifest import MANIFEST
from wellseq.emit.outline import has_sequence
from wellseq.pipeline import compile_file, verify
from wellseq.review.picture import Picture, picture
from wellseq.review.revisions import NoRevision, at_revision, files_at
from wellseq.review.tidying import files_of


class NoSide(Exception):
    """There is nothing to compare with; the sentence says why."""


@dataclass(frozen=True, slots=True)
class Side:
    """The sequences of one side: name → picture.  A single sequence has the empty name."""

    shown: str
    pictures: Mapping[str, Picture]

    @property
    def single(self) -> bool:
        """Whether the side is one sequence, to be compared with one whatever its name."""
        return set(self.pictures) == {""}


def side(written: str, lets: Mapping[str, str]) -> Side:
    """Compile what a side stands for.  Raises NoSide when there is nothing."""
    if os.path.lexists(written):
        return _here(written, lets)
    revision, colon, path = written.partition(":")
    if not colon or not revision or not path:
        raise NoSide(f"there is no file or folder '{written}', and it is no REVISION:PATH")
    try:
        return Side(written, dict(_then(path, revision, lets)))
    except NoRevision as why:
        raise NoSide(f"{written}: {why}") from None


def _here(written: str, lets: Mapping[str, str]) -> Side:
    if not os.path.isdir(written):
        return Side(written, {"": picture(compile_file(written, lets=lets))})
    if (Path(written) / MANIFEST).is_file():
        return Side(written, {"": _published(Path(written))})
    files = [file for file in files_of([written]) if _is_sequence(Path(file))]
    if not files:
        raise NoSide(f"no sequence stands in '{written}'")
    return Side(
        written,
        {
            os.path.relpath(file, written).replace(os.sep, "/"): picture(
                compile_file(file, lets=lets)
            )
            for file in files
        },
    )


def _then(path: str, revision: str, lets: Mapping[str, str]) -> Iterator[tuple[str, Picture]]:
    with at_revision(Path(path), revision) as old:
        if old is not None:
            yield "", picture(compile_file(old, lets=lets, shown=Path(path).as_posix()))
            return
    names = files_at(Path(path), revision)
    if not names:
        raise NoRevision(f"there is no '{path}' at that revision")
    for name in names:
        file = Path(path, name)
        with at_revision(file, revision) as old:
            if old is not None and _is_sequence(old):
                yield name, picture(compile_file(old, lets=lets, shown=file.as_posix()))


def _is_sequence(path: Path) -> bool:
    try:
        return has_sequence(path.read_text("utf-8", "replace"), path.name)
    except OSError:
        return True


def _published(folder: Path) -> Picture:
    """The picture of a published folder: its own copies compiled again, after it was read back."""
    shown = folder.as_posix()
    wrong = verify(folder)
    if wrong:
        return Picture(Examined(shown, wrong, (), (("every check", "the folder is not sound"),)))
    manifest = json.loads((folder / MANIFEST).read_bytes())
    source = manifest["sources"][0]["file"]
    lets = {str(name): str(value) for name, value in manifest["lets"].items()}
    name = f"{shown}/{source}"
    case = _compiled(folder / source, lets, str(manifest["each"]), name)
    found = picture(case)
    if case.shipped is not None and content_id(case.shipped) == manifest["content_id"]:
        return found
    finding = Finding(
        "content-differs",
        Verdict.FAIL,
        "with this version of wellseq the sources of this folder come to another table",
        Place(f"{shown}/{MANIFEST}"),
        "build it again",
    )
    return replace(found, thing=replace(found.thing, findings=(finding, *found.thing.findings)))


def _compiled(path: Path, lets: Mapping[str, str], each: str, shown: str) -> Case:
    """The case of a published sequence; `each` is the one value that was played, if any."""
    case = compile_file(path, lets=lets, shown=shown)
    if not each or case.sequence is None:
        return case
    values = [str(value) for value in case.sequence.each_values]
    if each not in values:
        return case
    return compile_file(path, lets=lets, each=values.index(each) + 1, shown=shown)
