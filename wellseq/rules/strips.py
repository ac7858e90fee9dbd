"""A breach → what the signals of its rule were: their values then, and a strip of time around it.

A strip cuts the time around the breach into cells; a cell is `#` where the atom is true throughout,
`.` where it is not true at all, `+` where it changes within the cell, `?` where it is not sure.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from itertools import pairwise

from wellseq.model import rulebook as book
from wellseq.rules import cuts
from wellseq.rules.reading import Reading
from wellseq.rules.rulings import Row, Shown, Strip
from wellseq.rules.sentences import Breach

CELLS = 48
ROWS_MAX = 8
ALIKE_MAX = 3
ROOM = 1.5
"""A strip reaches this many times as far as the nearest change on either side."""


def shown(sentence: book.Sentence, reading: Reading, breach: Breach) -> tuple[Shown, ...]:
    """What every atom was when the breach began; of many alike the true ones, or the first."""
    # The instant itself, or what comes at once after it where the breach begins after it.
    cut = breach.start if breach.start < breach.end else breach.start - 1
    groups: dict[object, list[Shown]] = {}
    for atom in _atoms(sentence):
        groups.setdefault(_kind(atom), []).append(_at(atom, reading, breach.start >> 1, cut))
    found: list[Shown] = []
    for alike in groups.values():
        telling = [one for one in alike if one.true is not False]
        found += alike if len(alike) <= ALIKE_MAX else telling or alike[:1]
    return tuple(found)


def _kind(atom: book.Atom) -> object:
    """What atoms about several electrodes have in common."""
    if isinstance(atom, book.Comparison):
        return type(atom.quantity), atom.relation, atom.low, atom.high
    return atom


def _at(atom: book.Atom, reading: Reading, time: int, cut: int) -> Shown:
    surely, perhaps = reading.atom(atom)
    true: bool | None = cuts.touches(surely, cut, cut + 1)
    if not true and cuts.touches(perhaps, cut, cut + 1):
        true = None
    low, high = _value(atom, reading, time)
    unit = atom.unit if isinstance(atom, book.Comparison) else ""
    return Shown(atom.text, true, low, high, unit)


def strip(sentence: book.Sentence, reading: Reading, breach: Breach) -> Strip:
    """The strip around a breach, with a last row that marks the breach itself."""
    atoms = _atoms(sentence)[:ROWS_MAX]
    start, end = breach.start >> 1, breach.end >> 1
    room = _room(atoms, reading, start, end)
    first, last = start - room, end + room
    edges = [first + (last - first) * cell // CELLS for cell in range(CELLS + 1)]
    rows = [Row(atom.text, _cells(*reading.atom(atom), edges)) for atom in atoms]
    span = breach.start, max(breach.end, breach.start + 1)
    marks = "".join(
        "^" if cuts.touches(span, 2 * one, max(2 * other, 2 * one + 1)) else " "
        for one, other in pairwise(edges)
    )
    seconds = reading.axis.seconds
    return Strip(
        (*rows, Row("broken" if breach.sure else "perhaps broken", marks)),
        float(seconds(first - start)),
        float(seconds(last - start)),
    )


def _atoms(sentence: book.Sentence) -> tuple[book.Atom, ...]:
    """The atoms of a sentence, each once, in the order written."""
    conditions = book.conditions_of(sentence)
    found = {atom.text: atom for one in conditions for atom in book.atoms_in(one)}
    return tuple(found.values())


def _room(atoms: tuple[book.Atom, ...], reading: Reading, start: int, end: int) -> int:
    """How far a strip reaches on either side: beyond the nearest changes, and a bit at least."""
    nearest = 0
    for atom in atoms:
        surely, _ = reading.atom(atom)
        times = [cut >> 1 for cut in surely if reading.run.low <= cut <= reading.run.high]
        sides = [start - time for time in times if time <= start]
        sides += [time - end for time in times if time >= end]
        nearest = max(nearest, min((one for one in sides if one > 0), default=0))
    least = max((end - start) // 2, reading.axis.per_s // 1_000_000)
    return max(int(nearest * ROOM), least)


def _cells(surely: cuts.Cuts, perhaps: cuts.Cuts, edges: list[int]) -> str:
    return "".join(_cell(surely, perhaps, 2 * one, 2 * other) for one, other in _pairs(edges))


def _cell(surely: cuts.Cuts, perhaps: cuts.Cuts, start: int, end: int) -> str:
    if cuts.covers(surely, start, end):
        return "#"
    if not cuts.touches(perhaps, start, end):
        return "."
    return "+" if cuts.within(surely, start, end) == cuts.within(perhaps, start, end) else "?"


def _pairs(edges: list[int]) -> Iterator[tuple[int, int]]:
    for one, other in pairwise(edges):
        yield one, max(other, one + 1)


def _value(atom: book.Atom, reading: Reading, time: int) -> tuple[float, float]:
    """The interval of a comparison's quantity at an instant; NaN for what has no value."""
    if not isinstance(atom, book.Comparison):
        return math.nan, math.nan
    run = reading.run
    stretch, at = reading.axis.where(run, time)
    number = reading.axis.stretches.index(stretch)
    quantity = atom.quantity
    if not isinstance(quantity, book.OfClouds):
        return reading.signals.course(quantity)[number].at(at)
    known = [
        (one.low, one.high)
        for one in reading.signals.crowds.of(quantity)
        if one.stretch == number and one.start <= at <= one.end and one.known
    ]
    return max(known, key=lambda one: one[1], default=(math.nan, math.nan))
