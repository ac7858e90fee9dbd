"""The bytes of a block's CSV → whole numbers per column, each cell asked for as it must be.

A table needs no quotes, no blanks and no comments, so none are taken.  The volts beside a code
must be the shortest decimal of the float nearest to the exact gain * (low + code * lsb) + offset.
"""

from __future__ import annotations

import re
from array import array
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise

from wellseq.reread.plan import BlockPlan, Converter, Plan
from wellseq.reread.reading import Unsound

UNSOUND = "table-unsound"
CHUNK_ROWS = 65536
CHUNK_BYTES = 4 * 2**20
WHOLE = re.compile(r"0|[1-9][0-9]{0,17}")


@dataclass(frozen=True, slots=True)
class Table:
    """One block as read: ticks (rows,), and per column its codes, levels or states (rows,).

    `changes` are, per column, the rows at which it differs from the row before.
    """

    block: BlockPlan
    ticks: array[int]
    columns: dict[str, array[int]]
    changes: dict[str, list[int]]


def read_table(content: bytes, plan: Plan, block: BlockPlan) -> Table:
    """Read a whole table; raises Unsound at its first line that is not as it must be."""
    file = block.table
    lines = _count(content, file)
    body = content.index(b"\r\n") + 2
    head = _head(plan)
    if content[: body - 2] != ",".join(head).encode("utf-8"):
        raise Unsound(UNSOUND, file, "the first line does not name the columns of this trap")
    if lines - 1 != block.rows:
        message = f"{lines - 1} rows are here, {block.rows} were written"
        raise Unsound(UNSOUND, file, message, lines)
    table = Table(block, array("q"), {name: array("q") for name in _names(plan)}, {})
    for run in _runs(content, body, file):
        _take(table, plan, run, len(head), len(table.ticks) + 2)
    _in_order(table)
    table.changes.update((name, _changes(column)) for name, column in table.columns.items())
    return table


def _count(content: bytes, file: str) -> int:
    """The number of lines, all of which must end in CR LF."""
    if b'"' in content:
        raise Unsound(UNSOUND, file, "a table holds no quotes")
    lines = content.count(b"\r\n")
    if not content.endswith(b"\r\n") or lines < 2:
        raise Unsound(UNSOUND, file, "the last line is cut off", lines + 1)
    if content.count(b"\r") != lines or content.count(b"\n") != lines:
        raise Unsound(UNSOUND, file, "a line does not end in CR LF")
    return lines


def _runs(content: bytes, start: int, file: str) -> Iterator[list[str]]:
    """The lines from a place on, a few megabytes at a time."""
    while start < len(content):
        end = content.index(b"\r\n", min(start + CHUNK_BYTES, len(content) - 2))
        try:
            text = content[start:end].decode("utf-8")
        except UnicodeDecodeError as error:
            raise Unsound(UNSOUND, file, "this is not UTF-8 text") from error
        yield text.split("\r\n")
        start = end + 2


def _changes(column: array[int]) -> list[int]:
    return [row for row, (before, after) in enumerate(pairwise(column), 1) if before != after]


def _head(plan: Plan) -> list[str]:
    head = ["tick"]
    for converter in plan.converters:
        head += [f"{converter.name}.code", f"{converter.name}.V"]
    head += [f"{switch.name}.level" for switch in plan.switches]
    return head + [line.name for line in plan.lines]


def _names(plan: Plan) -> Iterator[str]:
    for output in plan.columns:
        yield output.name


def _take(table: Table, plan: Plan, rows: list[str], width: int, line: int) -> None:
    """Add a run of rows; `line` is the number of the first one in the file."""
    file = table.block.table
    cells = [row.split(",") for row in rows]
    for at, row in enumerate(cells):
        if len(row) != width:
            raise Unsound(UNSOUND, file, f"{len(row)} cells stand here, not {width}", line + at)
    columns = iter(zip(*cells, strict=True))
    table.ticks.extend(_whole(next(columns), file, "tick", 2**62))
    for converter in plan.converters:
        codes, volts = next(columns), next(columns)
        numbers = _whole(codes, file, converter.name, converter.code_max)
        _agree(converter, set(zip(codes, volts, strict=True)), file)
        table.columns[converter.name].extend(numbers)
    for switch in plan.switches:
        numbers = _whole(next(columns), file, switch.name, len(switch.levels) - 1)
        table.columns[switch.name].extend(numbers)
    for one in plan.lines:
        table.columns[one.name].extend(_states(next(columns), one.states, file, one.name))


def _whole(texts: tuple[str, ...], file: str, name: str, most: int) -> list[int]:
    known: dict[str, int] = {}
    for text in set(texts):
        if not WHOLE.fullmatch(text) or int(text) > most:
            raise Unsound(UNSOUND, file, f"'{text[:40]}' is no value of {name}, 0 to {most}")
        known[text] = int(text)
    return [known[text] for text in texts]


def _states(texts: tuple[str, ...], states: tuple[str, ...], file: str, name: str) -> list[int]:
    known = {state: index for index, state in enumerate(states)}
    strange = set(texts) - set(known)
    if strange:
        raise Unsound(UNSOUND, file, f"'{min(strange)[:40]}' is no state of {name}")
    return [known[text] for text in texts]


def _agree(converter: Converter, pairs: set[tuple[str, str]], file: str) -> None:
    """Every code and the volts beside it must say the same."""
    start, slope, bottom = converter.whole
    for code, volts in pairs:
        # One division of whole numbers is rounded correctly (Python's `int / int`).
        right = repr((start + slope * int(code)) / bottom)
        if volts != right:
            raise Unsound(
                UNSOUND,
                file,
                f"code {code} of {converter.name} is {right} V, the table says '{volts[:40]}'",
            )


def _in_order(table: Table) -> None:
    ticks, block = table.ticks, table.block
    if ticks[0] != 0:
        raise Unsound(UNSOUND, block.table, "the first row is not at tick 0", 2)
    for at in range(1, len(ticks)):
        if ticks[at] <= ticks[at - 1]:
            raise Unsound(UNSOUND, block.table, "ticks do not rise here", at + 2)
    if ticks[-1] * block.tick_s < block.duration_s:
        raise Unsound(
            UNSOUND, block.table, "the last row comes before the end of the block", len(ticks) + 1
        )
