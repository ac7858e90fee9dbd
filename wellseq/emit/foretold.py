"""The forecast in the cautions: per cloud its extremes, and figures that are missing."""

from __future__ import annotations

from collections.abc import Sequence

from wellseq.checks.case import Case
from wellseq.checks.numbers import amount
from wellseq.clouds.forecast import UNITS
from wellseq.emit.ledger import Entry, entries
from wellseq.emit.page import Bullets, Section, Words, section, standing, table

EXTREMES = (("temperature", True), ("density", True), ("depth_left", False))
"""Quantity, and whether its greatest end is shown or its least."""


def foretold(case: Case) -> Section | None:
    """How hot and dense clouds get, how little depth they keep; None when none was foretold."""
    ledger = entries(case)
    rows = []
    for cloud in dict.fromkeys(entry.row.cloud for entry in ledger):
        mine = [entry for entry in ledger if entry.row.cloud == cloud]
        rows.append((cloud, *(_furthest(mine, quantity, most) for quantity, most in EXTREMES)))
    if not rows:
        return None
    reasons: dict[Words, None] = {}
    for entry in ledger:
        for reason in entry.reasons:
            where = f"line {entry.origin.place.line}, {entry.row.cloud}"
            reasons[(f"No figure at {where}: {reason}",)] = None
    missing = Bullets(tuple(reasons)) if reasons else None
    head = ("cloud", "hottest", "densest", "least depth left")
    heading = "Clouds, by the forecast"
    return section("forecast", heading, *standing("forecast"), table(head, rows), missing)


def _furthest(mine: Sequence[Entry], quantity: str, most: bool) -> str:
    """The greatest or least end of a figure over all rows, and where."""
    known = [
        (figure.high if most else figure.low, entry)
        for entry in mine
        if (figure := entry.row.figures.get(quantity)) is not None and figure.known
    ]
    if not known:
        return "not known"
    value, entry = (max if most else min)(known, key=lambda pair: pair[0])
    return f"{amount(value, UNITS[quantity])}, line {entry.origin.place.line}"
