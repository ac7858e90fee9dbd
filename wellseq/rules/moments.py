"""When a condition begins, and when it ends to be true.

A step or a drive begins and ends by itself, also where the next one follows without a break; any
other condition begins where it becomes true.  Where it is not sure when that is, the moment lies
somewhere between two instants: between surely not and surely a condition turns once, between two
times of surely it may have been gone once, and what is never sure may have been there once.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from wellseq.model import rulebook as book
from wellseq.rules.cuts import Cuts, parts, within
from wellseq.rules.reading import Reading


@dataclass(frozen=True, slots=True)
class Moment:
    """Something happens at one instant between two (units of the run); `sure`: it surely does."""

    low: int
    high: int
    sure: bool


def beginnings(condition: book.Condition, reading: Reading, standing: bool = False) -> list[Moment]:
    """When a condition begins to be true.

    What is true when the run begins did not begin in it; with `standing` it counts all the same.
    """
    happenings = _happenings(condition)
    if happenings is not None:
        return [Moment(start, start, True) for start, _ in _spans(happenings, reading)]
    return list(_risen(condition, reading, standing))


def endings(condition: book.Condition, reading: Reading) -> list[Moment]:
    """When a condition ends to be true; what is true to the end of the run does not end in it."""
    happenings = _happenings(condition)
    if happenings is not None:
        last = reading.run.high >> 1
        ends = [end for _, end in _spans(happenings, reading) if end <= last]
        return [Moment(end, end, True) for end in ends]
    return list(_fallen(condition, reading))


def _happenings(condition: book.Condition) -> tuple[book.Playing | book.Driven, ...] | None:
    """The steps and drives that a condition means, None for one that means anything else."""
    found = condition.parts if isinstance(condition, book.AnyOf) else (condition,)
    happenings = tuple(one for one in found if isinstance(one, book.Playing | book.Driven))
    return happenings if len(happenings) == len(found) else None


def _spans(
    happenings: tuple[book.Playing | book.Driven, ...], reading: Reading
) -> list[tuple[int, int]]:
    """Start and end of every one of them on the run, each once, in order."""
    run = reading.run
    found = sorted(
        {
            (run.starts[one.stretch] + one.start, one.number): run.starts[one.stretch] + one.end
            for atom in happenings
            for one in reading.signals.spans(atom)
        }.items()
    )
    return [(start, end) for (start, _), end in found if run.low <= 2 * start <= run.high]


def _clipped(condition: book.Condition, reading: Reading) -> tuple[Cuts, Cuts]:
    run = reading.run
    surely, perhaps = reading.always(condition)
    return within(surely, run.low, run.high), within(perhaps, run.low, run.high)


def _risen(condition: book.Condition, reading: Reading, standing: bool) -> Iterator[Moment]:
    surely, perhaps = _clipped(condition, reading)
    for start, end in parts(perhaps):
        inner = within(surely, start, end)
        stood = start == reading.run.low
        if not inner:
            yield Moment(start >> 1, end >> 1, False)
        elif not (stood and inner[0] == start):
            yield Moment(start >> 1, inner[0] >> 1, not stood or standing)
        elif standing:
            yield Moment(start >> 1, start >> 1, True)
        for gone, back in zip(inner[1:-1:2], inner[2::2], strict=True):
            yield Moment(gone >> 1, back >> 1, False)


def _fallen(condition: book.Condition, reading: Reading) -> Iterator[Moment]:
    surely, perhaps = _clipped(condition, reading)
    for start, end in parts(perhaps):
        inner = within(surely, start, end)
        stays = end == reading.run.high
        for gone, back in zip(inner[1:-1:2], inner[2::2], strict=True):
            yield Moment(gone >> 1, back >> 1, False)
        if not inner:
            yield Moment(start >> 1, end >> 1, False)
        elif not (stays and inner[-1] == end):
            yield Moment(inner[-1] >> 1, end >> 1, not stays)
