"""`manifest.json`: what a published folder is, made of what, for which hardware, in which limits.

It holds the SHA-256 of every other file, and of itself without that one entry (`digest`), so that
any change anywhere shows.  That is a seal against accidents, not a signature against forgers.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable, Mapping
from fractions import Fraction

from wellseq.base.finding import Verdict
from wellseq.checks.case import Case
from wellseq.emit.blocks import also_name, decimal, drives_name, exact, table_name
from wellseq.emit.content import content_id
from wellseq.emit.hardware import trap_summary
from wellseq.emit.interlocks import house_files, ruled
from wellseq.emit.keys import Draft, Key
from wellseq.emit.single import Written
from wellseq.emit.sources import copies, written_names
from wellseq.emit.story import allowances, assumed, roundings
from wellseq.model.trap import Trap
from wellseq.timeline.shipped import Shipped, ShippedBlock
from wellseq.version import __version__

MANIFEST = "manifest.json"
SCHEMA = "wellseq/folder"
DRAFT_SCHEMA = "wellseq/draft"
"""The schema of a folder that is only for looking at; nothing that plays tables knows it."""
SCHEMA_VERSION = 2
ROUNDINGS_KEPT = 32
NOT_EXAMINED = (
    "No forecast of any cloud was made: depths are vacuum depths, space charge is not taken off.",
)


def manifest(key: Key, written: Mapping[str, Written], also: Iterable[str] = ()) -> bytes:
    """The manifest of a folder whose other files are `written`, as canonical JSON.

    `also` are the further forms that every table has.
    """
    case = key.case
    if case.trap is None or case.shipped is None or case.sequence is None:
        raise TypeError("a case that is published has all its stages")
    forms = sorted(set(also))
    document: dict[str, object] = {
        "schema": DRAFT_SCHEMA if isinstance(key, Draft) else SCHEMA,
        "schema_version": SCHEMA_VERSION,
        "wellseq": __version__,
        "sequence": case.sequence.name,
        "lets": dict(case.sequence.lets),
        "each": case.each,
        "sources": [_source(copy.path, copy.written_as, copy.content) for copy in copies(case)],
        "files": {path: {"sha256": one.sha256, "bytes": one.size} for path, one in written.items()},
        "trap": trap_summary(case.trap),
        "limits": case.trap.margins.model_dump(mode="json"),
        "checks": list(case.ran),
        "verdicts": {
            verdict.value: sum(finding.verdict is verdict for finding in case.findings)
            for verdict in _counted(key)
        },
        "allowances": allowances(case),
        "assumed": assumed(case),
        "not_examined": list(NOT_EXAMINED),
        "interlocks": {
            "house_files": [
                {"file": path, "sha256": hashlib.sha256(content).hexdigest()}
                for path, content in house_files(case)
            ],
            "rules": ruled(case),
        },
        "blocks": [_block(block, forms) for block in case.shipped.blocks],
        "end": _end(case.trap, case.shipped),
        "roundings_largest": _roundings(case),
        "content_id": content_id(case.shipped),
    }
    if isinstance(key, Draft):
        document["stands_against_it"] = _against(case)
    document["digest"] = hashlib.sha256(_canonical(document)).hexdigest()
    return _canonical(document)


def _canonical(document: Mapping[str, object]) -> bytes:
    text = json.dumps(document, indent=1, sort_keys=True, ensure_ascii=False, allow_nan=False)
    return f"{text}\n".encode()


def _source(path: str, written_as: str, content: bytes) -> dict[str, str]:
    return {
        "file": path,
        "from_sequence": written_as,
        "sha256": hashlib.sha256(content).hexdigest(),
    }


def _counted(key: Key) -> Iterable[Verdict]:
    """The verdicts that there can be."""
    return Verdict if isinstance(key, Draft) else (Verdict.PASS, Verdict.ALLOWED)


def _against(case: Case) -> list[dict[str, object]]:
    """Every finding that keeps a draft from being more than one, and every check that never ran."""
    names = written_names(case)
    found: list[dict[str, object]] = [
        {
            "name": one.name,
            "verdict": one.verdict.value,
            "message": one.message,
            "file": names.get(one.place.file, one.place.file),
            "line": one.place.line,
        }
        for one in case.blocked
    ]
    found += [{"name": name, "verdict": "not run", "message": why} for name, why in case.not_run]
    return found


def _block(one: ShippedBlock, forms: Iterable[str]) -> dict[str, object]:
    block = one.block
    return {
        "index": block.index + 1,
        "name": block.name,
        "trigger": block.trigger,
        "within_s": exact(block.within_s),
        "latency_s": exact(block.first_row_s),
        "jitter_s": exact(block.jitter_s),
        "tick_s": exact(one.tick_s),
        "tick_decimal_s": decimal(one.tick_s),
        "rows": len(one.ticks),
        "duration_s": exact(block.duration_s),
        "duration_decimal_s": decimal(block.duration_s),
        "table": table_name(block),
        "also": {form: also_name(block, form) for form in forms},
        "drives": drives_name(block) if block.drives else None,
        "strays_V": _strays(one),
    }


def _strays(one: ShippedBlock) -> dict[str, float]:
    """Per output that moves, how far its rows stray from the wish at most, V; half a code apart."""
    found: dict[str, float] = {}
    for stray in one.strays:
        found[stray.output] = max(found.get(stray.output, 0.0), float(stray.volts))
    return found


def _end(trap: Trap, shipped: Shipped) -> dict[str, object]:
    """What the last row of the last block leaves standing."""
    last = shipped.blocks[-1]
    return {
        "codes": dict(zip(shipped.converters, last.codes[-1].tolist(), strict=True)),
        "levels": dict(zip(shipped.switches, last.levels[-1].tolist(), strict=True)),
        "states": {
            name: trap.line(name).states[state]
            for name, state in zip(shipped.lines, last.states[-1].tolist(), strict=True)
        },
    }


def _roundings(case: Case) -> list[dict[str, object]]:
    return [
        {
            "block": block + 1,
            "output": rounding.output,
            "asked_s": exact(rounding.asked_s),
            "emitted_s": exact(rounding.emitted_s),
            "error_s": exact(Fraction(rounding.error_s)),
            "step_number": rounding.number,
        }
        for block, rounding in roundings(case)[:ROUNDINGS_KEPT]
    ]
