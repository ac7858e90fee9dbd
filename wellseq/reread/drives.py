"""The bytes of a block's drive table → its cells, each asked for as it must be."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from fractions import Fraction

from wellseq.reread.plan import BlockPlan
from wellseq.reread.reading import Unsound

UNSOUND = "drives-unsound"
HEAD = ("ring", "start_s", "stop_s", "from_Hz", "to_Hz", "amplitude_V", "order")
DECIMAL = re.compile(r"(?:0|[1-9][0-9]{0,12})(?:\.[0-9]{0,17}[1-9])?")
FLOAT = re.compile(r"[0-9]{1,24}(?:\.[0-9]{1,24})?(?:e[+-][0-9]{1,3})?")
ATTO = Fraction(1, 10**18)


def read_drives(content: bytes, block: BlockPlan, rings: Mapping[str, int]) -> list[list[str]]:
    """The drives of a block as text cells, empty phases left out; raises Unsound."""
    file = str(block.drives)
    try:
        text = content.decode("utf-8")
    except UnicodeDecodeError as error:
        raise Unsound(UNSOUND, file, "this is not UTF-8 text") from error
    lines = text.split("\r\n")
    if lines[-1] != "" or len(lines) < 3 or len(text.splitlines()) != len(lines) - 1:
        raise Unsound(UNSOUND, file, "the lines do not end in CR LF or are cut off")
    head = lines[0].split(",")
    phases = [f"phase_{number + 1}_deg" for number in range(len(head) - len(HEAD))]
    if head != [*HEAD, *phases]:
        raise Unsound(UNSOUND, file, "the first line does not name the columns of a drive table")
    found = []
    for number, line in enumerate(lines[1:-1], 2):
        cells = line.split(",")
        if len(cells) != len(head):
            raise Unsound(UNSOUND, file, f"{len(cells)} cells stand here, not {len(head)}", number)
        found.append(_drive(cells, block, rings, number))
    return found


def _drive(cells: list[str], block: BlockPlan, rings: Mapping[str, int], line: int) -> list[str]:
    def wrong(message: str) -> Unsound:
        return Unsound(UNSOUND, str(block.drives), message, line)

    sectors = rings.get(cells[0], 0)
    used = cells[: len(HEAD) + sectors]
    if sectors < 4 or any(cells[len(used) :]):
        raise wrong(f"'{cells[0][:40]}' is no ring of so many sectors")
    if not all(DECIMAL.fullmatch(cell) for cell in used[1:3]):
        raise wrong("a time is not a decimal number of seconds")
    start, stop = Fraction(used[1]), Fraction(used[2])
    if not start < stop <= block.duration_s + ATTO:
        raise wrong("a drive does not lie within its block")
    numbers = used[3:6] + used[len(HEAD) :]
    if not all(_is_float(cell) for cell in numbers) or float(used[5]) <= 0:
        raise wrong("a frequency, an amplitude or a phase is not a number as wellseq writes it")
    if used[6] not in ("1", "2"):
        raise wrong("the order of a drive is 1 or 2")
    if any(not 0 <= float(phase) < 360 for phase in used[len(HEAD) :]):
        raise wrong("a phase is not from 0 to 360 degrees")
    return used


def _is_float(cell: str) -> bool:
    return bool(FLOAT.fullmatch(cell)) and math.isfinite(float(cell)) and repr(float(cell)) == cell
