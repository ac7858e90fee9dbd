"""Rows → lines of CSV (RFC 4180): whole ticks, converter codes with their volts, levels, states.

Made in runs of rows, so that a long table never stands in memory as text.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from wellseq.emit.columns import Column, Kind, Rows, Whole
from wellseq.emit.escape import csv_text

CHUNK_ROWS = 16384


def header(columns: tuple[Column, ...], first: str = "tick") -> bytes:
    """The line that names the columns: a converter has one for its code and one for its volts."""
    head = [first]
    for column in columns:
        head += titles(column)
    return (",".join(map(csv_text, head)) + "\r\n").encode("utf-8")


def titles(column: Column) -> list[str]:
    """What stands at the head of a column's cells: `NAME.code` and `NAME.V`, `NAME.level`, `NAME`.

    The volts are those at the electrode, V.
    """
    if column.kind is Kind.CODE:
        return [f"{column.name}.code", f"{column.name}.V"]
    return [f"{column.name}.level" if column.kind is Kind.LEVEL else column.name]


def lines(rows: Rows) -> Iterator[bytes]:
    """The rows as lines, run after run."""
    for ticks, numbers in rows.runs(CHUNK_ROWS):
        yield _run(rows.columns, ticks, numbers)


def _run(columns: tuple[Column, ...], ticks: Whole, numbers: list[Whole]) -> bytes:
    """One run: what stands still in it is written into the pattern of its lines only once."""
    pattern = "%s"
    moving = [list(map(str, ticks.tolist()))]
    for column, found in zip(columns, numbers, strict=True):
        if (found == found[0]).all():
            pattern += "," + _cells(column, [int(found[0])])[0].replace("%", "%%")
            continue
        pattern += ",%s"
        distinct, which = np.unique(found, return_inverse=True)
        texts = np.array(_cells(column, distinct.tolist()), dtype=object)
        moving.append(texts[which].tolist())
    pattern += "\r\n"
    return "".join([pattern % row for row in zip(*moving, strict=True)]).encode("utf-8")


def _cells(column: Column, numbers: list[int]) -> list[str]:
    """What stands in a table for numbers of a column; code and volts with the comma between."""
    if column.kind is Kind.CODE:
        return [
            f"{code},{volts!r}" for code, volts in zip(numbers, column.volts(numbers), strict=True)
        ]
    if column.kind is Kind.LEVEL:
        return list(map(str, numbers))
    return [csv_text(column.words[number]) for number in numbers]
