"""Random small timelines and random rules about them, all from one seed.

Every time is a whole number of steps: the brute evaluator can look at all of them.  A step is
a fraction of a microsecond drawn at random.
"""

from __future__ import annotations

from fractions import Fraction
from random import Random

import numpy as np

from wellseq.base.finding import Origin
from wellseq.base.place import Place
from wellseq.model import rulebook as book
from wellseq.model.trap import Converter, Electrode, Line, MagneticField, Switch, Trap, Trigger
from wellseq.timeline.shipped import Shipped, ShippedBlock
from wellseq.timeline.timeline import (
    Block,
    Drive,
    Edge,
    LineChange,
    Piece,
    Shape,
    StepSpan,
    Timeline,
)

STEPS = (Fraction(1, 10**6), Fraction(8, 10**6), Fraction(32, 10**9), Fraction(5, 10**10))
"""A slew of 10 V in each is a whole number of V/s, so that floats hold it exactly."""
VERBS = ("hold", "ramp", "release", "catch")
ATOMS = 24
QUIET_STEPS = 4
"""Nothing is told so shortly before a block's end that it would still be under way in the wait."""


def trap(step_s: Fraction, spread_V: float) -> Trap:
    """Two electrodes on a converter and a switch, two lines to set and one to expect."""
    clock = {"clock_s": step_s / 10}
    return Trap(
        name="Sandbank",
        field=MagneticField(uniform_T=1.0),
        electrodes=(
            Electrode(name="A", from_m=0.0, to_m=0.01, radius_m=0.01, sectors=4, output="a"),
            Electrode(name="G", from_m=0.011, to_m=0.02, radius_m=0.01, output="g"),
        ),
        outputs=(
            Converter(
                name="a",
                range_V=(-128.0, 127.0),
                bits=8,
                slew_V_per_s=float(10 / step_s),
                offset_with_spread_V=(0.0, spread_V),
                **clock,
            ),
            Switch(name="g", levels=(0.0, -500.0), spread_V=spread_V, edge_s=2 * step_s, **clock),
        ),
        lines=(
            Line(name="valve", states=("closed", "open"), initial="closed", **clock),
            Line(name="lamp", states=("red", "green", "blue"), initial="red", **clock),
            Line(name="door", states=("open", "closed"), initial="open", kind="input", **clock),
        ),
        triggers=(Trigger(name="bell"), Trigger(name="horn")),
    )


def timeline(random: Random) -> tuple[Timeline, Shipped, Fraction]:
    """A timeline of one to three blocks, its rows, and its step."""
    step_s = random.choice(STEPS)
    made = trap(step_s, random.choice((0.0, 0.0, 0.5, 5.0)))
    origins: list[Origin] = []
    blocks: list[Block] = []
    rows: list[ShippedBlock] = []
    state = {"code": 128, "level": 0, "valve": 0, "lamp": 0}
    for index in range(random.choice((1, 2, 2, 2, 3))):
        block, shipped = _block(random, made, index, step_s, state, origins)
        blocks.append(block)
        rows.append(shipped)
    drawn = Timeline(made, tuple(blocks), tuple(origins), ())
    return (
        drawn,
        Shipped(("a",), ("g",), ("valve", "lamp", "door"), tuple(rows), {"a": 1.0}),
        step_s,
    )


def _block(
    random: Random,
    made: Trap,
    index: int,
    step_s: Fraction,
    state: dict[str, int],
    origins: list[Origin],
) -> tuple[Block, ShippedBlock]:
    length = random.randint(QUIET_STEPS, 9)
    spans: list[StepSpan] = []
    now = 0
    while now < length:
        end = min(now + random.choice((0, 1, 1, 2, 3)), length)
        number = len(origins)
        place = Place("night.well", number + 1)
        origins.append(Origin(place, random.choice(VERBS), number=number))
        spans.append(StepSpan(number, now * step_s, end * step_s))
        now = end if end > now or len(spans) < 30 else now + 1
    first_state = dict(state)
    table = _rows(random, length, state)
    edges = _edges(random, length, step_s, first_state["level"], state)
    block = Block(
        name="run" if index == 0 else ("bell", "horn")[index - 1],
        index=index,
        trigger="" if index == 0 else ("bell", "horn")[index - 1],
        within_s=random.randint(0, 3) * step_s if index else Fraction(0),
        first_row_s=random.randint(0, 1) * step_s if index else Fraction(0),
        jitter_s=Fraction(0),
        volts={"a": float(first_state["code"] - 128)},
        levels={"g": first_state["level"]},
        states={"valve": "closed", "lamp": "red", "door": "open"},
        pieces=_pieces(random, length, step_s),
        edges=edges,
        changes=tuple(
            LineChange("door", at * step_s, random.choice(("open", "closed")), True, 0)
            for at in sorted(random.sample(range(length), random.choice((0, 0, 1, 2))))
        ),
        drives=_drives(random, length, step_s, spans),
        events=(),
        spans=tuple(spans),
        duration_s=length * step_s,
    )
    return block, ShippedBlock(block, step_s, *table, (), ())


