"""Timeline → segments: between two breakpoints, how all electrodes move and may err.

On a segment the wished voltages are base + Σ p_k moves_k, every p_k going from 0 to 1.  Straight
pieces share one progress, time; smooth pieces that begin and end together share theirs; an edge is
a progress of its own, since its shape is not known.  Mixtures are replaced by their chords, with
|wish − chord| <= (h²/8) max|V''| as `shape_V`.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise

import numpy as np
import numpy.typing as npt

from wellseq.model.trap import Converter, Switch, Trap
from wellseq.timeline.deviations import Carry, Deviations
from wellseq.timeline.shipped import ShippedBlock
from wellseq.timeline.timeline import Block, Edge, Piece, Shape

Vector = npt.NDArray[np.float64]
SETTLED_TIME_CONSTANTS = 8
"""After this many time constants a segment ends, so that what follows is judged without the lag."""


@dataclass(frozen=True, slots=True)
class Segment:
    """One stretch of a block on which the motion is simple.

    base, shape_V, stray_V, lag_V, half_code_V, calibration_V, noise_V: (electrodes,) in V.
    moves: (progresses, electrodes) in V; no row when nothing moves.  `number` is the step in whose
    span the segment lies (the last one that began).  `mixed` holds what is needed to cut it.
    """

    start_s: Fraction
    end_s: Fraction
    number: int
    base: Vector
    moves: Vector
    shape_V: Vector
    stray_V: Vector
    lag_V: Vector
    half_code_V: Vector
    calibration_V: Vector
    noise_V: Vector
    source: Moving

    def end(self) -> Vector:
        """Wished volts (electrodes,) when every progress is 1."""
        reached: Vector = self.base + self.moves.sum(axis=0)
        return reached

    def deviation_V(self) -> Vector:
        """Everything by which an electrode may differ from base + Σ p_k moves_k, summed, V."""
        return (
            self.shape_V
            + self.stray_V
            + self.lag_V
            + self.half_code_V
            + self.calibration_V
            + self.noise_V
        )

    def cut(self) -> tuple[Segment, Segment] | None:
        """The two halves of the segment's time, or None when cutting would not tighten it."""
        if not self.source.cuttable or self.start_s == self.end_s:
            return None
        middle = (self.start_s + self.end_s) / 2
        return self.source.between(self, self.start_s, middle), self.source.between(
            self, middle, self.end_s
        )


@dataclass(frozen=True, slots=True)
class Swing:
    """An edge under way: its electrodes, volts before and after, and how far a level drifts, V."""

    electrodes: tuple[int, ...]
    from_V: float
    to_V: float
    drift_V: float


@dataclass(frozen=True, slots=True)
class Moving:
    """What moves on a segment (pieces with their electrodes, edges) and what stands still."""

    trap: Trap
    still: Vector
    pieces: tuple[tuple[Piece, tuple[int, ...]], ...]
    edges: tuple[Swing, ...]

    @property
    def cuttable(self) -> bool:
        """Whether halves in time have a smaller deviation of shape or a shorter way."""
        return any(piece.shape is not Shape.EDGE for piece, _ in self.pieces)

    def motion(self, start_s: Fraction, end_s: Fraction) -> tuple[Vector, Vector, Vector]:
        """base, moves and shape_V (V) between two instants (s)."""
        base = self.still.copy()
        shape_V = np.zeros_like(base)
        rows: list[Vector] = []
        timed = [(p, e) for p, e in self.pieces if p.shape is not Shape.EDGE]
        together = len({(p.start_s, p.end_s, p.shape) for p, _ in timed}) <= 1
        if timed:
            row = np.zeros_like(base)
            for piece, electrodes in timed:
                before, after = piece.at(start_s), piece.at(end_s)
                base[list(electrodes)] = before
                row[list(electrodes)] = after - before
                if not together and piece.shape is Shape.SMOOTH:
                    shape_V[list(electrodes)] = _bend(piece, start_s, end_s)
            rows.append(row)
        for piece, electrodes in self.pieces:
            if piece.shape is Shape.EDGE:
                row = np.zeros_like(base)
                base[list(electrodes)] = piece.from_V
                row[list(electrodes)] = piece.to_V - piece.from_V
                rows.append(row)
        for swing in self.edges:
            row = np.zeros_like(base)
            base[list(swing.electrodes)] = swing.from_V
            row[list(swing.electrodes)] = swing.to_V - swing.from_V
            shape_V[list(swing.electrodes)] = swing.drift_V
            rows.append(row)
        moves = np.stack(rows) if rows else np.zeros((0, len(base)))
        return base, moves[np.any(moves != 0, axis=1)], shape_V

    def between(self, whole: Segment, start_s: Fraction, end_s: Fraction) -> Segment:
        """The part of a segment between two instants (s); other deviations stay as they are."""
        base, moves, shape_V = self.motion(start_s, end_s)
        return Segment(
            start_s,
            end_s,
            whole.number,
            base,
            moves,
            shape_V,
            whole.stray_V,
            whole.lag_V,
            whole.half_code_V,
            whole.calibration_V,
            whole.noise_V,
            self,
        )


