"""`cautions.json`: what the cautions say, as plain values for other programs.

Times are s of a block, blocks count from 1; volts are those at the electrode, without sign.
"""

from __future__ import annotations

import json
import math
from collections.abc import Iterator

from wellseq.checks.case import Case
from wellseq.emit.content import content_id
from wellseq.emit.hazard_map import HazardMap, hazard_map
from wellseq.emit.hazards import EXTRA_LOW_V, TOUCH_V, Windows
from wellseq.emit.interlocks import ruled
from wellseq.emit.keys import Key
from wellseq.emit.story import allowances, assumed
from wellseq.version import __version__

SCHEMA = "wellseq/cautions"
SCHEMA_VERSION = 1


def write(key: Key) -> Iterator[tuple[str, list[bytes]]]:
    """(name, content) of the cautions."""
    found = hazard_map(key.case)
    if found is None or key.case.sequence is None:
        return
    document = _document(key.case, found, key.case.sequence.name)
    text = json.dumps(document, indent=1, sort_keys=True, ensure_ascii=False, allow_nan=False)
    yield "cautions.json", [f"{text}\n".encode()]


def _document(case: Case, found: HazardMap, name: str) -> dict[str, object]:
    trap = found.trap
    return {
        "schema": SCHEMA,
        "schema_version": SCHEMA_VERSION,
        "wellseq": __version__,
        "sequence": name,
        "trap": trap.name,
        "content_id": content_id(found.shipped),
        "played_s": float(found.timeline.duration_s),
        "limits_V": {"touch": TOUCH_V, "extra_low": EXTRA_LOW_V},
        "outputs": [
            {
                "output": one.output,
                "electrodes": list(one.electrodes),
                "flagged": one.flagged,
                "largest_V": one.largest_V,
                "able_V": one.able_V,
                "stored_J": one.stored_J,
                "live": _windows(one.windows),
                "left_V": one.ends_V[-1],
            }
            for one in found.outputs
        ],
        "drives": _drives(found),
        "lines": _lines(found),
        "waits": [
            {
                "block": block.index + 1,
                "trigger": block.trigger,
                "longest_s": float(block.within_s),
                "live": [
                    one.output for one in found.outputs if one.ends_V[block.index - 1] > TOUCH_V
                ],
            }
            for block in found.timeline.blocks
            if block.trigger
        ],
        "site": {
            "magnet": trap.site.magnet,
            "field_T": max(abs(field) for _, field in trap.field.along),
            "cryogen": trap.site.cryogen,
            "source": trap.site.source,
            "notes": trap.site.notes,
        },
        "rules": ruled(case),
        "checks_not_run": [{"name": check, "why": why} for check, why in case.not_run],
        "allowances": allowances(case),
        "assumed": [{key: _plain(value) for key, value in one.items()} for one in assumed(case)],
    }


def _drives(found: HazardMap) -> list[dict[str, object]]:
    return [
        {
            "ring": drive.ring,
            "block": block.index + 1,
            "start_s": float(drive.start_s),
            "stop_s": float(drive.stop_s),
            "from_Hz": drive.from_Hz,
            "to_Hz": drive.to_Hz,
            "amplitude_V": drive.amplitude_V,
        }
        for block in found.timeline.blocks
        for drive in block.drives
    ]


def _lines(found: HazardMap) -> list[dict[str, object]]:
    return [
        {
            "line": one.line.name,
            "role": one.line.role or "",
            "safe": one.line.safe or "",
            "kind": one.line.kind,
            "not_safe": _windows(one.windows),
            "expected": [
                {"block": block + 1, "at_s": at_s, "state": state}
                for block, at_s, state in one.expected
            ],
            "left": one.left,
        }
        for one in found.lines
    ]


def _windows(windows: Windows) -> list[dict[str, object]]:
    return [{"block": block + 1, "start_s": start, "end_s": end} for block, start, end in windows]


def _plain(value: object) -> object:
    return None if isinstance(value, float) and not math.isfinite(value) else value