def _rows(random: Random, length: int, state: dict[str, int]) -> tuple[np.ndarray, ...]:
    ticks, codes, states = [0], [[state["code"]]], [[state["valve"], state["lamp"], 0]]
    for tick in range(length):
        if random.random() < 0.3 and 0 < tick <= length - QUIET_STEPS:
            state["code"] = 128 + random.choice((-20, -10, 0, 10, 20))
        if random.random() < 0.25:
            state["valve"] = random.randint(0, 1)
        if random.random() < 0.2:
            state["lamp"] = random.randint(0, 2)
        row = [state["valve"], state["lamp"], 0]
        if tick == 0:
            states[0] = row
        elif [state["code"]] != codes[-1] or row != states[-1]:
            ticks.append(tick)
            codes.append([state["code"]])
            states.append(row)
    ticks.append(length)
    codes.append(codes[-1])
    states.append(states[-1])
    zeros = np.zeros((len(ticks), 1), np.int64)
    return np.array(ticks), np.array(codes), zeros, np.array(states)


def _edges(
    random: Random, length: int, step_s: Fraction, level: int, state: dict[str, int]
) -> tuple[Edge, ...]:
    found: list[Edge] = []
    now = random.randint(0, 3)
    while now < length and random.random() < 0.6:
        end = min(now + random.randint(1, 2), length)
        found.append(Edge("g", now * step_s, now * step_s, end * step_s, level, 1 - level, 0))
        level, now = 1 - level, end + random.randint(0, 3)
    state["level"] = level
    return tuple(found)


def _pieces(random: Random, length: int, step_s: Fraction) -> tuple[Piece, ...]:
    """Motions for the slew alone: what the rows say is drawn by itself."""
    start = random.randint(0, length - 1)
    end = random.randint(start + 1, length)
    volts = random.choice((-12.0, 6.0, 24.0))
    return (Piece("a", start * step_s, end * step_s, 0.0, volts, Shape.STRAIGHT, 0),)


def _drives(
    random: Random, length: int, step_s: Fraction, spans: list[StepSpan]
) -> tuple[Drive, ...]:
    if random.random() < 0.4:
        return ()
    start = random.randint(0, length - 1)
    stop = random.randint(start + 1, length)
    number = spans[0].number
    return (Drive("A", start * step_s, stop * step_s, 1.0, 2.0, 0.1, 1, (0.0,) * 4, number),)


# rules


Pool = list[book.Atom]


def pool(random: Random, step_s: Fraction) -> Pool:
    """The atoms that the rules about one timeline are made of."""
    return [atom(random, step_s) for _ in range(ATOMS)]


def sentence(random: Random, step_s: Fraction, atoms: Pool) -> book.Sentence:
    """Any form of sentence, with conditions of a few atoms and windows."""
    form = random.random()
    if form < 0.4:
        trigger = condition(random, step_s, 2, atoms) if random.random() < 0.7 else None
        return book.Always(trigger, condition(random, step_s, 2, atoms))
    if form < 0.8:
        side = random.choice(("before", "after"))
        return book.Around(
            side, condition(random, step_s, 1, atoms), condition(random, step_s, 2, atoms)
        )
    if form < 0.87:
        return book.AtEnd(condition(random, step_s, 2, atoms))
    window = random.choice((None, random.randint(1, 6) * step_s))
    return book.Counted(condition(random, step_s, 0, atoms), random.randint(0, 3), window)


def condition(random: Random, step_s: Fraction, depth: int, atoms: Pool) -> book.Condition:
    """A condition no deeper than that."""
    choice = random.random()
    if depth == 0 or choice < 0.35:
        return random.choice(atoms)
    if choice < 0.5:
        return book.negation(condition(random, step_s, depth - 1, atoms))
    if choice < 0.75:
        kind = random.choice((book.Held, book.Recent))
        return kind(condition(random, step_s, depth - 1, atoms), random.randint(1, 3) * step_s)
    join = random.choice((book.all_of, book.any_of))
    return join(tuple(condition(random, step_s, depth - 1, atoms) for _ in range(2)))


def atom(random: Random, step_s: Fraction) -> book.Atom:
    """An atom of any kind."""
    kind = random.randrange(8)
    if kind < 2:
        line, states = random.choice(
            (
                ("valve", ("closed", "open")),
                ("lamp", ("red", "green")),
                ("door", ("open", "closed")),
            )
        )
        return book.LineIn(line, random.choice(states), "")
    if kind < 4:
        return book.Playing(random.choice(VERBS), "", "")
    if kind == 4:
        return book.Driven(random.choice(("", "A")), "")
    if kind == 5:
        return random.choice(
            (book.Awaiting("", ""), book.Awaiting("bell", ""), book.InBlock("run", ""))
        )
    quantity, size = random.choice(
        (
            (book.Voltage("A"), 5),
            (book.Voltage("G"), 100),
            (book.Difference("A", "G"), 100),
            (book.Slew("A"), None),
        )
    )
    low = Fraction(random.randint(-5, 5)) * (size if size else Fraction(2) / step_s)
    relation = random.choice(("above", "below", "beyond", "between"))
    high: Fraction | None = None
    first: Fraction | None = low
    if relation == "beyond":
        first = abs(low)
    elif relation == "below":
        first, high = None, low
    elif relation == "between":
        high = low + abs(low)
    return book.Comparison(quantity, relation, first, high, "V", "")