def _bend(piece: Piece, start_s: Fraction, end_s: Fraction) -> float:
    """Bound of |half-cosine − chord| between two instants of a smooth piece, V."""
    whole = float(piece.end_s - piece.start_s)
    part = float(end_s - start_s)
    return part**2 / 8 * abs(piece.to_V - piece.from_V) / 2 * (math.pi / whole) ** 2


def segments(trap: Trap, shipped: ShippedBlock, carry: Carry | None = None) -> Iterator[Segment]:
    """All segments of a block in order of time; `carry` brings the lag from the block before."""
    yield from _Walk(trap, shipped, carry or Carry()).walk()


class _Walk:
    """The walk through one block from breakpoint to breakpoint."""

    def __init__(self, trap: Trap, shipped: ShippedBlock, carry: Carry) -> None:
        self.trap, self.block, self.carry = trap, shipped.block, carry
        self.shipped = shipped
        self.volts = dict(shipped.block.volts)
        self.levels = dict(shipped.block.levels)
        self.deviations = Deviations(trap, shipped, self.carry)
        self.columns = {electrode.name: i for i, electrode in enumerate(trap.electrodes)}
        self.fixed: dict[tuple[int, ...], dict[str, tuple[int, ...]]] = {}
        self.users = {
            output.name: tuple(self.columns[name] for name in trap.electrodes_of(output.name))
            for output in trap.outputs
        }

    def walk(self) -> Iterator[Segment]:
        block = self.block
        windows = _windows(self.shipped)
        times = _breakpoints(self.trap, block, windows)
        pieces, edges, spans = list(block.pieces), list(zip(block.edges, windows, strict=True)), 0
        next_piece = next_edge = 0
        running: list[Piece] = []
        swinging: list[tuple[Edge, tuple[Fraction, Fraction]]] = []
        number = -1
        order = sorted(block.spans, key=lambda span: span.start_s)
        for start, end in pairwise(times):
            self._finish(running, swinging, start)
            running = [piece for piece in running if piece.end_s > start]
            swinging = [one for one in swinging if one[1][1] > start]
            while next_piece < len(pieces) and pieces[next_piece].start_s <= start:
                running.append(pieces[next_piece])
                next_piece += 1
            while next_edge < len(edges) and edges[next_edge][1][0] <= start:
                swinging.append(edges[next_edge])
                next_edge += 1
            while spans < len(order) and order[spans].start_s <= start:
                if order[spans].end_s > order[spans].start_s or number < 0:
                    number = order[spans].number
                spans += 1
            yield self._segment(start, end, number, running, swinging)
        self._finish(running, swinging, times[-1])
        self.deviations.close()

    def _finish(
        self,
        running: list[Piece],
        swinging: list[tuple[Edge, tuple[Fraction, Fraction]]],
        now: Fraction,
    ) -> None:
        for piece in running:
            if piece.end_s <= now:
                self.volts[piece.output] = piece.to_V
        for edge, (_, end) in swinging:
            if end <= now:
                self.levels[edge.output] = edge.to_level

    def _segment(
        self,
        start: Fraction,
        end: Fraction,
        number: int,
        running: list[Piece],
        swinging: list[tuple[Edge, tuple[Fraction, Fraction]]],
    ) -> Segment:
        behind = self._behind()
        still = np.zeros(len(self.columns))
        for name, electrodes in behind.items():
            if electrodes:
                still[list(electrodes)] = self.volts[name]
        at_levels = self._at_levels(still)
        moving = Moving(
            self.trap,
            still,
            tuple((piece, behind[piece.output]) for piece in running if behind[piece.output]),
            tuple(self._swing(edge, start, end, running) for edge, _ in swinging),
        )
        base, moves, shape_V = moving.motion(start, end)
        for edge, _ in swinging:
            at_levels.update(dict.fromkeys(self.users[edge.output], edge.output))
        errors = self.deviations.on(
            start,
            end,
            {piece.output: piece for piece in running},
            self.volts,
            behind,
            at_levels,
        )
        return Segment(start, end, number, base, moves, shape_V, *errors, moving)

    def _behind(self) -> dict[str, tuple[int, ...]]:
        """Which electrode columns each converter moves, with the switches as they stand."""
        key = tuple(self.levels.values())
        if key not in self.fixed:
            found: dict[str, list[int]] = {name: [] for name in self.deviations.converters}
            for electrode, column in self.columns.items():
                output = self.trap.output_of(electrode)
                name: float | str = output.name
                if isinstance(output, Switch):
                    name = output.levels[self.levels[output.name]]
                if isinstance(name, str):
                    found[name].append(column)
            self.fixed[key] = {name: tuple(columns) for name, columns in found.items()}
        return self.fixed[key]

    def _at_levels(self, still: Vector) -> dict[int, str]:
        """Put electrodes at fixed levels of switches into `still`; their columns and switches."""
        found: dict[int, str] = {}
        for name, index in self.levels.items():
            switch = self.trap.output(name)
            assert isinstance(switch, Switch)
            level = switch.levels[index]
            if not isinstance(level, str):
                still[list(self.users[name])] = level
                found.update(dict.fromkeys(self.users[name], name))
        return found

    def _swing(self, edge: Edge, start: Fraction, end: Fraction, running: list[Piece]) -> Swing:
        switch = self.trap.output(edge.output)
        assert isinstance(switch, Switch)
        volts, drift = [], 0.0
        for index in (edge.from_level, edge.to_level):
            level = switch.levels[index]
            if not isinstance(level, str):
                volts.append(level)
                continue
            piece = next((p for p in running if p.output == level), None)
            volts.append(piece.at(start) if piece else self.volts[level])
            drift += abs(piece.at(end) - piece.at(start)) if piece else 0.0
            drift += self.deviations.quiet[level].total_V(volts[-1])
        return Swing(self.users[switch.name], volts[0], volts[1], drift)


