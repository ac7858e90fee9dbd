"""The ledger of the clouds as reports want it: a row per step and cloud, and as lines of text.

Figures are in the units of `UNITS`.  In a table a figure is its best value and, in brackets, its
interval; a figure that is not known is said to be, with the place where it went missing.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from wellseq.base.finding import Origin
from wellseq.base.names import printable
from wellseq.checks.case import Case
from wellseq.checks.numbers import amount
from wellseq.clouds.figures import Figure
from wellseq.clouds.forecast import UNITS, Row, in_words

SHOWN = ("number", "temperature", "radius", "density", "length", "space_charge", "depth_left")


@dataclass(frozen=True, slots=True)
class Entry:
    """One row of the forecast, with the step it belongs to and the name of its block."""

    row: Row
    origin: Origin
    block: str

    @property
    def step(self) -> str:
        """The step in words: its line, its verb, its label where it has one."""
        label = f' "{printable(self.origin.label)}"' if self.origin.label else ""
        passes = "".join(f", pass {number}" for number in self.origin.passes[:1])
        return f"line {self.origin.place.line} {self.origin.step}{label}{passes}"

    @property
    def reasons(self) -> tuple[str, ...]:
        """Why figures are missing here, in words."""
        return tuple(in_words(reason) for reason in self.row.outside)


def entries(case: Case) -> tuple[Entry, ...]:
    """All rows of a case, in the order of play; empty when nothing was foretold."""
    if case.forecast is None:
        return ()
    return tuple(
        Entry(row, case.origin(row.number), case.block_name(row.block))
        for row in case.forecast.rows
    )


def figure_text(figure: Figure, unit: str) -> str:
    """A figure as people write it: `40 K [35 K, 50 K]`, or `not known`."""
    if not figure.known:
        return "not known"
    value = amount(figure.value, unit)
    if figure.low == figure.high:
        return value
    return f"{value} [{amount(figure.low, unit)}, {amount(figure.high, unit)}]"


_FREQUENCIES = ("bounce", "rotation", "drift")


def ledger_lines(ledger: Iterable[Entry]) -> Iterable[str]:
    """The ledger as a table of text; under a row why figures are missing, and what else it has."""
    kept = list(ledger)
    head = ["step", "cloud", *(name.replace("_", " ") for name in SHOWN), "model"]
    rows = [[*_first(entry), *_cells(entry.row), ", ".join(entry.row.models)] for entry in kept]
    widths = [max(len(row[column]) for row in (head, *rows)) for column in range(len(head))]
    yield _joined(head, widths)
    for entry, row in zip(kept, rows, strict=True):
        yield _joined(row, widths)
        more = [
            f"{name.replace('_', ' ')} {figure_text(figure, UNITS[name])}"
            for name, figure in entry.row.figures.items()
            if name not in (*SHOWN, *_FREQUENCIES)
        ]
        missing = [f"no figure: {reason}" for reason in entry.reasons]
        yield from (f"    {words}" for words in (*more, *missing, entry.row.cites) if words)


def _first(entry: Entry) -> tuple[str, str]:
    return entry.step, printable(entry.row.cloud)


def _cells(row: Row) -> list[str]:
    return [
        figure_text(row.figures[name], UNITS[name]) if name in row.figures else "" for name in SHOWN
    ]


def _joined(cells: list[str], widths: list[int]) -> str:
    return "  ".join(cell.ljust(width) for cell, width in zip(cells, widths, strict=True)).rstrip()
