"""The files of a folder whose bytes are the ones written → what they mean, and what is wrong in it.

Tables, drives and all that is said of them are read once and judged; nothing is believed because
the same program wrote it.
"""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field

from wellseq.base.names import printable
from wellseq.reread.claims import UNSOUND as CLAIMS_UNSOUND
from wellseq.reread.claims import judge_claims
from wellseq.reread.content import content_id
from wellseq.reread.depth import Examined, judge_depths
from wellseq.reread.descriptions import ENDING, judge_description
from wellseq.reread.descriptions import UNSOUND as DESCRIPTION_UNSOUND
from wellseq.reread.drives import HEAD as DRIVE_HEAD
from wellseq.reread.drives import UNSOUND as DRIVES_UNSOUND
from wellseq.reread.drives import read_drives
from wellseq.reread.forms import UNSOUND as FORM_UNSOUND
from wellseq.reread.forms import Expected
from wellseq.reread.hdf5 import judge_hdf5
from wellseq.reread.interlocks import judge_interlocks
from wellseq.reread.neighbours import too_far_apart
from wellseq.reread.npz import judge_npz
from wellseq.reread.plan import Plan, plan
from wellseq.reread.reading import Part, Unsound, parse
from wellseq.reread.roundings import HEADS, judge_roundings
from wellseq.reread.roundings import UNSOUND as ROUNDINGS_UNSOUND
from wellseq.reread.rules import wrongs
from wellseq.reread.table import UNSOUND as TABLE_UNSOUND
from wellseq.reread.table import Table, read_table

MANIFEST = "manifest.json"
CLAIMS = "claims.json"
PAGES = frozenset({"cautions.md", "cautions.html", "cautions.json"})
PAGES_TOO = frozenset({"report.html"})
"""Pages for people, which have no say in what is played: must be there; may be there."""
FORMS: Mapping[str, Callable[[bytes, str, Expected], Iterator[Unsound]]] = {
    "hdf5": judge_hdf5,
    "npz": judge_npz,
}


@dataclass(slots=True)
class Meaning:
    """What a folder says: `plan` of the manifest, and per block the rows and drives as read."""

    plan: Plan
    tables: list[Table] = field(default_factory=list)
    drives: list[list[list[str]]] = field(default_factory=list)
    examined: Examined = field(default_factory=Examined)


def read_meaning(manifest: Part, files: Mapping[str, bytes]) -> Meaning:
    """The tables and drives of a folder; raises Unsound where they cannot be read."""
    made = plan(manifest)
    _listed(manifest, made, files)
    meaning = Meaning(made)
    for block in made.blocks:
        content = _of(files, block.table, TABLE_UNSOUND)
        meaning.tables.append(read_table(content, made, block))
        if block.drives is None:
            meaning.drives.append([])
        else:
            content = _of(files, block.drives, DRIVES_UNSOUND)
            meaning.drives.append(read_drives(content, block, made.rings))
    if content_id(made, meaning.tables, meaning.drives) != made.content_id:
        message = "the tables are not those of its content id"
        raise Unsound("content-differs", MANIFEST, message)
    return meaning


def judge(manifest: Part, meaning: Meaning, files: Mapping[str, bytes]) -> Iterator[Unsound]:
    """Everything in which the folder breaks its limits or contradicts itself.

    Raises Unsound where something cannot be read.
    """
    made, tables, drives = meaning.plan, meaning.tables, meaning.drives
    yield from judge_interlocks(manifest)
    yield from wrongs(made, tables)
    yield from too_far_apart(made, tables, drives)
    yield from _said_of_tables(meaning, files)
    yield from _reports(manifest, made, files)
    claims = parse(_of(files, CLAIMS, CLAIMS_UNSOUND), CLAIMS, CLAIMS_UNSOUND)
    unsound = list(judge_claims(claims, made))
    yield from unsound
    if not unsound:
        yield from judge_depths(claims, made, tables, meaning.examined)


def _said_of_tables(meaning: Meaning, files: Mapping[str, bytes]) -> Iterator[Unsound]:
    """Descriptions and further forms of every block."""
    made = meaning.plan
    for block, table, drives in zip(made.blocks, meaning.tables, meaning.drives, strict=True):
        expected = Expected(made, block, table, drives)
        sectors = max(0, expected.width - len(DRIVE_HEAD))
        for name in (block.table, block.drives):
            if name is not None:
                content = _of(files, f"{name}{ENDING}", DESCRIPTION_UNSOUND)
                yield from judge_description(content, name, made, table, sectors)
        for form, name in sorted(block.also.items()):
            yield from FORMS[form](_of(files, name, FORM_UNSOUND), name, expected)


def _reports(manifest: Part, made: Plan, files: Mapping[str, bytes]) -> Iterator[Unsound]:
    """The reports of rounding and their descriptions."""
    named = {printable(part.text("from_sequence")) for part in manifest.parts("sources")}
    # A cell that would act as a formula in a spreadsheet has a quote before it.
    named |= {f"'{name}" for name in named}
    for report in HEADS:
        yield from judge_roundings(_of(files, report, ROUNDINGS_UNSOUND), report, made, named)
        content = _of(files, f"{report}{ENDING}", DESCRIPTION_UNSOUND)
        yield from judge_description(content, report, made, None, 0)


def _listed(manifest: Part, made: Plan, files: Mapping[str, bytes]) -> None:
    """The copies of the sources are the ones named, and no file is there for nothing."""
    tables = {block.table for block in made.blocks} | set(HEADS)
    tables |= {block.drives for block in made.blocks if block.drives is not None}
    expected = {CLAIMS, *PAGES, *tables, *(f"{table}{ENDING}" for table in tables)}
    for block in made.blocks:
        expected |= set(block.also.values())
    for source in manifest.parts("sources"):
        path = source.text("file")
        expected.add(path)
        content = _of(files, path, "manifest-unsound")
        if hashlib.sha256(content).hexdigest() != source.text("sha256"):
            raise source.wrong("sha256", "that of the copy in the folder")
    for house in manifest.part("interlocks").parts("house_files"):
        path = house.text("file")
        expected.add(path)
        content = _of(files, path, "manifest-unsound")
        if hashlib.sha256(content).hexdigest() != house.text("sha256"):
            raise house.wrong("sha256", "that of the copy in the folder")
    odd: Iterable[str] = (expected ^ set(files)) - PAGES_TOO
    if odd:
        message = f"{min(odd)} has no part in this folder"
        raise Unsound("manifest-unsound", MANIFEST, message)


def _of(files: Mapping[str, bytes], path: str, name: str) -> bytes:
    content = files.get(path)
    if content is None:
        raise Unsound(name, MANIFEST, f"the manifest does not list {path}")
    return content
