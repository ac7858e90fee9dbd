"""Findings as GNU lines: `file:line:column: severity: message [name]`, one line each.

Lines and columns count from 1; columns are display columns with tab stops every eight (GNU Coding
Standards, "Formatting Error Messages").  Passing readings are not listed.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from wellseq.base.finding import Finding, Verdict
from wellseq.base.names import printable
from wellseq.emit.examined import Examined, nearest_of_each, standing
from wellseq.emit.excerpt import display_column, source_line
from wellseq.emit.formats import Options

_SEVERITY = {Verdict.FAIL: "error", Verdict.UNSURE: "error", Verdict.ALLOWED: "note"}


def report(things: Sequence[Examined], options: Options) -> str:
    """All findings but passes, then for each file what was not examined, or that all was."""
    return "".join(f"{line}\n" for thing in things for line in _lines(thing, options))


def _lines(thing: Examined, options: Options) -> Iterator[str]:
    for finding in thing.having(Verdict.FAIL, Verdict.UNSURE, Verdict.ALLOWED):
        yield _line(thing, finding, "note" if finding.known else _SEVERITY[finding.verdict])
    if options.margins:
        for finding in nearest_of_each(thing.findings):
            yield _line(thing, finding, "note")
    shown = printable(thing.shown)
    # What did not run because of an error listed above is no error of its own.
    severity = "note" if any(finding.blocks for finding in thing.findings) else "error"
    for why, names in thing.by_cause().items():
        listed = f"{', '.join(names)}: {_flat(why)}"
        yield f"{shown}:1:1: {severity}: not examined: {listed} [not-examined]"
    if thing.clear:
        yield f"{shown}:1:1: note: {len(thing.ran)} checks ran, nothing stands in the way [cleared]"
    elif thing.against and thing.settled:
        yield f"{shown}:1:1: note: {standing(thing)}; a build refuses it [nothing-new]"


def _line(thing: Examined, finding: Finding, severity: str) -> str:
    place = finding.place
    written = source_line(thing.sources, place)
    column = display_column(written, place.column) if written is not None else place.column
    unsure = "not decided: " if finding.verdict is Verdict.UNSURE else ""
    passed = "passes: " if finding.verdict is Verdict.PASS else ""
    message = f"{unsure}{passed}{_flat(finding.message)}"
    if finding.verdict is Verdict.ALLOWED:
        message += f" (allowed: {_flat(finding.reason)})"
    if finding.known:
        message += f" (known: {_flat(finding.known)})"
    where = f"{printable(place.file)}:{place.line}:{column}"
    return f"{where}: {severity}: {message} [{finding.name}]"


def _flat(text: str) -> str:
    return printable(" ".join(text.split()))
