"""What the interpreter wished against what was drawn and shipped: every disagreement, in words.

Drawn: blocks, step times, line changes, edges and drives exactly, volts to 1e-9 V.  Shipped: the
codes are decoded here from the trap file alone, and at every instant of a block

    |shipped − wished| <= half a code                    where nothing moves,
                          + staircase                    where a holding card plays a ramp or a
                                                         drawing card plays a half-cosine,
                          + slope × error of the clock   where a drawing card's corners are rounded.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from fractions import Fraction
from itertools import pairwise
from random import Random

import numpy as np
from interpreter import Interpreter
from plain_blocks import Block, Move
from plain_trap import Converter, PlainTrap

from wellseq.timeline import shipped as ships
from wellseq.timeline import timeline as drawn

VOLTS = 1e-9
Array = np.ndarray


def drawn_differences(played: Interpreter, timeline: drawn.Timeline, rng: Random) -> list[str]:
    """Where a timeline is not what the interpreter played; nothing when they agree."""
    if len(played.blocks) != len(timeline.blocks):
        return [f"{len(timeline.blocks)} blocks, {len(played.blocks)} wished"]
    found: list[str] = []
    inputs = {name for name, line in played.trap.lines.items() if line.get("kind") == "input"}
    for wish, block in zip(played.blocks, timeline.blocks, strict=True):
        found += [f"{block.name}: {text}" for text in _facts(wish, block, inputs)]
        found += [f"{block.name}: {text}" for text in _volts(played, wish, block, rng)]
    return found


def _facts(wish: Block, block: drawn.Block, inputs: set[str]) -> Iterator[str]:
    """Everything that is exact."""
    got_lines = [(c.time_s, c.line, c.state, c.expected) for c in block.changes]
    pairs: dict[str, tuple[object, object]] = {
        "trigger": (wish.trigger, block.trigger),
        "wait": (wish.within, block.within_s),
        "first row": (wish.latency, block.first_row_s),
        "duration": (wish.duration, block.duration_s),
        "states before": (_without(wish.states, inputs), _without(block.states, inputs)),
        "levels before": (wish.levels, dict(block.levels)),
        "volts before": (_floats(wish.volts), dict(block.volts)),
        "steps": (sorted(wish.steps), sorted((s.start_s, s.end_s) for s in block.spans)),
        "lines": (_changes(wish.states, wish.settings), _changes(wish.states, got_lines)),
        "inputs": (_expected(wish.settings, inputs), _expected(got_lines, inputs)),
        "edges": (
            sorted(
                (name, t.command, t.start, t.end, t.before, t.after)
                for name, throws in wish.throws.items()
                for t in throws
            ),
            sorted(
                (e.output, e.command_s, e.start_s, e.end_s, e.from_level, e.to_level)
                for e in block.edges
            ),
        ),
        "drives": (_turns(wish), _drives(block)),
    }
    for what, (wished, got) in pairs.items():
        if wished != got:
            yield f"{what}: {got}, wished {wished}"


def _changes(states: dict[str, str], settings: list[tuple]) -> list[tuple[Fraction, str, str]]:
    """When lines get another state than the one they have."""
    states, found = dict(states), []
    for time, line, state, _ in sorted(settings, key=lambda item: item[0]):
        if states[line] != state:
            found.append((time, line, state))
        states[line] = state
    return sorted(found)


def _without(states: Mapping[str, str], inputs: set[str]) -> dict[str, str]:
    """The lines that are ours; what an input does during a wait is nobody's to say."""
    return {line: state for line, state in states.items() if line not in inputs}


def _expected(settings: list[tuple], inputs: set[str]) -> list[tuple]:
    """What is said of lines that are not ours to set."""
    return sorted(item for item in settings if item[1] in inputs)


def _floats(volts: dict[str, Fraction]) -> dict[str, float]:
    return {name: float(value) for name, value in volts.items()}