def _windows(shipped: ShippedBlock) -> list[tuple[Fraction, Fraction]]:
    """When each edge may be under way at the electrode, as written and as emitted."""
    errors = {(one.output, one.asked_s): one.error_s for one in shipped.roundings}
    found = []
    for edge in shipped.block.edges:
        error = errors.get((edge.output, edge.command_s), Fraction(0))
        start = edge.start_s + min(error, Fraction(0))
        found.append((max(start, Fraction(0)), edge.end_s + max(error, Fraction(0))))
    return found


def _breakpoints(
    trap: Trap, block: Block, windows: list[tuple[Fraction, Fraction]]
) -> list[Fraction]:
    times = {Fraction(0), block.duration_s}
    quiet: dict[Fraction, Fraction] = {}
    for piece in block.pieces:
        times.update((piece.start_s, piece.end_s))
        settled = piece.end_s + _settling_s(trap.output(piece.output))
        quiet[piece.end_s] = max(quiet.get(piece.end_s, settled), settled)
    # What a motion leaves behind must not weigh on all of a long hold after it.
    times.update(settled for settled in quiet.values() if settled < block.duration_s)
    for start, end in windows:
        times.update((start, end))
    for event in block.events:
        times.update((event.start_s, event.end_s))
    for span in block.spans:
        times.update((span.start_s, span.end_s))
    ordered = sorted(times)
    return ordered if len(ordered) > 1 else [Fraction(0), Fraction(0)]


def _settling_s(output: Converter | Switch) -> Fraction:
    """How long after a motion rounding, delay and lag of its output still count, s."""
    tail_s = output.clock_s + output.delay_s
    if isinstance(output, Converter):
        tail_s += SETTLED_TIME_CONSTANTS * output.time_constant_s
    return tail_s
