"""Findings as SARIF 2.1.0 (OASIS Standard, Static Analysis Results Interchange Format, 2020).

One run.  Columns count UTF-16 code units, as `columnKind` says.  Only what does not pass is listed,
unless margins are asked for.  Nothing in it depends on the clock, the host or the command line
(appendix F of the standard).
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from json import dumps
from urllib.parse import quote

from wellseq.base.finding import Finding, Verdict
from wellseq.base.place import Place
from wellseq.emit.about import About, about
from wellseq.emit.examined import Examined
from wellseq.emit.excerpt import source_line, utf16_column
from wellseq.emit.fingerprints import fingerprints
from wellseq.emit.formats import Options
from wellseq.emit.trail import trail
from wellseq.version import __version__

SCHEMA = (
    "https://docs.oasis-open.org/sarif/sarif/v2.1.0/errata01/os/schemas/sarif-schema-2.1.0.json"
)
NOT_EXAMINED = "not-examined"
Json = dict[str, object]


def report(things: Sequence[Examined], options: Options) -> str:
    """The whole log; valid and with an entry for every file, whatever was found."""
    listed = [(thing, one) for thing in things for one in _listed(thing, options)]
    names = {name for thing in things for name in thing.ran} | {one[0].name for _, one in listed}
    rules = [about(name) for name in sorted(names | {NOT_EXAMINED})]
    index = {rule.name: number for number, rule in enumerate(rules)}
    results = [_result(thing, *one, index) for thing, one in listed]
    results += [_unexamined(thing, index) for thing in things if _is_silent(thing)]
    run: Json = {
        "tool": {
            "driver": {
                "name": "wellseq",
                "version": __version__,
                "semanticVersion": __version__,
                "rules": [_rule(rule) for rule in rules],
            }
        },
        "invocations": [
            {
                "executionSuccessful": True,
                "toolExecutionNotifications": [
                    _notification(thing, why, names)
                    for thing in things
                    for why, names in thing.by_cause().items()
                ],
            }
        ],
        "columnKind": "utf16CodeUnits",
        "artifacts": [
            {"location": {"uri": _uri(shown)}, "roles": ["analysisTarget"]}
            for shown in dict.fromkeys(thing.shown for thing in things)
        ],
        "results": results,
    }
    log = {"$schema": SCHEMA, "version": "2.1.0", "runs": [run]}
    return dumps(log, indent=2, sort_keys=True, ensure_ascii=False, allow_nan=False) + "\n"


def _listed(thing: Examined, options: Options) -> Iterator[tuple[Finding, str]]:
    """Findings with their fingerprints."""
    for finding, fingerprint in zip(
        thing.findings, fingerprints(thing, thing.findings), strict=True
    ):
        if options.margins or finding.verdict is not Verdict.PASS:
            yield finding, fingerprint


def _is_silent(thing: Examined) -> bool:
    """Whether a file was not examined wholly and no finding of it says so."""
    return bool(thing.cause) and not any(finding.blocks for finding in thing.findings)


def _result(thing: Examined, finding: Finding, fingerprint: str, index: dict[str, int]) -> Json:
    passed = finding.verdict is Verdict.PASS
    quiet = finding.verdict is Verdict.ALLOWED or bool(finding.known)
    result: Json = {
        "ruleId": finding.name,
        "ruleIndex": index[finding.name],
        "kind": "pass" if passed else "fail",
        "level": "none" if passed else "note" if quiet else "error",
        "message": {"text": _message(finding)},
        "locations": [_location(thing, finding.place)],
        "relatedLocations": [
            {**_location(thing, place), "id": number, "message": {"text": words}}
            for number, (place, words) in enumerate(trail(thing, finding), start=1)
        ],
        "partialFingerprints": {
            "wellseq/v1": fingerprint,
            # The one key that the large consumers of such logs look at.
            "primaryLocationLineHash": fingerprint,
        },
        "suppressions": list(_suppressions(finding)),
        "properties": _properties(finding),
    }
    if thing.against:
        result["baselineState"] = "unchanged" if finding.known else "new"
    return result


def _message(finding: Finding) -> str:
    sure = "not decided: " if finding.verdict is Verdict.UNSURE else ""
    hint = f" ({finding.hint})" if finding.hint else ""
    return _text(f"{sure}{finding.message}{hint}") or finding.name


def _suppressions(finding: Finding) -> Iterator[Json]:
    if finding.verdict is Verdict.ALLOWED:
        yield {"kind": "inSource", "status": "accepted", "justification": _text(finding.reason)}
    if finding.known:
        yield {"kind": "external", "status": "accepted", "justification": _text(finding.known)}


def _properties(finding: Finding) -> Json:
    """What the standard has no place for; figures in the unit that is given, times in s."""
    said: Json = {"verdict": finding.verdict.value}
    for name in ("subject", "step", "label", "block", "unit"):
        if getattr(finding, name):
            said[name] = _text(getattr(finding, name))
    for name in ("value", "limit", "margin", "uncertainty"):
        value = getattr(finding, name)
        if value is not None and abs(value) < float("inf"):
            said[name] = value
    if finding.window_s is not None and all(abs(end) < float("inf") for end in finding.window_s):
        said["window_s"] = list(finding.window_s)
    return said


def _unexamined(thing: Examined, index: dict[str, int]) -> Json:
    return {
        "ruleId": NOT_EXAMINED,
        "ruleIndex": index[NOT_EXAMINED],
        "kind": "fail",
        "level": "error",
        "message": {"text": _text(f"not examined: {thing.cause}")},
        "locations": [_location(thing, Place(thing.shown))],
        "relatedLocations": [],
        "suppressions": [],
    }


def _notification(thing: Examined, why: str, names: tuple[str, ...]) -> Json:
    return {
        "level": "warning",
        "message": {"text": _text(f"checks not run: {', '.join(names)}: {why}")},
        "locations": [_location(thing, Place(thing.shown))],
    }


def _location(thing: Examined, place: Place) -> Json:
    first = source_line(thing.sources, place)
    last = source_line(thing.sources, Place(place.file, place.end_line)) if first else None
    column = utf16_column(first, place.column) if first is not None else place.column
    end = utf16_column(last, place.end_column) if last is not None else place.end_column
    if (place.end_line, end) <= (place.line, column):
        end = column + 1
    return {
        "physicalLocation": {
            "artifactLocation": {"uri": _uri(place.file)},
            "region": {
                "startLine": place.line,
                "startColumn": column,
                "endLine": max(place.line, place.end_line),
                "endColumn": end,
            },
        }
    }


def _rule(rule: About) -> Json:
    return {
        "id": rule.name,
        "name": rule.name,
        "shortDescription": {"text": _text(rule.says)},
        "fullDescription": {"text": _text(rule.says)},
        "help": {"text": _text(rule.page), "markdown": _text(rule.page)},
        "defaultConfiguration": {"level": "error"},
    }


def _uri(shown: str) -> str:
    """The name as a reference; one that is not absolute stays relative (RFC 3986)."""
    path = _text(shown)
    return f"file://{quote(path)}" if path.startswith("/") else quote(path, safe="/") or "-"


def _text(text: str) -> str:
    """A text may hold bytes that are none; JSON has no place for them."""
    return text.encode("utf-8", "backslashreplace").decode("utf-8")
