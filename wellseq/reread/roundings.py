"""The reports of rounding: asked, emitted and error agree, within half a clock or half a code.

`rounded-times.csv` (s) and `rounded-levels.csv` (V), the largest error first.
"""

from __future__ import annotations

import csv
import io
import math
import re
from collections.abc import Iterator
from fractions import Fraction

from wellseq.reread.plan import Converter, Plan
from wellseq.reread.reading import Unsound

UNSOUND = "roundings-unsound"
TIMES, LEVELS = "rounded-times.csv", "rounded-levels.csv"
_WHERE = ("block", "output", "file", "line")
HEADS = {
    TIMES: (*_WHERE, "asked_s", "emitted_s", "error_s"),
    LEVELS: (*_WHERE, "at_s", "asked_V", "code", "emitted_V", "error_V"),
}
ATTO = Fraction(1, 10**18)
DECIMAL = re.compile(r"-?(?:0|[1-9][0-9]{0,12})(?:\.[0-9]{0,17}[1-9])?")
WHOLE = re.compile(r"0|[1-9][0-9]{0,17}")


def judge_roundings(content: bytes, file: str, plan: Plan, sources: set[str]) -> Iterator[Unsound]:
    """Everything wrong with one report; `sources` are the files that a step may stand in."""
    judge = _time_wrong if file == TIMES else _level_wrong
    largest: Fraction | None = None
    for number, cells in _lines(content, file):
        if not WHOLE.fullmatch(cells["block"]) or not 1 <= int(cells["block"]) <= len(plan.blocks):
            yield Unsound(UNSOUND, file, "there is no block of this number", number)
            return
        if cells["file"] not in sources or not WHOLE.fullmatch(cells["line"]):
            yield Unsound(UNSOUND, file, "this is no place in a source of the folder", number)
            return
        said, error = judge(cells, plan)
        if not said and largest is not None and error > largest:
            said = "the errors do not fall from the largest to the least"
        if said:
            yield Unsound(UNSOUND, file, said, number)
            return
        largest = error


def _lines(content: bytes, file: str) -> Iterator[tuple[int, dict[str, str]]]:
    """(line number, cells by column); raises Unsound where the form is not kept."""
    try:
        text = content.decode("utf-8")
    except UnicodeDecodeError as error:
        raise Unsound(UNSOUND, file, "this is not UTF-8 text") from error
    if not text.endswith("\r\n") or text.count("\n") != text.count("\r\n"):
        raise Unsound(UNSOUND, file, "the lines do not end in CR LF or are cut off")
    try:
        head, *rows = csv.reader(io.StringIO(text, newline=""), strict=True)
    except csv.Error as error:
        raise Unsound(UNSOUND, file, f"this is no CSV: {error}") from error
    if tuple(head) != HEADS[file]:
        raise Unsound(UNSOUND, file, "the first line does not name the columns of this report")
    for number, row in enumerate(rows, 2):
        if len(row) != len(head):
            raise Unsound(UNSOUND, file, f"{len(row)} cells stand here, not {len(head)}", number)
        yield number, dict(zip(head, row, strict=True))


def _time_wrong(cells: dict[str, str], plan: Plan) -> tuple[str, Fraction]:
    """What is wrong with a line, and its error without sign (s)."""
    clocks = {output.name: output.clock_s for output in plan.columns}
    clock_s = clocks.get(cells["output"])
    if clock_s is None:
        return "there is no output or line of this name", Fraction(0)
    texts = [cells[key] for key in ("asked_s", "emitted_s", "error_s")]
    if not all(DECIMAL.fullmatch(text) for text in texts):
        return "a time is not a decimal number of seconds", Fraction(0)
    asked, emitted, error = map(Fraction, texts)
    # Each of the three was cut to 18 places on its own.
    if abs(emitted - asked - error) > 2 * ATTO:
        return "the error is not emitted minus asked", Fraction(0)
    if abs(emitted - round(emitted / clock_s) * clock_s) > ATTO:
        return f"this is no instant of the clock of {cells['output']}", Fraction(0)
    if abs(error) > clock_s / 2 + 2 * ATTO:
        return "an edge was moved by more than half a clock", Fraction(0)
    return "", abs(error)


def _level_wrong(cells: dict[str, str], plan: Plan) -> tuple[str, Fraction]:
    """What is wrong with a line, and its error without sign (V)."""
    converters = {one.name: one for one in plan.converters}
    one = converters.get(cells["output"])
    if one is None:
        return "there is no converter of this name", Fraction(0)
    floats = [_float(cells[key]) for key in ("asked_V", "emitted_V", "error_V")]
    if None in floats or not WHOLE.fullmatch(cells["code"]) or not DECIMAL.fullmatch(cells["at_s"]):
        return "a number is not written as wellseq writes it", Fraction(0)
    asked, emitted, error = (float(number or 0.0) for number in floats)
    code = int(cells["code"])
    if code > one.code_max or emitted != _volts(one, code):
        return f"code {code} of {one.name} is not {emitted!r} V", Fraction(0)
    if error != emitted - asked:
        return "the error is not emitted minus asked", Fraction(0)
    half_V = one.code_V / 2 * (1 + Fraction(1, 10**9)) + Fraction(1, 10**12)
    if abs(Fraction(emitted) - Fraction(asked)) > half_V:
        return "a level was moved by more than half a code", Fraction(0)
    return "", abs(Fraction(error))


def _volts(one: Converter, code: int) -> float:
    start, slope, bottom = one.whole
    return (start + slope * code) / bottom


def _float(text: str) -> float | None:
    """The float that a text is the shortest way to write, else None."""
    try:
        number = float(text)
    except ValueError:
        return None
    return number if math.isfinite(number) and repr(number) == text else None