def _turns(wish: Block) -> list[tuple]:
    """Drives as wished; sector k of 6 at phase -sense · order · 60° · k of a cosine."""
    return sorted(
        (
            turn.ring,
            turn.start,
            turn.stop,
            float(turn.from_Hz),
            float(turn.to_Hz),
            float(turn.amplitude_V),
            turn.order,
            tuple(-turn.sense * turn.order * 60 * sector % 360 for sector in range(6)),
        )
        for turn in wish.turns
    )


def _drives(block: drawn.Block) -> list[tuple]:
    return sorted(
        (
            drive.ring,
            drive.start_s,
            drive.stop_s,
            drive.from_Hz,
            drive.to_Hz,
            drive.amplitude_V,
            drive.order,
            tuple(round(phase, 9) % 360 for phase in drive.phases_deg),
        )
        for drive in block.drives
    )


def _volts(played: Interpreter, wish: Block, block: drawn.Block, rng: Random) -> Iterator[str]:
    """Converters at their own breakpoints and half way between, electrodes at random times."""
    pieces: dict[str, list[drawn.Piece]] = {}
    for piece in block.pieces:
        pieces.setdefault(piece.output, []).append(piece)
    for output in played.trap.converters:
        ends = {time for move in wish.moves.get(output, ()) for time in (move.start, move.end)}
        ends |= {time for piece in pieces.get(output, ()) for time in (piece.start_s, piece.end_s)}
        marks = sorted(ends)
        marks += [(one + other) / 2 for one, other in pairwise(marks)]
        for time in marks:
            wished = float(wish.converter_V(output, time))
            got = _piece_V(block, pieces, output, time)
            if not abs(got - wished) <= VOLTS:
                yield f"{output} at {float(time)} s: {got} V, wished {wished} V"
    some = [block.duration_s * Fraction(rng.randrange(10**6), 10**6) for _ in range(10)]
    asked = [(time, electrode) for time in some for electrode in played.trap.electrodes]
    for edge in block.edges:
        (electrode,) = (e for e, out in played.trap.electrodes.items() if out == edge.output)
        middle = (edge.start_s + edge.end_s) / 2
        asked += [(time, electrode) for time in (edge.start_s, middle, edge.end_s)]
    for time, electrode in asked:
        wished_V = played.volts_at(wish, electrode, time)
        output = played.trap.electrodes[electrode]
        got_V = _electrode_V(played.trap, block, pieces, output, time)
        if not all(abs(a - b) <= VOLTS for a, b in zip(wished_V, got_V, strict=True)):
            yield f"{electrode} at {float(time)} s: {got_V} V, wished {wished_V} V"


def _piece_V(block: drawn.Block, pieces: dict, output: str, time: Fraction) -> float:
    volts = block.volts[output]
    for piece in pieces.get(output, ()):
        if piece.start_s <= time < piece.end_s:
            return piece.at(time)
        if piece.end_s <= time:
            volts = piece.to_V
    return volts


def _electrode_V(
    trap: PlainTrap, block: drawn.Block, pieces: dict, output: str, time: Fraction
) -> tuple[float, float]:
    if output in trap.converters:
        volts = _piece_V(block, pieces, output, time)
        return volts, volts
    levels = [block.levels[output]]
    for edge in block.edges:
        if edge.output == output and edge.start_s <= time:
            inside = time < edge.end_s
            levels = [edge.from_level, edge.to_level] if inside else [edge.to_level]
    named = [trap.switches[output].levels[level] for level in levels]
    found = [
        _piece_V(block, pieces, level, time) if isinstance(level, str) else float(level)
        for level in named
    ]
    return min(found), max(found)


