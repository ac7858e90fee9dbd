"""2,000 random valid programs, played by a plain interpreter and compiled: both must agree.

The interpreter shares with the compiler only the tree of a file.  What was drawn must agree to
1e-9 V and exactly in time; what is shipped may differ by rounding only.  That the comparison can
fail is shown by errors planted in what the compiler made.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import cache
from pathlib import Path
from random import Random

import numpy as np
import plain_trap
import pytest
from comparison import drawn_differences, shipped_differences
from interpreter import Interpreter
from programs import Program, program

from wellseq.model import build as model
from wellseq.text.parse import parse
from wellseq.timeline.draw import draw
from wellseq.timeline.ship import ship
from wellseq.timeline.shipped import Shipped, ShippedBlock
from wellseq.timeline.timeline import Timeline

TRAP = Path(__file__).with_name("lagoon.trap.toml")
PROGRAMS = 2000
NANOSECOND = Fraction(1, 10**9)


@dataclass
class Both:
    """One program, played by the interpreter and made by the compiler."""

    played: Interpreter
    timeline: Timeline
    shipped: Shipped


class Runner:
    """Plays and compiles programs in one folder; the trap file is read once by each side."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self.trap_file = folder / TRAP.name
        self.trap_file.write_bytes(TRAP.read_bytes())
        self.trap = plain_trap.load(self.trap_file)

    def run(self, made: Program) -> Both:
        """Both results for a program that must be valid."""
        path = self.folder / "run.well"
        if made.used is not None:
            (self.folder / "shared.well").write_bytes(made.used.encode())
        tree = parse(made.text, path.name)
        built = model.build(tree, path, known_findings=())
        assert not built.mistakes, (built.mistakes, made.text)
        assert built.sequence is not None
        timeline = draw(built.sequence, _no_field)
        assert not timeline.mistakes, (timeline.mistakes, made.text)
        return Both(Interpreter(tree, path, self.trap), timeline, ship(timeline))


def _no_field() -> None:
    raise AssertionError("these programs solve for no voltages")


