"""A trap as text: the stack drawn along the axis, then tables of what every part can do.

Lengths in the drawing follow the electrodes' lengths as far as names and page allow; the numbers
are in the table below it.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from statistics import median

from wellseq.base.names import printable
from wellseq.checks.numbers import amount
from wellseq.model.trap import Converter, Electrode, Switch, Trap

CELLS_TYPICAL = 8
CELLS_MOST = 20
SECTORED, PLAIN = "#", "="


def drawing(trap: Trap, width: int) -> str:
    """The whole description of a trap for a page of `width` columns; ends with a new line."""
    parts = [
        _heading(trap),
        *_stack(trap, width),
        _electrodes(trap),
        _outputs(trap),
        _lines(trap),
        _triggers(trap),
        _margins(trap),
    ]
    return "\n\n".join(part for part in parts if part) + "\n"


def _heading(trap: Trap) -> str:
    along = trap.field.along
    strengths = sorted({field_T for _, field_T in along})
    field = " to ".join(amount(one, "T") for one in dict.fromkeys((strengths[0], strengths[-1])))
    return (
        f"{printable(trap.name)}: {len(trap.electrodes)} electrodes on "
        f"{len(trap.outputs)} outputs, field {field}, {trap.bore.ends} ends"
    )


def _stack(trap: Trap, width: int) -> Iterator[str]:
    """Rows of the drawing, as many electrodes in each as the page is wide for."""
    typical = median(one.length_m for one in trap.electrodes)
    row: list[tuple[Electrode, int]] = []
    used = 0
    for one in trap.electrodes:
        wanted = round(one.length_m / typical * CELLS_TYPICAL) if typical > 0 else 0
        label = max(len(one.name), len(_millimetres(one.from_m))) + 2
        cells = max(label, min(wanted, CELLS_MOST))
        if row and used + cells + 1 > width:
            yield _drawn(row)
            row, used = [], 0
        row.append((one, cells))
        used += cells + 1
    yield _drawn(row)


def _drawn(row: Sequence[tuple[Electrode, int]]) -> str:
    places, upper, lower = [], [], []
    for one, cells in row:
        wall = SECTORED if one.sectors > 1 else PLAIN
        places.append(_millimetres(one.from_m).ljust(cells))
        upper.append(f"[{one.name.center(cells - 2, wall)}]")
        lower.append(f"[{wall * (cells - 2)}]")
    last = _millimetres(row[-1][0].to_m)
    axis = "- " * ((sum(cells for _, cells in row) + len(row)) // 2)
    rows = (" ".join(places) + f" {last} mm", " ".join(upper), f"{axis}- z", " ".join(lower))
    return "\n".join(line.rstrip() for line in rows)


def _millimetres(metres: float) -> str:
    return f"{metres * 1e3:.6g}"


def _electrodes(trap: Trap) -> str:
    rows = []
    after: list[Electrode | None] = [*trap.electrodes[1:], None]
    for one, following in zip(trap.electrodes, after, strict=True):
        gap = "" if following is None else amount(following.from_m - one.to_m, "m")
        rows.append(
            (
                one.name,
                amount(one.length_m, "m"),
                gap,
                amount(one.radius_m, "m"),
                str(one.sectors) if one.sectors > 1 else "",
                one.output,
            )
        )
    return _table(("electrode", "length", "gap after", "radius", "sectors", "output"), rows)


def _outputs(trap: Trap) -> str:
    converters = [one for one in trap.outputs if isinstance(one, Converter)]
    switches = [one for one in trap.outputs if isinstance(one, Switch)]
    head = ("converter", "reaches", "one code", "slew", "clock", "between rows", "hazardous")
    rows = [
        (
            one.name,
            " to ".join(amount(end, "V") for end in one.reach_V),
            amount(one.gain * one.code_V, "V"),
            amount(one.slew_V_per_s, "V/s"),
            amount(float(one.clock_s), "s"),
            one.between_rows,
            "yes" if one.hazardous else "",
        )
        for one in converters
    ]
    switch_rows = [
        (
            one.name,
            " or ".join(
                level if isinstance(level, str) else amount(level, "V") for level in one.levels
            ),
            amount(float(one.edge_s), "s"),
            amount(float(one.clock_s), "s"),
            "yes" if one.hazardous else "",
        )
        for one in switches
    ]
    switch_head = ("switch", "levels", "edge", "clock", "hazardous")
    return "\n\n".join(
        part for part in (_table(head, rows), _table(switch_head, switch_rows)) if part
    )


def _lines(trap: Trap) -> str:
    rows = [(one.name, one.kind, ", ".join(one.states), one.initial) for one in trap.lines]
    return _table(("line", "kind", "states", "begins"), rows)


def _triggers(trap: Trap) -> str:
    rows = [
        (
            one.name,
            amount(float(one.within_s), "s") if one.within_s is not None else "each step says",
            f"{amount(float(one.latency_s), 's')} ± {amount(float(one.jitter_s), 's')}",
        )
        for one in trap.triggers
    ]
    return _table(("trigger", "waits at most", "first row after it"), rows)


def _margins(trap: Trap) -> str:
    margins = trap.margins
    rows = [
        ("depth of any well at least", amount(margins.depth_V, "V")),
        ("staircase off its ramp at most", amount(margins.staircase_V, "V")),
        ("neighbours apart at most", amount(margins.neighbour_difference_V, "V")),
        ("wells of two species apart at least", amount(margins.separation_m, "m")),
        ("rows of one block at most", str(margins.table_rows)),
    ]
    rows += [
        (f"{' and '.join(pair.between)} apart at most", amount(pair.difference_V, "V"))
        for pair in margins.pairs
    ]
    return _table(("margin", "limit"), rows)


def _table(head: tuple[str, ...], rows: Sequence[tuple[str, ...]]) -> str:
    """Columns set apart by two blanks; empty when there is no row."""
    if not rows:
        return ""
    lines = [head, *[tuple(printable(cell) for cell in row) for row in rows]]
    widths = [max(len(line[column]) for line in lines) for column in range(len(head))]
    return "\n".join(
        "  ".join(cell.ljust(size) for cell, size in zip(line, widths, strict=True)).rstrip()
        for line in lines
    )
