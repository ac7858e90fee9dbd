"""A file of known findings ↔ its entries; findings → which of them were known, which went away.

    # wellseq: known findings, one a line, sorted
    "night.well" well-too-shallow 5f0c…24 digits 2026-05-12 "the cloud is dumped next"

File (as seen from the list's folder), finding, fingerprint, date, reason; texts are JSON strings.
A known finding is still listed and still keeps its table from being built.
"""

from __future__ import annotations

import json
import os
import re
from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

from wellseq.base.finding import Finding, Mistake, Verdict
from wellseq.base.place import Place
from wellseq.emit.examined import Examined
from wellseq.emit.fingerprints import DIGITS, fingerprints
from wellseq.text.read import decode, read_bytes

HEADING = "# wellseq: known findings, one a line, sorted"
CHECKS = ("known-not-met", "known-unreadable")
DATE = r"[0-9]{4}-(?:0[1-9]|1[0-2])-(?:0[1-9]|[12][0-9]|3[01])"
_TEXT = r'"(?:[^"\\]|\\.)*"'
_LINE = re.compile(rf"({_TEXT}) ([a-z0-9-]+) ([0-9a-f]{{{DIGITS}}}) ({DATE}) ({_TEXT})")
_LINE_END = re.compile(r"\r\n|\n|\r")


@dataclass(frozen=True, slots=True)
class Entry:
    """One accepted finding; `line` is where it stands in the list, 0 for one to be written."""

    file: str
    name: str
    fingerprint: str
    date: str
    reason: str
    line: int = 0

    def __str__(self) -> str:
        texts = (json.dumps(text, ensure_ascii=False) for text in (self.file, self.reason))
        file, reason = texts
        return f"{file} {self.name} {self.fingerprint} {self.date} {reason}"


@dataclass(frozen=True, slots=True)
class Known:
    """A list as read: its entries, and a finding for every line that is none."""

    path: Path
    shown: str
    entries: tuple[Entry, ...]
    wrong: tuple[Finding, ...]
    source: str


def read_known(path: Path, *, may_lack: bool = False) -> Known:
    """Read a list; with `may_lack`, one that is not there is empty.  Never raises."""
    shown = path.as_posix()
    if may_lack and not os.path.lexists(path):
        return Known(path, shown, (), (), "")
    content = read_bytes(path, shown)
    text = content if isinstance(content, Mistake) else decode(content, shown)
    if isinstance(text, Mistake):
        return Known(path, shown, (), (_unreadable(text.place, text.message),), "")
    entries: list[Entry] = []
    wrong: list[Finding] = []
    for number, line in enumerate(_LINE_END.split(text), start=1):
        if not line.strip() or line.startswith("#"):
            continue
        entry = _entry(line, number)
        if entry is not None:
            entries.append(entry)
            continue
        place = Place(shown, number, 1, number, len(line) + 1)
        wrong.append(_unreadable(place, "this line is no entry of a list of known findings"))
    return Known(path, shown, tuple(entries), tuple(wrong), text)


def _entry(line: str, number: int) -> Entry | None:
    match = _LINE.fullmatch(line.rstrip())
    if not match:
        return None
    try:
        file, reason = json.loads(match[1]), json.loads(match[5])
    except ValueError:
        return None
    return Entry(file, match[2], match[3], match[4], reason, number) if reason.strip() else None


def _unreadable(place: Place, message: str) -> Finding:
    hint = 'FILE FINDING FINGERPRINT DATE "REASON"; `check --known … --accept …` writes them'
    return Finding("known-unreadable", Verdict.FAIL, message, place, hint)


def accept(things: Sequence[Examined], known: Known) -> list[Examined]:
    """The same things with known findings marked, and the list itself as one more thing.

    A list with a line that cannot be read accepts nothing.  An entry that nothing met is a finding
    of its own, unless its file was not examined wholly.
    """
    left = Counter[tuple[str, str]]()
    entries: dict[tuple[str, str], list[Entry]] = {}
    for entry in () if known.wrong else known.entries:
        key = (entry.file, entry.fingerprint)
        left[key] += 1
        entries.setdefault(key, []).append(entry)
    marked = [_marked(thing, known, left, entries) for thing in things]
    examined = {_seen_from(known.path, thing.shown) for thing in things if not thing.cause}
    stale = [
        _stale(entry, known.shown)
        for key, count in left.items()
        for entry in entries[key][len(entries[key]) - count :]
        if entry.file in examined
    ]
    found = sorted((*known.wrong, *stale), key=lambda one: one.place)
    sources = {known.shown: known.source}
    return [*marked, Examined(known.shown, tuple(found), CHECKS, sources=sources)]


def _marked(
    thing: Examined,
    known: Known,
    left: Counter[tuple[str, str]],
    entries: dict[tuple[str, str], list[Entry]],
) -> Examined:
    file = _seen_from(known.path, thing.shown)
    findings = []
    for finding, fingerprint in zip(
        thing.findings, fingerprints(thing, thing.findings), strict=True
    ):
        key = (file, fingerprint)
        if finding.blocks and left[key] > 0:
            entry = entries[key][len(entries[key]) - left[key]]
            left[key] -= 1
            finding = replace(finding, known=f"{entry.reason} ({entry.date})")
        findings.append(finding)
    return replace(thing, findings=tuple(findings), against=known.shown)


def _stale(entry: Entry, shown: str) -> Finding:
    return Finding(
        "known-not-met",
        Verdict.FAIL,
        f"'{entry.name}' of {entry.file}, accepted on {entry.date}, is not there any more",
        Place(shown, entry.line, 1, entry.line, len(str(entry)) + 1),
        "take this line off the list",
    )


def listed(
    things: Iterable[Examined], known: Known, reason: str, date: str
) -> tuple[str, int, int]:
    """The text of the list after accepting all that blocks; how many are new and how many left.

    Entries that are still met keep their date and reason; those of files not in `things` stay.
    """
    things = list(things)
    seen = {_seen_from(known.path, thing.shown) for thing in things if not thing.cause}
    old: dict[tuple[str, str], list[Entry]] = {}
    for entry in known.entries:
        old.setdefault((entry.file, entry.fingerprint), []).append(entry)
    kept: list[Entry] = []
    added = 0
    for thing in things:
        file = _seen_from(known.path, thing.shown)
        for finding, fingerprint in zip(
            thing.findings, fingerprints(thing, thing.findings), strict=True
        ):
            if not finding.blocks:
                continue
            before = old.get((file, fingerprint))
            if before:
                kept.append(before.pop(0))
            else:
                added += 1
                kept.append(Entry(file, finding.name, fingerprint, date, reason))
    rest = [entry for entries in old.values() for entry in entries]
    kept += [entry for entry in rest if entry.file not in seen]
    lines = sorted(str(entry) for entry in kept)
    gone = sum(entry.file in seen for entry in rest)
    return "\n".join([HEADING, *lines, ""]), added, gone


def _seen_from(path: Path, shown: str) -> str:
    """A file's path from the folder of the list, with `/`."""
    folder = os.path.dirname(os.path.realpath(path))
    return Path(os.path.relpath(os.path.realpath(shown), folder)).as_posix()
