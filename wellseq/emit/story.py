"""What manifest and cautions both tell of a case: allowances used, values assumed, roundings."""

from __future__ import annotations

from wellseq.base.finding import Verdict
from wellseq.checks.case import Case
from wellseq.emit.sources import written_names
from wellseq.model.effects import Assumed
from wellseq.timeline.shipped import Rounding


def allowances(case: Case) -> list[dict[str, object]]:
    """Every allowance as plain values: name, reason, place, its steps, how much it covers."""
    if case.sequence is None:
        return []
    found: list[dict[str, object]] = []
    names = written_names(case)
    origins = case.timeline.origins if case.timeline is not None else ()
    for one in case.sequence.allowances:
        covered = [
            finding
            for finding in case.findings
            if finding.verdict is Verdict.ALLOWED
            and finding.name == one.name
            and finding.place == one.step_place
        ]
        found.append(
            {
                "name": one.name,
                "reason": one.reason,
                "file": names.get(one.place.file, one.place.file),
                "line": one.place.line,
                "column": one.place.column,
                "covers": len(covered),
                "steps": [
                    number
                    for number, origin in enumerate(origins)
                    if origin.place == one.step_place
                ],
            }
        )
    return found


def assumed(case: Case) -> list[dict[str, object]]:
    """Every measured value that the author put in a forecast's place, as plain values."""
    blocks = case.timeline.blocks if case.timeline is not None else ()
    return [
        {
            "block": block.index + 1,
            "at_s": float(event.start_s),
            "quantity": event.effect.quantity,
            "cloud": event.effect.cloud,
            "value": event.effect.value,
            "half_width": event.effect.half_width,
            "unit": event.effect.unit,
            "reason": event.effect.reason,
            "step_number": event.number,
        }
        for block in blocks
        for event in block.events
        if isinstance(event.effect, Assumed)
    ]


def roundings(case: Case) -> list[tuple[int, Rounding]]:
    """(block index, rounding) of every edge that was moved onto its clock, the largest first.

    Where one piece ends and the next begins is one edge.
    """
    blocks = case.shipped.blocks if case.shipped is not None else ()
    edges = {
        (block.block.index, rounding.output, rounding.asked_s): rounding
        for block in blocks
        for rounding in block.roundings
        if rounding.asked_s != rounding.emitted_s
    }
    found = [(block, rounding) for (block, _, _), rounding in edges.items()]
    found.sort(key=lambda item: (-abs(item[1].error_s), item[0], item[1].asked_s, item[1].output))
    return found
