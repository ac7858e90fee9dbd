"""Findings → fingerprints that survive edits elsewhere in the file, and change with the finding.

A fingerprint is a SHA-256 over the finding's name, the words of its statement, the definition and
the blocks around it, the calls and passes that led there, its subject, what was measured against
which limit, and a count among equals.  Lines, columns, labels, comments and layout take no part.
"""

from __future__ import annotations

import hashlib
import json
import math
import posixpath
from collections.abc import Iterable, Iterator

from wellseq.base.finding import Finding, Verdict
from wellseq.base.place import Place
from wellseq.emit.examined import Examined
from wellseq.emit.outline import Outline, outline, trap_words

DIGITS = 24
"""Hexadecimal digits that are kept: 96 bits."""
_ANYWHERE = "/" + "/".join(["up"] * 64)
FIGURES = 3
"""Significant figures of a measured value: one that got worse is another finding."""


def fingerprints(thing: Examined, findings: Iterable[Finding]) -> list[str]:
    """One fingerprint for each finding, in their order."""
    seen: dict[str, int] = {}
    result = []
    for finding in findings:
        said = json.dumps(list(_said(thing, finding)), ensure_ascii=False)
        count = seen[said] = seen.get(said, 0) + 1
        digest = hashlib.sha256(f"{said}\n{count}".encode("utf-8", "backslashreplace"))
        result.append(digest.hexdigest()[:DIGITS])
    return result


def _said(thing: Examined, finding: Finding) -> Iterator[object]:
    yield finding.name
    # What passes is counted apart, so that a report without it gives the others the same prints.
    yield finding.verdict is Verdict.PASS
    yield [_stands(thing, place) for place in (*finding.chain, finding.place)]
    yield list(finding.passes)
    yield finding.subject
    yield _figures(finding.value)
    yield _figures(finding.limit)
    if finding.place.file not in thing.sources:
        yield finding.message


def _stands(thing: Examined, place: Place) -> list[object]:
    """A place as it is named apart from lines and columns."""
    home = posixpath.dirname(posixpath.normpath(thing.shown))
    file = _beside(place.file, home)
    source = thing.sources.get(place.file)
    if source is None:
        return [file]
    if place.file.endswith(".toml"):
        words, within = trap_words(source, place.line)
        return [file, words, list(within)]
    lines = outline(source, place.file)
    found = lines.at(place)
    if found is None:
        return [file, lines.line_at(place.line), lines.text_at(place)]
    return [
        file,
        found.words,
        list(found.within),
        "" if found.place == place else _at(lines, place),
    ]


def _at(lines: Outline, place: Place) -> str:
    return lines.text_at(place)


def _beside(file: str, home: str) -> str:
    """A file's name as seen from the examined file's folder, wherever the program was started."""
    whole, there = (posixpath.normpath(posixpath.join(_ANYWHERE, one)) for one in (file, home))
    return posixpath.relpath(whole, there)


def _figures(value: float | None) -> str:
    if value is None:
        return ""
    return f"{value:.{FIGURES}g}" if math.isfinite(value) else str(value)
