"""What rounding did to the wish: every edge onto its clock (s), every level onto its codes (V).

`rounded-times.csv` and `rounded-levels.csv`: asked, emitted, and the error emitted − asked, the
largest without sign first.  Times are decimal seconds of the block to 1e-18 s; volts are those at
the electrode.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from fractions import Fraction

import numpy as np

from wellseq.checks.case import Case
from wellseq.emit.blocks import decimal
from wellseq.emit.columns import scale_of
from wellseq.emit.escape import csv_text
from wellseq.emit.keys import Key
from wellseq.emit.sources import written_names
from wellseq.model.trap import Converter, Trap
from wellseq.timeline.ship import codes_of

TIMES, LEVELS = "rounded-times.csv", "rounded-levels.csv"
HEADS = {
    TIMES: ("block", "output", "file", "line", "asked_s", "emitted_s", "error_s"),
    LEVELS: (
        *("block", "output", "file", "line"),
        *("at_s", "asked_V", "code", "emitted_V", "error_V"),
    ),
}
Cells = list[str]


def write(key: Key) -> Iterator[tuple[str, list[bytes]]]:
    """(name, content) of both reports; they hold a line even where the error is 0 (s, V)."""
    case = key.case
    if case.trap is None or case.shipped is None:
        return
    yield TIMES, [_table(HEADS[TIMES], _times(case))]
    yield LEVELS, [_table(HEADS[LEVELS], _levels(case, case.trap))]


def _table(head: Iterable[str], rows: Iterable[Cells]) -> bytes:
    return "".join(",".join(cells) + "\r\n" for cells in (head, *rows)).encode("utf-8")


def _times(case: Case) -> list[Cells]:
    """One line per output and instant asked for: where a piece ends and the next begins is one."""
    where = _Where(case)
    edges = {
        (block.block.index, one.output, one.asked_s): one
        for block in (case.shipped.blocks if case.shipped is not None else ())
        for one in block.roundings
    }
    order = sorted(edges.items(), key=lambda item: (-abs(item[1].error_s), item[0]))
    return [
        [
            *(str(block + 1), csv_text(output), *where.of(one.number)),
            *(decimal(one.asked_s), decimal(one.emitted_s), decimal(one.error_s)),
        ]
        for (block, output, _), one in order
    ]


def _levels(case: Case, trap: Trap) -> list[Cells]:
    """One line per level that a piece goes to, and one per output for where the table begins."""
    where = _Where(case)
    blocks = case.shipped.blocks if case.shipped is not None else ()
    asked: list[tuple[int, str, Fraction, float, int]] = []
    for one in blocks[:1]:
        asked += [(0, name, Fraction(0), volts, -1) for name, volts in one.block.volts.items()]
    for one in blocks:
        asked += [
            (one.block.index, piece.output, piece.end_s, piece.to_V, piece.number)
            for piece in one.block.pieces
        ]
    emitted = _emitted(trap, [(output, volts) for _, output, _, volts, _ in asked])
    lines = []
    for (block, output, at_s, volts, number), (code, given) in zip(asked, emitted, strict=True):
        error = given - volts
        cells = [str(block + 1), csv_text(output), *where.of(number), decimal(at_s)]
        cells += [repr(volts), str(code), repr(given), repr(error)]
        lines.append(((-abs(error), block, at_s, output, number), cells))
    return [cells for _, cells in sorted(lines, key=lambda line: line[0])]


def _emitted(trap: Trap, asked: list[tuple[str, float]]) -> Iterator[tuple[int, float]]:
    """(code, electrode volts in V) for each (output, volts), in the same order."""
    by_output: dict[str, list[float]] = {}
    for output, volts in asked:
        by_output.setdefault(output, []).append(volts)
    found: dict[str, Iterator[tuple[int, float]]] = {}
    for output, wanted in by_output.items():
        converter = trap.output(output)
        if not isinstance(converter, Converter):
            raise TypeError(f"{output} is not a converter")
        codes = codes_of(converter, np.array(wanted)).tolist()
        start, slope, bottom = scale_of(converter)
        found[output] = iter([(code, (start + slope * code) / bottom) for code in codes])
    for output, _ in asked:
        yield next(found[output])


class _Where:
    """The file and line of a step, as cells."""

    def __init__(self, case: Case) -> None:
        self.case, self.names = case, written_names(case)

    def of(self, number: int) -> Cells:
        place = self.case.origin(number).place
        return [csv_text(self.names.get(place.file, place.file)), str(place.line)]
