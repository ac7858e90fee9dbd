"""A comparison as JSON; figures in SI units as `unit` says, null where there is none."""

from __future__ import annotations

import math
from collections.abc import Sequence
from json import dumps

from wellseq.base.finding import Finding
from wellseq.review.comparing import Change, Comparison, StepChange
from wellseq.review.picture import StepPicture
from wellseq.version import __version__

SCHEMA = "wellseq/comparison"
SCHEMA_VERSION = 1
Json = dict[str, object]


def report(comparisons: Sequence[Comparison], sides: tuple[str, str]) -> str:
    """The whole comparison with sorted keys."""
    document: Json = {
        "wellseq": __version__,
        "schema": SCHEMA,
        "schema_version": SCHEMA_VERSION,
        "old": _text(sides[0]),
        "new": _text(sides[1]),
        "worse": any(one.worse for one in comparisons),
        "sequences": [_sequence(one) for one in comparisons],
    }
    return dumps(document, indent=2, sort_keys=True, ensure_ascii=False, allow_nan=False) + "\n"


def _sequence(one: Comparison) -> Json:
    return {
        "name": _text(one.name),
        "in_old": one.old is not None,
        "in_new": one.new is not None,
        "worse": one.worse,
        "unexamined": list(one.unexamined),
        "findings_new": [_finding(finding) for finding in one.came],
        "findings_gone": [_finding(finding) for finding in one.went],
        "steps": [_step(change) for change in one.steps],
        "whole": [_change(change) for change in one.whole],
    }


def _step(one: StepChange) -> Json:
    return {
        "kind": one.kind,
        "first": _named(one.first),
        "last": _named(one.last),
        "count": one.count,
        "was": one.was,
        "change": _change(one.change) if one.change is not None else None,
    }


def _named(step: StepPicture) -> Json:
    return {
        "step": step.words,
        "label": step.label,
        "passes": list(step.passes),
        "where": _text(step.where),
    }


def _change(change: Change) -> Json:
    return {
        "what": change.what,
        "subject": change.subject,
        "old": _known(change.old),
        "new": _known(change.new),
        "unit": change.unit,
        "worse": change.worse,
    }


def _finding(finding: Finding) -> Json:
    place = finding.place
    return {
        "name": finding.name,
        "verdict": finding.verdict.value,
        "message": finding.message,
        "file": _text(place.file),
        "line": place.line,
        "column": place.column,
    }


def _known(value: float | None) -> float | None:
    return value if value is not None and math.isfinite(value) else None


def _text(text: str) -> str:
    return text.encode("utf-8", "backslashreplace").decode("utf-8")
