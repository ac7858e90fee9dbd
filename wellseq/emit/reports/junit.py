"""Findings as JUnit XML: a suite per examined file, a case per check; clean files are in it too.

There is no one standard; this keeps to what the strictest schema in use asks for: properties,
system-out and system-err in every suite, one outcome a case, a host and a time of day, which are
constants here because no output depends on either.  A check that did not run is an error, or
`skipped` where findings of the same file say why.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from xml.sax.saxutils import escape, quoteattr

from wellseq.base.finding import Finding, Verdict
from wellseq.base.names import printable
from wellseq.emit.about import OWN
from wellseq.emit.examined import Examined
from wellseq.emit.formats import Options

HOST = "localhost"
MOMENT = "1970-01-01T00:00:00"
_NOT_XML = re.compile("[^\t\n\r\x20-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")


@dataclass(frozen=True, slots=True)
class _Case:
    """A check and how it came out: `pass`, `failure`, `error` or `skipped`, with what to say."""

    name: str
    outcome: str
    message: str = ""
    text: str = ""


def report(things: Sequence[Examined], options: Options) -> str:
    """The whole document; a suite for every thing, with at least one case."""
    suites = [_suite(number, thing) for number, thing in enumerate(things)]
    return "\n".join(
        ['<?xml version="1.0" encoding="UTF-8"?>', "<testsuites>", *suites, "</testsuites>", ""]
    )


def _suite(number: int, thing: Examined) -> str:
    cases = list(_cases(thing))
    counts = {
        plural: sum(case.outcome == outcome for case in cases)
        for plural, outcome in (
            ("failures", "failure"),
            ("errors", "error"),
            ("skipped", "skipped"),
        )
    }
    shown = _attribute(thing.shown if thing.shown.strip() else "-")
    head = (
        f'  <testsuite name={shown} package="wellseq" id="{number}" hostname="{HOST}" '
        f'timestamp="{MOMENT}" time="0" tests="{len(cases)}" '
        + " ".join(f'{plural}="{count}"' for plural, count in counts.items())
    )
    played = "" if thing.duration_s is None else f"{thing.duration_s!r}"
    return "\n".join(
        (
            f"{head}>",
            "    <properties>",
            f'      <property name="examined" value={_attribute(thing.cause or "wholly")}/>',
            f'      <property name="played_s" value={_attribute(played)}/>',
            "    </properties>",
            *(_case(case, shown) for case in cases),
            "    <system-out></system-out>",
            "    <system-err></system-err>",
            "  </testsuite>",
        )
    )


def _cases(thing: Examined) -> Iterator[_Case]:
    """One case per check, and per other name that something was found under, by name."""
    found: dict[str, list[Finding]] = {name: [] for name in thing.ran}
    for finding in thing.findings:
        found.setdefault(finding.name, []).append(finding)
    not_run = dict(thing.not_run)
    blocked = any(finding.blocks for finding in thing.findings)
    if not found and not not_run:
        yield _Case("not-examined", "error", thing.cause, OWN["not-examined"])
    for name in sorted({*found, *not_run}):
        findings = found.get(name, [])
        blocking = [finding for finding in findings if finding.blocks]
        new = [finding for finding in blocking if not finding.known]
        if new:
            yield _Case(name, "failure", new[0].message, "\n".join(map(_told, new)))
        elif blocking:
            yield _Case(name, "skipped", f"known: {blocking[0].known}")
        elif name in not_run:
            outcome = "skipped" if blocked else "error"
            yield _Case(name, outcome, f"not run: {not_run[name]}", OWN["not-examined"])
        else:
            yield _Case(name, "pass")


def _told(finding: Finding) -> str:
    sure = "not decided: " if finding.verdict is Verdict.UNSURE else ""
    hint = f" ({finding.hint})" if finding.hint else ""
    return f"{finding.place}: {sure}{finding.message}{hint}"


def _case(case: _Case, shown: str) -> str:
    head = f'    <testcase name={_attribute(case.name)} classname={shown} time="0"'
    if case.outcome == "pass":
        return f"{head}/>"
    if case.outcome == "skipped":
        return f"{head}><skipped message={_attribute(case.message)}/></testcase>"
    kind = _attribute(case.name)
    return (
        f"{head}><{case.outcome} type={kind} message={_attribute(case.message)}>"
        f"{_content(case.text)}</{case.outcome}></testcase>"
    )


def _attribute(text: str) -> str:
    return quoteattr(_legal(" ".join(text.split())))


def _content(text: str) -> str:
    return escape(_legal("\n".join(printable(line) for line in text.split("\n"))))


def _legal(text: str) -> str:
    """What XML 1.0 cannot hold even escaped is written as its code point."""
    return _NOT_XML.sub(lambda match: f"\\u{ord(match[0]):04x}", text)
