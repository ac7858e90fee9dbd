"""What came of every interlock rule, as plain values, and the rules files of the house.

A published folder holds both: the one in manifest and cautions, the other as exact copies.
"""

from __future__ import annotations

import math

from wellseq.checks.case import Case
from wellseq.emit.sources import written_names
from wellseq.rules.rulings import Breach, Ruling

FOLDER = "rules"
BREACHES_KEPT = 50


def ruled(case: Case) -> list[dict[str, object]]:
    """Every rule with its text, what came of it, and why."""
    rulings = case.rulings.all if case.rulings is not None else ()
    names = written_names(case)
    return [_ruling(one, names) for one in rulings]


def _ruling(one: Ruling, names: dict[str, str]) -> dict[str, object]:
    rule, margin = one.rule, one.margin
    return {
        "name": rule.name,
        "of_the_house": rule.house,
        "never_waivable": rule.never_waivable,
        "text": rule.text,
        "comment": rule.comment,
        "file": names.get(rule.place.file, rule.place.file),
        "line": rule.place.line,
        "outcome": one.outcome.value,
        "arises": one.arises,
        "why": one.why,
        "margin": None if margin is None else {"value": margin.value, "unit": margin.unit},
        "breaches": [_breach(breach) for breach in one.breaches[:BREACHES_KEPT]],
    }


def _breach(one: Breach) -> dict[str, object]:
    return {
        "sure": one.sure,
        "block": one.block + 1,
        "start_s": float(one.start_s),
        "end_s": float(one.end_s),
        "step_number": one.number,
        "awaiting": one.awaiting,
        "after_waits_s": {name: float(wait_s) for name, wait_s in (one.waits or {}).items()},
        "signals": [
            {
                "says": shown.text,
                "true": shown.true,
                "low": shown.low if math.isfinite(shown.low) else None,
                "high": shown.high if math.isfinite(shown.high) else None,
                "unit": shown.unit,
            }
            for shown in one.shown
        ],
    }


def house_files(case: Case) -> list[tuple[str, bytes]]:
    """Path in the folder and content of the rules files that come with wellseq."""
    if case.rules is None:
        return []
    return [(f"{FOLDER}/{file.name}", file.content) for file in case.rules.house_files]
