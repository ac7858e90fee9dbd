"""Timeline → Shipped: the fewest rows of whole ticks and codes that follow the wish.

A card that holds its value between rows gets a staircase in equal steps of progress, each step at
the instant when the wish is half-way to it, so that the wish is never further off than half a
step.  A card that draws lines gets its corners, and a smooth piece as many chords as it takes: a
chord over a time h strays by at most h²/8 of the second derivative.  Every instant is rounded once,
from the block's zero, to its output's clock.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from fractions import Fraction

import numpy as np
import numpy.typing as npt

from wellseq.model.trap import Converter, Switch, Trap
from wellseq.timeline.clocks import coarsest, finest, nearest_multiple
from wellseq.timeline.shipped import Integers, Rounding, Shipped, ShippedBlock, Stray
from wellseq.timeline.timeline import Block, Piece, Shape, Timeline

Floats = npt.NDArray[np.float64]


def ship(timeline: Timeline) -> Shipped:
    """Quantise every block; what was lost by rounding is kept beside the rows."""
    trap = timeline.trap
    converters = [output for output in trap.outputs if isinstance(output, Converter)]
    return Shipped(
        converters=tuple(output.name for output in converters),
        switches=tuple(output.name for output in trap.outputs if isinstance(output, Switch)),
        lines=tuple(line.name for line in trap.lines),
        blocks=tuple(_Loading(trap, block).rows() for block in timeline.blocks),
        code_V={output.name: abs(output.gain) * output.code_V for output in converters},
    )


@dataclass(slots=True)
class _Track:
    """What one converter is told: (ticks,) and volts (ticks,), in chunks, in order of time."""

    ticks: list[Integers]
    volts: list[Floats]
    last: int = 0

    def add(self, ticks: Integers, volts: Floats) -> None:
        self.ticks.append(ticks)
        self.volts.append(volts)
        self.last = int(ticks[-1])

    def whole(self) -> tuple[Integers, Floats]:
        return np.concatenate(self.ticks), np.concatenate(self.volts)


@dataclass(slots=True)
class _Loading:
    """One block while its rows are made."""

    trap: Trap
    block: Block
    tick_s: Fraction = Fraction(1)
    tracks: dict[str, _Track] = field(default_factory=dict)
    roundings: list[Rounding] = field(default_factory=list)
    strays: list[Stray] = field(default_factory=list)
    budget: int = 0

    def rows(self) -> ShippedBlock:
        trap, block = self.trap, self.block
        clocks = [output.clock_s for output in trap.outputs] + [line.clock_s for line in trap.lines]
        self.tick_s = finest(clocks)
        self.budget = trap.margins.table_rows + 1
        for name, volts in block.volts.items():
            self.tracks[name] = _Track([np.zeros(1, np.int64)], [np.array([volts])])
        for group in _groups(block.pieces):
            self._load(group)
        edges = self._edge_ticks()
        lines = self._line_ticks()
        end = math.ceil(block.duration_s / self.tick_s)
        ticks = self._all_ticks(edges, lines, end)
        return ShippedBlock(
            block=block,
            tick_s=self.tick_s,
            ticks=ticks,
            codes=self._codes(ticks),
            levels=_columns(ticks, edges, list(block.levels.values())),
            states=_columns(ticks, lines, self._first_states()),
            roundings=tuple(self.roundings),
            strays=tuple(self.strays),
        )

    # pieces that move with one progress

    def _load(self, group: list[Piece]) -> None:
        holding: list[Piece] = []
        lining: list[Piece] = []
        for piece in group:
            converter = self._converter(piece.output)
            (holding if converter.between_rows == "hold" else lining).append(piece)
        if group[0].shape is Shape.EDGE:
            for piece in holding:
                self._jump(piece)
        elif holding:
            self._staircase(holding)
        for piece in lining:
            self._corners(piece)

    def _jump(self, piece: Piece) -> None:
        tick = self._round(piece, piece.start_s)
        self.tracks[piece.output].add(np.array([tick]), np.array([piece.to_V]))
        self._stray(piece, 0.0, 1, tick, tick)

    def _staircase(self, pieces: list[Piece]) -> None:
        first = pieces[0]
        clock = coarsest(self._converter(piece.output).clock_s for piece in pieces)
        steps = self._step_count(pieces, clock)
        middles = (np.arange(steps) + 0.5) / steps
        share = np.arccos(1 - 2 * middles) / np.pi if first.shape is Shape.SMOOTH else middles
        per_clock = int(clock / self.tick_s)
        asked = float(first.start_s / clock) + share * float((first.end_s - first.start_s) / clock)
        earliest = max(self.tracks[piece.output].last for piece in pieces)
        ticks = np.maximum(np.floor(asked + 0.5).astype(np.int64) * per_clock, earliest)
        worst = int(np.argmax(np.abs(ticks - asked * per_clock)))
        reached = (np.arange(steps) + 1.0) / steps
        for piece in pieces:
            swing = piece.to_V - piece.from_V
            volts = piece.from_V + swing * reached
            volts[-1] = piece.to_V
            self.tracks[piece.output].add(ticks, volts)
            late_s = abs(float(ticks[worst] - asked[worst] * per_clock) * float(self.tick_s))
            stray_V = abs(swing) / (2 * steps) + piece.slope_max_V_per_s * late_s
            self._stray(piece, stray_V, steps, int(ticks[0]), int(ticks[-1]))
            self._round(piece, piece.start_s)
            self._round(piece, piece.end_s)

    def _step_count(self, pieces: list[Piece], clock: Fraction) -> int:
        """Steps that keep every piece within the staircase, as far as clock and memory allow."""
        allowed = self.trap.margins.staircase_V
        needed = 1.0
        for piece in pieces:
            room = allowed - piece.slope_max_V_per_s * float(clock) / 2
            swing = abs(piece.to_V - piece.from_V)
            needed = max(needed, swing / (2 * room) if room > 0 else math.inf)
        slots = max(1, math.floor((pieces[0].end_s - pieces[0].start_s) / clock))
        steps = int(min(math.ceil(min(needed, 1e9) * (1 - 1e-12)), slots, max(self.budget, 1)))
        self.budget -= steps
        return steps

    def _corners(self, piece: Piece) -> None:
        clock = self._converter(piece.output).clock_s
        track = self.tracks[piece.output]
        start = max(self._round(piece, piece.start_s), track.last)
        end = max(self._round(piece, piece.end_s), start + int(clock / self.tick_s))
        chords, swing = 1, abs(piece.to_V - piece.from_V)
        if piece.shape is Shape.SMOOTH:
            wanted = math.pi / 4 * math.sqrt(swing / (0.9 * self.trap.margins.staircase_V))
            slots = (end - start) // int(clock / self.tick_s)
            chords = int(min(max(math.ceil(min(wanted, 1e9)), 1), slots, max(self.budget, 1)))
        self.budget -= chords + 1
        per_clock = int(clock / self.tick_s)
        inner = np.round(np.linspace(start, end, chords + 1) / per_clock).astype(np.int64)
        ticks = inner * per_clock
        ticks[0], ticks[-1] = start, end
        share = (ticks - start) / float(end - start)
        curve = 0.5 * (1 - np.cos(np.pi * share)) if piece.shape is Shape.SMOOTH else share
        volts = piece.from_V + (piece.to_V - piece.from_V) * curve
        volts[-1] = piece.to_V
        track.add(ticks, volts)
        self._stray(piece, self._corner_stray(piece, ticks), chords + 1, start, end)

    def _corner_stray(self, piece: Piece, ticks: Integers) -> float:
        tick = float(self.tick_s)
        late_s = max(
            abs(float(int(ticks[0]) * self.tick_s - piece.start_s)),
            abs(float(int(ticks[-1]) * self.tick_s - piece.end_s)),
        )
        stray = piece.slope_max_V_per_s * late_s
        if piece.shape is Shape.SMOOTH:
            longest_s = float(np.max(np.diff(ticks))) * tick
            played_s = float(ticks[-1] - ticks[0]) * tick
            bend = abs(piece.to_V - piece.from_V) / 2 * (math.pi / played_s) ** 2
            stray += longest_s**2 / 8 * bend
        return stray

    def _round(self, piece: Piece, time_s: Fraction) -> int:
        emitted = nearest_multiple(time_s, self._converter(piece.output).clock_s)
        self.roundings.append(Rounding(piece.number, piece.output, time_s, emitted))
        return int(emitted / self.tick_s)

    def _stray(self, piece: Piece, volts: float, rows: int, first: int, last: int) -> None:
        self.strays.append(
            Stray(
                piece.number,
                piece.output,
                piece.start_s,
                piece.end_s,
                volts,
                rows,
                max(piece.start_s - first * self.tick_s, Fraction(0)),
                max(last * self.tick_s - piece.end_s, Fraction(0)),
            )
        )

    def _converter(self, name: str) -> Converter:
        output = self.trap.output(name)
        if not isinstance(output, Converter):
            raise TypeError(f"{name} is not a converter")
        return output

    # switches and lines

    def _edge_ticks(self) -> dict[int, list[tuple[int, int]]]:
        """Per switch column: (tick, level) in order."""
        order = {name: column for column, name in enumerate(self.block.levels)}
        found: dict[int, list[tuple[int, int]]] = {}
        for edge in self.block.edges:
            emitted = nearest_multiple(edge.command_s, self.trap.output(edge.output).clock_s)
            self.roundings.append(Rounding(edge.number, edge.output, edge.command_s, emitted))
            tick = int(emitted / self.tick_s)
            found.setdefault(order[edge.output], []).append((tick, edge.to_level))
        return found

    def _line_ticks(self) -> dict[int, list[tuple[int, int]]]:
        """Per line column: (tick, state index) in order; declared states of inputs are no rows."""
        order = {name: column for column, name in enumerate(self.block.states)}
        found: dict[int, list[tuple[int, int]]] = {}
        for change in self.block.changes:
            if change.expected:
                continue
            line = self.trap.line(change.line)
            emitted = nearest_multiple(change.time_s, line.clock_s)
            self.roundings.append(Rounding(change.number, change.line, change.time_s, emitted))
            tick = int(emitted / self.tick_s)
            state = line.states.index(change.state)
            found.setdefault(order[change.line], []).append((tick, state))
        return found

    def _first_states(self) -> list[int]:
        return [
            self.trap.line(name).states.index(state) for name, state in self.block.states.items()
        ]

    # rows

    def _all_ticks(
        self,
        edges: dict[int, list[tuple[int, int]]],
        lines: dict[int, list[tuple[int, int]]],
        end: int,
    ) -> Integers:
        single = [tick for column in (*edges.values(), *lines.values()) for tick, _ in column]
        chunks = [chunk for track in self.tracks.values() for chunk in track.ticks]
        found: Integers = np.unique(np.concatenate([*chunks, np.array([0, *single], np.int64)]))
        if end > found[-1]:
            found = np.append(found, end)
        return found

    def _codes(self, ticks: Integers) -> Integers:
        columns = []
        for name, track in self.tracks.items():
            converter = self._converter(name)
            at, volts = track.whole()
            if converter.between_rows == "hold":
                wished = volts[np.searchsorted(at, ticks, side="right") - 1]
            else:
                wished = np.interp(ticks, at, volts)
            columns.append(codes_of(converter, wished))
        return np.stack(columns, axis=1) if columns else np.zeros((len(ticks), 0), np.int64)


def codes_of(converter: Converter, volts: Floats) -> Integers:
    """Converter codes for electrode volts, both (n,): calibration undone, clipped to the range.

    Raises ValueError for a value that is not finite, before anything becomes an integer.
    """
    if not np.all(np.isfinite(volts)):
        raise ValueError("a voltage that is not finite cannot become a code")
    nominal = (volts - converter.offset_V) / converter.gain
    share = np.clip(nominal, converter.low_V, converter.high_V) - converter.low_V
    codes: Integers = np.floor(share / converter.code_V + 0.5).astype(np.int64)
    highest: Integers = np.minimum(codes, 2**converter.bits - 1)
    return highest


def _groups(pieces: Iterable[Piece]) -> Iterator[list[Piece]]:
    """Pieces that share step, start, end and shape, in order of time."""
    together: dict[tuple[object, ...], list[Piece]] = {}
    for piece in pieces:
        key = (piece.start_s, piece.end_s, piece.number, piece.shape)
        together.setdefault(key, []).append(piece)
    yield from together.values()


def _columns(
    ticks: Integers, changes: dict[int, list[tuple[int, int]]], first: list[int]
) -> Integers:
    """(rows, columns) of values that hold until they change; `first` stands before any change."""
    table = np.tile(np.array(first, np.int64).reshape(1, -1), (len(ticks), 1))
    for column, entries in changes.items():
        at = np.array([-1, *(tick for tick, _ in entries)], np.int64)
        values = np.array([first[column], *(value for _, value in entries)], np.int64)
        table[:, column] = values[np.searchsorted(at, ticks, side="right") - 1]
    return table
