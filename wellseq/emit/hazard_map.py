"""What is live when: a chart and tables of outputs, drives and lines, with the waits between.

The standing texts are data in `safety/texts/`; this file fills in what is true of one case.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from wellseq.checks.case import Case
from wellseq.checks.numbers import amount
from wellseq.emit.hazards import EXTRA_LOW_V, TOUCH_V, Hazard, Windows, hazards
from wellseq.emit.lives import LineLife, drive_windows, lines_over_time
from wellseq.emit.page import (
    Bar,
    Chart,
    ChartRow,
    Paragraph,
    Part,
    Section,
    Trusted,
    Words,
    paragraph,
    section,
    standing,
    table,
)
from wellseq.model.trap import Trap
from wellseq.timeline.shipped import Shipped
from wellseq.timeline.timeline import Timeline

WINDOWS_SHOWN = 6
GAP_s = 1.0
"""Windows with less than this between them are told as one: nobody may count on such a gap."""


class HazardMap:
    """The hazards of one case that got as far as its tables."""

    def __init__(self, trap: Trap, timeline: Timeline, shipped: Shipped) -> None:
        self.trap, self.timeline, self.shipped = trap, timeline, shipped
        self.names = [block.name for block in timeline.blocks]
        self.outputs = hazards(trap, shipped)
        live = [one for one in self.outputs if one.flagged or one.windows]
        self.live = sorted(live, key=lambda one: -one.largest_V)
        self.lines = lines_over_time(trap, timeline, shipped)

    def sections(self) -> Iterator[Section | None]:
        """Everything, in the order of the page."""
        yield self._outputs()
        yield self._stored()
        yield self._waits()
        yield self._end()
        yield self._drives()
        yield self._lines()

    # outputs

    def _outputs(self) -> Section | None:
        heading = "Outputs that can injure"
        if not self.outputs:
            said = Trusted(
                "No output is flagged hazardous, and by the trap file none can give more than "
                f"{TOUCH_V:g} V."
            )
            return section("outputs", heading, paragraph(said), self._chart(), *standing("touch"))
        head = (
            "output",
            "electrodes",
            "flagged",
            "most commanded",
            "able to",
            f"above {TOUCH_V:g} V",
        )
        rows = [
            (
                one.output,
                ", ".join(one.electrodes),
                "yes" if one.flagged else "no",
                (amount(one.largest_V, "V"), Trusted(_class(one.largest_V))),
                amount(one.able_V, "V"),
                times(one.windows, self.names),
            )
            for one in self.live
        ]
        quiet = [one for one in self.outputs if one not in self.live]
        said = Trusted(f"Able to give more than {TOUCH_V:g} V, but never commanded to: ")
        listed = ", ".join(f"{one.output} ({amount(one.able_V, 'V')})" for one in quiet)
        return section(
            "outputs",
            heading,
            self._chart(),
            table(head, rows) if rows else None,
            paragraph(said, listed, Trusted(".")) if quiet else None,
            *standing("touch"),
        )

    def _stored(self) -> Section | None:
        if not self.live:
            return None
        alike: dict[tuple[str, str], list[str]] = {}
        for one in sorted(self.live, key=lambda one: -(one.stored_J or 0.0)):
            if one.stored_J is not None:
                key = amount(one.stored_J, "J"), amount(one.largest_V, "V")
                alike.setdefault(key, []).append(one.output)
        unknown = ", ".join(one.output for one in self.live if one.stored_J is None)
        rows = [(energy, volts, ", ".join(names)) for (energy, volts), names in alike.items()]
        missing = paragraph(Trusted("No capacitance is given for: "), unknown, Trusted("."))
        return section(
            "stored",
            "Stored energy",
            *standing("stored-energy"),
            table(("stored energy", "at", "outputs"), rows) if rows else None,
            missing if unknown else None,
        )

    # waits and the end

    def _waits(self) -> Section | None:
        waits = [block for block in self.timeline.blocks if block.trigger]
        if not waits:
            return None
        head = ("trigger", "waits at most", "first row after it", f"above {TOUCH_V:g} V meanwhile")
        rows = [
            (
                block.trigger,
                amount(float(block.within_s), "s"),
                f"{amount(float(block.first_row_s), 's')} ± {amount(float(block.jitter_s), 's')}",
                ", ".join(self._standing(block.index - 1)) or "none",
            )
            for block in waits
        ]
        return section("waits", "Waits for triggers", *standing("waits"), table(head, rows))

    def _standing(self, index: int) -> list[str]:
        """The outputs that a block leaves above what may be touched."""
        return [one.output for one in self.outputs if one.ends_V[index] > TOUCH_V]

    def _end(self) -> Section | None:
        live = [one for one in self.outputs if one.ends_V[-1] > TOUCH_V]
        quiet = [one for one in self.outputs if one.flagged and one not in live]
        words: list[str] = []
        if live:
            words += [Trusted(f"**Left above {TOUCH_V:g} V: "), _left(live), Trusted(".**")]
        else:
            words.append(Trusted(f"No output of the list above is left above {TOUCH_V:g} V."))
        if quiet:
            said = Trusted(" Flagged hazardous and left below that: ")
            words += [said, _left(quiet), Trusted(".")]
        return section("end", "After the last row", *standing("end-state"), Paragraph(tuple(words)))

    # drives and lines

    def _drives(self) -> Section | None:
        rows = [
            (
                drive.ring,
                block.name,
                f"{amount(float(drive.start_s), 's')} to {amount(float(drive.stop_s), 's')}",
                f"{amount(drive.from_Hz, 'Hz')} to {amount(drive.to_Hz, 'Hz')}",
                amount(drive.amplitude_V, "V"),
            )
            for block in self.timeline.blocks
            for drive in block.drives
        ]
        if not rows:
            return None
        head = ("ring", "block", "when", "frequency", "amplitude")
        heading = "Radio-frequency drives"
        return section("drives", heading, *standing("drives"), table(head, rows))

    def _lines(self) -> Section | None:
        head = ("line", "is a", "begins", "not safe", "is left")
        rows = [self._line(one) for one in self.lines]
        return section("lines", "Digital lines", table(head, rows)) if rows else None

    def _line(self, life: LineLife) -> tuple[str | Words, ...]:
        line = life.line
        if line.kind == "input":
            said = "; ".join(
                f"{state} at {amount(at, 's')} of {self.names[block]}"
                for block, at, state in life.expected
            )
            expected = (Trusted("expected "), said) if said else (Trusted("nothing expected"),)
            return line.name, line.role or "–", "input, not set by the table", expected, ""
        unsafe = times(life.windows, self.names) if life.windows else "never"
        return (
            line.name,
            line.role or "–",
            line.initial,
            unsafe if line.safe else "no safe state is stated",
            life.left,
        )

    # the chart

    def _chart(self) -> Part | None:
        rows = [
            ChartRow(
                f"{one.output} {', '.join(one.electrodes)}".strip(),
                "high" if one.largest_V > EXTRA_LOW_V else "live",
                self._bars(one.windows, self._waits_of(one)),
            )
            for one in self.live
            if one.windows
        ]
        rows += [
            ChartRow(f"drive on {ring}", "drive", self._bars(windows, ()))
            for ring, windows in drive_windows(self.timeline).items()
        ]
        rows += [
            ChartRow(
                f"{one.line.name} not {one.line.safe}",
                "line",
                self._bars(one.windows, self._lasting(one.windows)),
            )
            for one in self.lines
            if one.windows
        ]
        return Chart(tuple(self._stretches()), tuple(rows)) if rows else None

    def _stretches(self) -> Iterator[tuple[str, float, bool]]:
        for block in self.timeline.blocks:
            if block.index:
                longest = block.within_s + block.first_row_s + block.jitter_s
                yield block.trigger, float(longest), True
            yield block.name, float(block.duration_s), False

    def _waits_of(self, one: Hazard) -> tuple[int, ...]:
        """The blocks after whose last row an output stands above what may be touched."""
        return tuple(i for i, volts in enumerate(one.ends_V[:-1]) if volts > TOUCH_V)

    def _lasting(self, windows: Windows) -> tuple[int, ...]:
        """The blocks at whose end a window is still open."""
        return tuple(
            block
            for block, _, end in windows
            if end >= float(self.timeline.blocks[block].duration_s)
            and block + 1 < len(self.timeline.blocks)
        )

    def _bars(self, windows: Windows, waits: Iterable[int]) -> tuple[Bar, ...]:
        """Windows as bars: block k is stretch 2 k of the chart, the wait after it 2 k + 1."""
        bars = [Bar(2 * block, start, end) for block, start, end in windows]
        stretches = list(self._stretches())
        bars += [Bar(2 * block + 1, 0.0, stretches[2 * block + 1][1]) for block in waits]
        return tuple(bars)


def hazard_map(case: Case) -> HazardMap | None:
    """The hazards of a case; None for one that has no tables."""
    if case.trap is None or case.timeline is None or case.shipped is None:
        return None
    return HazardMap(case.trap, case.timeline, case.shipped)


def times(windows: Windows, names: list[str]) -> str:
    """Windows in words, the first few of them."""
    if not windows:
        return "never commanded"
    windows = _closed_up(windows)
    shown = [
        f"{amount(start, 's')} to {amount(end, 's')} of {names[block]}"
        for block, start, end in windows[:WINDOWS_SHOWN]
    ]
    if len(windows) > WINDOWS_SHOWN:
        last = windows[-1]
        more = len(windows) - WINDOWS_SHOWN
        shown.append(f"{more} more, the last until {amount(last[2], 's')} of {names[last[0]]}")
    return "; ".join(shown)


def _closed_up(windows: Windows) -> Windows:
    found: Windows = []
    for block, start, end in windows:
        if found and found[-1][0] == block and start - found[-1][2] < GAP_s:
            found[-1] = block, found[-1][1], end
        else:
            found.append((block, start, end))
    return found


def _class(volts: float) -> str:
    if volts > EXTRA_LOW_V:
        return f", **above {EXTRA_LOW_V:g} V**"
    return f", **above {TOUCH_V:g} V**" if volts > TOUCH_V else ""


def _left(found: list[Hazard]) -> str:
    return "; ".join(f"{one.output} at {amount(one.ends_V[-1], 'V')}" for one in found)