def shipped_differences(
    played: Interpreter, shipped: ships.Shipped, *, followed: bool = True
) -> list[str]:
    """Where shipped rows are further from what was played than rounding may take them.

    Where ramps are too fast to be `followed`, rows need only be as good as the compiler says.
    """
    found: list[str] = []
    for wish, rows in zip(played.blocks, shipped.blocks, strict=True):
        name = rows.block.name
        found += [f"{name}: {text}" for text in _ticks(played.trap, wish, rows)]
        for column, output in enumerate(shipped.converters):
            converter = played.trap.converters[output]
            moves = [m for m in wish.moves.get(output, ()) if m.before != m.after]
            codes = rows.codes[:, column]
            spans = _spans(converter, moves, float(wish.volts[output]), rows, codes)
            far = _too_far(float(played.trap.staircase), converter, moves, spans)
            found += [f"{name}: {output} {text}" for text in far if followed]
            found += [f"{name}: {output} {text}" for text in _unreported(converter, spans, rows)]
            found += [f"{name}: {output} {text}" for text in _off_clock(converter, rows, codes)]
        for column, output in enumerate(shipped.switches):
            switch = played.trap.switches[output]
            throws = [(t.command, t.after) for t in wish.throws.get(output, ())]
            late = _late(rows, rows.levels[:, column], switch.clock, wish.levels[output], throws)
            found += [f"{name}: {output} {text}" for text in late]
        found += [f"{name}: {text}" for text in _lines(played.trap, wish, rows, shipped.lines)]
    return found


def _ticks(trap: PlainTrap, wish: Block, rows: ships.ShippedBlock) -> Iterator[str]:
    """Ticks rise from 0 to the end of the block; codes exist."""
    if rows.tick_s != trap.tick:
        yield f"tick {rows.tick_s}, wished {trap.tick}"
    if rows.ticks[0] != 0 or (np.diff(rows.ticks) <= 0).any():
        yield "ticks do not rise from 0"
    if abs(int(rows.ticks[-1]) * rows.tick_s - wish.duration) > max(trap.clocks):
        yield "the last row is not at the end"
    tops = np.array([2**item.bits - 1 for item in trap.converters.values()])
    if (rows.codes < 0).any() or (rows.codes > tops).any():
        yield "a code that the converter does not have"
    for rounding in rows.roundings:
        if abs(rounding.emitted_s - rounding.asked_s) > max(trap.clocks) / 2:
            yield f"rounded too far: {rounding}"


def _decoded(converter: Converter, codes: Array) -> Array:
    return float(converter.zero_V) + float(converter.code_V) * codes.astype(float)


def _wished(moves: list[Move], start_V: float, times_s: Array) -> Array:
    """The wish at many times at once, V; the shape of times_s."""
    volts = np.full(len(times_s), start_V)
    for move in moves:
        start, length = float(move.start), float(move.end - move.start)
        share = np.clip((times_s - start) / length, 0.0, 1.0)
        if move.smooth:
            share = (1 - np.cos(np.pi * share)) / 2
        path = float(move.before) + float(move.after - move.before) * share
        volts = np.where(times_s >= start, path, volts)
    return volts


def _off(time: Fraction, clock: Fraction) -> Fraction:
    """How far an instant is from the nearest edge of a clock."""
    return abs(time - round(time / clock) * clock)


def _slope(move: Move) -> float:
    """Greatest slope of a move, V/s."""
    slope = abs(float(move.after - move.before)) / float(move.end - move.start)
    return slope * np.pi / 2 if move.smooth else slope


def _spans(
    converter: Converter, moves: list[Move], start_V: float, rows: ships.ShippedBlock, codes: Array
) -> tuple[Array, Array]:
    """Middles (s) of short spans, and the largest |shipped − wished| (V) in each; equal shapes.

    A holding card keeps its code in a span and the wish is monotone in it, so its two ends tell
    all; a drawing card's spans are quartered, between which a half-cosine hardly bends.
    """
    tick_s = float(rows.tick_s)
    row_s = rows.ticks.astype(float) * tick_s
    corners = np.array([float(t) for m in moves for t in (m.start, m.end)])
    times_s = np.unique(np.concatenate([row_s, corners]))
    if converter.line:
        parts = np.array([0.0, 0.25, 0.5, 0.75])
        steps = np.diff(times_s, append=times_s[-1])
        times_s = np.unique((times_s[:, None] + parts * steps[:, None]).ravel())
    wished = _wished(moves, start_V, times_s)
    if converter.line:
        off = np.abs(np.interp(times_s, row_s, _decoded(converter, codes)) - wished)
        return (times_s[:-1] + times_s[1:]) / 2, np.maximum(off[:-1], off[1:])
    # A row's time and a corner's may differ in the last digit of a float.
    row = np.searchsorted(row_s, times_s + tick_s / 1000, side="right") - 1
    held = _decoded(converter, codes)[row]
    off = np.maximum(np.abs(held[:-1] - wished[:-1]), np.abs(held[:-1] - wished[1:]))
    return (times_s[:-1] + times_s[1:]) / 2, off