@pytest.fixture
def runner(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Runner:
    monkeypatch.setattr(model, "read_trap", cache(model.read_trap))
    return Runner(tmp_path)


def test_everything_drawn_and_shipped_is_what_the_text_says(runner: Runner) -> None:
    verbs: Counter[str] = Counter()
    for number in range(PROGRAMS):
        made = program(number)
        both = runner.run(made)
        found = drawn_differences(both.played, both.timeline, Random(number))
        found += shipped_differences(both.played, both.shipped)
        assert not found, (number, found, made.text, made.used)
        verbs.update(origin.step for origin in both.timeline.origins)
    rare = "await catch nest release require rotate"
    common = "assume begin cool expect hold load ramp set throw"
    assert set(verbs) == {*rare.split(), *common.split()}
    assert min(verbs.values()) > 100, verbs


def test_ramps_too_fast_to_follow_stray_no_further_than_reported(runner: Runner) -> None:
    strayed = 0
    for number in range(150):
        both = runner.run(program(number, Fraction(1, 40)))
        found = drawn_differences(both.played, both.timeline, Random(number))
        found += shipped_differences(both.played, both.shipped, followed=False)
        assert not found, (number, found)
        strayed += bool(shipped_differences(both.played, both.shipped))
    assert strayed > 20, "these programs were to show ramps that cannot be followed"


Damage = Callable[[Both, ShippedBlock, Random], ShippedBlock | None]


def _wrong_code(both: Both, rows: ShippedBlock, rng: Random) -> ShippedBlock | None:
    """One output one code off in one row while it rests."""
    column = rng.randrange(len(both.shipped.converters))
    name = both.shipped.converters[column]
    pieces = [piece for piece in rows.block.pieces if piece.output == name]
    second = Fraction(1, 10**5)  # further from a ramp than any clock is long
    times = [int(tick) * rows.tick_s for tick in rows.ticks]
    resting = [
        row
        for row, time in enumerate(times[:-1])
        if not any(p.start_s - second < time < p.end_s + second for p in pieces)
    ]
    if not resting:
        return None
    row = rng.choice(resting)
    converter = both.played.trap.converters[name]
    wished = both.played.blocks[rows.block.index].converter_V(name, times[row])
    code = int(rows.codes[row, column])
    away = 1 if converter.electrode_V(Fraction(code)) >= wished else -1
    return replace(rows, codes=_with(rows.codes, row, column, code + away))


def _wrong_tick(both: Both, rows: ShippedBlock, rng: Random) -> ShippedBlock | None:
    """One row one tick late, where a switch, a line or a slower clock has an edge."""
    slow = [
        column
        for column, name in enumerate(both.shipped.converters)
        if both.played.trap.converters[name].clock > rows.tick_s
        and not both.played.trap.converters[name].line
    ]
    inputs = {name for name, line in both.played.trap.lines.items() if line.get("kind") == "input"}
    own = [column for column, name in enumerate(both.shipped.lines) if name not in inputs]
    edges = np.hstack([rows.codes[:, slow], rows.levels, rows.states[:, own]])
    changed = np.flatnonzero((np.diff(edges, axis=0) != 0).any(axis=1)) + 1
    free = [row for row in changed if row + 1 < len(rows.ticks)]
    free = [row for row in free if rows.ticks[row + 1] > rows.ticks[row] + 1]
    if not free:
        return None
    ticks = rows.ticks.copy()
    ticks[rng.choice(free)] += 1
    return replace(rows, ticks=ticks)


def _wrong_state(both: Both, rows: ShippedBlock, rng: Random) -> ShippedBlock | None:
    """One line in another state in one row."""
    column = both.shipped.lines.index(rng.choice(["shutter", "lamp"]))
    row = rng.randrange(len(rows.ticks))
    return replace(rows, states=_with(rows.states, row, column, 1 - rows.states[row, column] % 2))


def _wrong_level(both: Both, rows: ShippedBlock, rng: Random) -> ShippedBlock | None:
    """One switch at its other level in one row."""
    row, column = rng.randrange(len(rows.ticks)), rng.randrange(2)
    return replace(rows, levels=_with(rows.levels, row, column, 1 - rows.levels[row, column]))


def _with(table: np.ndarray, row: int, column: int, value: int) -> np.ndarray:
    changed = table.copy()
    changed[row, column] = value
    return changed


@pytest.mark.parametrize("damage", [_wrong_code, _wrong_tick, _wrong_state, _wrong_level])
def test_one_wrong_entry_of_the_shipped_rows_is_seen(runner: Runner, damage: Damage) -> None:
    planted = 0
    for number in range(60):
        both, rng = runner.run(program(number)), Random(number)
        for index, rows in enumerate(both.shipped.blocks):
            wrong = damage(both, rows, rng)
            if wrong is not None:
                blocks = list(both.shipped.blocks)
                blocks[index] = wrong
                shipped = replace(both.shipped, blocks=tuple(blocks))
                assert shipped_differences(both.played, shipped), (number, index)
                planted += 1
    assert planted >= 40


def _slightly_wrong(timeline: Timeline) -> Iterator[Timeline]:
    """The timeline with one small error each: a voltage, a time, a state, a level, a drive."""
    for index, block in enumerate(timeline.blocks):
        for piece in block.pieces[:2]:
            higher = replace(piece, to_V=piece.to_V + 1e-6)
            longer = replace(piece, end_s=piece.end_s + 10 * NANOSECOND)
            for wrong in (higher, longer):
                pieces = tuple(wrong if item is piece else item for item in block.pieces)
                yield _with_block(timeline, index, replace(block, pieces=pieces))
        for edge in block.edges[:1]:
            late = replace(edge, end_s=edge.end_s + NANOSECOND)
            edges = tuple(late if item is edge else item for item in block.edges)
            yield _with_block(timeline, index, replace(block, edges=edges))
        if block.changes:
            yield _with_block(timeline, index, replace(block, changes=block.changes[1:]))
        for drive in block.drives[:1]:
            turned = replace(drive, phases_deg=drive.phases_deg[::-1])
            yield _with_block(timeline, index, replace(block, drives=(turned, *block.drives[1:])))
        longer_block = replace(block, duration_s=block.duration_s + NANOSECOND)
        yield _with_block(timeline, index, longer_block)


def _with_block(timeline: Timeline, index: int, block: object) -> Timeline:
    blocks = list(timeline.blocks)
    blocks[index] = block
    return replace(timeline, blocks=tuple(blocks))


def test_a_slightly_wrong_timeline_is_seen(runner: Runner) -> None:
    planted = 0
    for number in range(60):
        both = runner.run(program(number))
        for wrong in _slightly_wrong(both.timeline):
            assert drawn_differences(both.played, wrong, Random(number)), (number, wrong)
            planted += 1
    assert planted > 200
