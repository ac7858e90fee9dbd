"""Findings as one JSON document; its schema is `grammar/schemas/findings-1.json`.

The pydantic models of this file are the schema's only source.  Values are in SI units (depths in V,
times in s); a number that is not known is null.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from json import dumps
from typing import Literal

from pydantic import BaseModel, ConfigDict, Field

from wellseq.base.finding import Finding
from wellseq.base.place import Place
from wellseq.emit.examined import Examined
from wellseq.emit.fingerprints import fingerprints
from wellseq.emit.formats import Options
from wellseq.version import __version__

SCHEMA = "wellseq/findings"
SCHEMA_VERSION = 1


class _Part(BaseModel):
    model_config = ConfigDict(extra="forbid", frozen=True)


class Span(_Part):
    """Lines and columns count from 1; columns are characters, `end_column` one past the last."""

    file: str
    line: int = Field(ge=1)
    column: int = Field(ge=1)
    end_line: int = Field(ge=1)
    end_column: int = Field(ge=1)


class NotRun(_Part):
    """A check that could not run, and why."""

    name: str
    why: str


class ExaminedFile(_Part):
    """One file or folder: whether every check ran on it, and what stands in the way if anything."""

    file: str
    examined: bool
    cause: str = Field(description="why it was not examined wholly; empty when it was")
    cleared: bool = Field(description="true when everything ran and nothing fails or is unsure")
    duration_s: float | None = Field(description="time played, waits for triggers not counted")
    checks_run: list[str]
    checks_not_run: list[NotRun]
    against: str = Field(description="known findings or revision compared with; empty if none")
    set_aside: int = Field(ge=0, description="findings that stood there already, not listed")


class FoundThing(_Part):
    """A judged reading or a mistake; value, limit, margin and uncertainty share `unit`."""

    of: str = Field(description="the examined file that this was found in")
    name: str
    verdict: Literal["pass", "fail", "unsure", "allowed"]
    message: str
    hint: str
    place: Span
    step: str = Field(description="the verb of the step")
    label: str
    passes: list[int] = Field(description="passes of the repeats around the step, outermost first")
    chain: list[Span] = Field(description="the calls that led to the step, outermost first")
    subject: str
    block: str
    window_s: tuple[float | None, float | None] | None = Field(
        description="first and last instant within the block, in s"
    )
    value: float | None
    limit: float | None
    unit: str
    margin: float | None
    uncertainty: float | None
    reason: str = Field(description="why it was allowed; empty unless the verdict is allowed")
    known: str = Field(description="why it need not be looked at again; empty for what is new")
    fingerprint: str = Field(description="survives edits elsewhere in the file")


class FindingsReport(_Part):
    """Everything that was examined, everything that was not and why, and everything found."""

    wellseq: str = Field(description="version of the program")
    schema_: Literal["wellseq/findings"] = Field(alias="schema")
    schema_version: Literal[1]
    files: list[ExaminedFile]
    findings: list[FoundThing]


def report(things: Sequence[Examined], options: Options) -> str:
    """The whole report as JSON with sorted keys; passing readings are always in it."""
    document = FindingsReport(
        wellseq=__version__,
        schema=SCHEMA,
        schema_version=SCHEMA_VERSION,
        files=[_file(thing) for thing in things],
        findings=[
            _found(thing, finding, fingerprint)
            for thing in things
            for finding, fingerprint in zip(
                thing.findings, fingerprints(thing, thing.findings), strict=True
            )
        ],
    )
    plain = document.model_dump(by_alias=True)
    return dumps(plain, indent=2, sort_keys=True, ensure_ascii=False, allow_nan=False) + "\n"


def schema_text() -> str:
    """The JSON Schema of the report, as stored in `grammar/schemas/`."""
    schema = {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        **FindingsReport.model_json_schema(by_alias=True, mode="serialization"),
    }
    return dumps(schema, indent=2, sort_keys=True, ensure_ascii=False) + "\n"


def _file(thing: Examined) -> ExaminedFile:
    return ExaminedFile(
        file=_text(thing.shown),
        examined=not thing.cause,
        cause=thing.cause,
        cleared=thing.clear,
        duration_s=thing.duration_s,
        checks_run=list(thing.ran),
        checks_not_run=[NotRun(name=name, why=why) for name, why in thing.not_run],
        against=_text(thing.against),
        set_aside=thing.set_aside,
    )


def _found(thing: Examined, finding: Finding, fingerprint: str) -> FoundThing:
    window = finding.window_s
    return FoundThing(
        of=_text(thing.shown),
        name=finding.name,
        verdict=finding.verdict.value,
        message=finding.message,
        hint=finding.hint,
        place=_span(finding.place),
        step=finding.step,
        label=finding.label,
        passes=list(finding.passes),
        chain=[_span(place) for place in finding.chain],
        subject=finding.subject,
        block=finding.block,
        window_s=(_known(window[0]), _known(window[1])) if window is not None else None,
        value=_known(finding.value),
        limit=_known(finding.limit),
        unit=finding.unit,
        margin=_known(finding.margin),
        uncertainty=_known(finding.uncertainty),
        reason=finding.reason,
        known=finding.known,
        fingerprint=fingerprint,
    )


def _span(place: Place) -> Span:
    return Span(
        file=_text(place.file),
        line=place.line,
        column=place.column,
        end_line=place.end_line,
        end_column=place.end_column,
    )


def _known(value: float | None) -> float | None:
    return value if value is not None and math.isfinite(value) else None


def _text(name: str) -> str:
    """A file name may hold bytes that are no text; JSON has no place for them."""
    return name.encode("utf-8", "backslashreplace").decode("utf-8")