def _too_far(
    staircase_V: float, converter: Converter, moves: list[Move], spans: tuple[Array, Array]
) -> Iterator[str]:
    """Spans in which a converter strays further from its wish than rounding may take it."""
    middle_s, off_V = spans
    stairs, rounded = np.zeros(len(off_V)), np.zeros(len(off_V))
    for move in moves:
        before, after = _off(move.start, converter.clock), _off(move.end, converter.clock)
        within = (middle_s > float(move.start - before)) & (middle_s < float(move.end + after))
        if move.smooth or not converter.line:
            stairs = np.where(within, staircase_V, stairs)
        if converter.line:
            rounded += np.where(within, _slope(move) * float(max(before, after)), 0.0)
    allowed = float(converter.code_V) / 2 + stairs + rounded + VOLTS
    for number in np.flatnonzero(off_V > allowed)[:3]:
        yield f"at {middle_s[number]} s: {off_V[number]} V off, {allowed[number]} V allowed"


def _unreported(
    converter: Converter, spans: tuple[Array, Array], rows: ships.ShippedBlock
) -> Iterator[str]:
    """What the compiler says of its own deviations must bound them everywhere."""
    middle_s, off_V = spans
    reported = np.zeros(len(off_V))
    for stray in rows.strays:
        if stray.output == converter.name:
            start, end = stray.start_s - stray.early_s, stray.end_s + stray.late_s
            within = (middle_s > float(start)) & (middle_s < float(end))
            reported = np.where(within, np.maximum(reported, stray.volts), reported)
    over = off_V - reported - float(converter.code_V) / 2 - VOLTS
    for number in np.flatnonzero(over > 0)[:3]:
        yield f"at {middle_s[number]} s: {off_V[number]} V off, {reported[number]} V reported"


def _off_clock(converter: Converter, rows: ships.ShippedBlock, codes: Array) -> Iterator[str]:
    """A holding card changes at edges of its clock only."""
    changed = rows.ticks[1:][np.diff(codes) != 0]
    if not converter.line and (changed % int(converter.clock / rows.tick_s)).any():
        yield "changes between two edges of its clock"


def _late(
    rows: ships.ShippedBlock, column: Array, clock: Fraction, first: int, asked: list
) -> Iterator[str]:
    """A column of indices must change at the asked times, each rounded to the nearest edge."""
    merged: dict[int, int] = {0: first}
    for time, index in asked:
        merged[round(time / clock) * int(clock / rows.tick_s)] = index
    at = np.flatnonzero(np.diff(column)) + 1
    got = [(0, int(column[0])), *((int(rows.ticks[k]), int(column[k])) for k in at)]
    wished: list[tuple[int, int]] = []
    for tick, index in sorted(merged.items()):
        if not wished or index != wished[-1][1]:
            wished.append((tick, index))
    if got != wished:
        yield f"changes at {got}, wished {wished} (ticks)"


def _lines(
    trap: PlainTrap, wish: Block, rows: ships.ShippedBlock, lines: tuple[str, ...]
) -> Iterator[str]:
    for column, name in enumerate(lines):
        facts = trap.lines[name]
        states = facts["states"]
        if facts.get("kind") == "input":
            continue
        asked = [
            (time, states.index(state))
            for time, line, state, expected in sorted(wish.settings, key=lambda item: item[0])
            if line == name and not expected
        ]
        first = states.index(wish.states[name])
        clock = trap.line_clock(name)
        for text in _late(rows, rows.states[:, column], clock, first, asked):
            yield f"{name} {text}"
