"""Durations of many pieces, exact and then rounded once."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction

from wellseq.timeline.timeline import Piece


def durations_s(pieces: Sequence[Piece], share: Fraction = Fraction(1)) -> list[float]:
    """The given share of each piece's duration, s.

    Pieces of one ramp hold the very same instants, so that most of the exact arithmetic is done
    once per ramp.
    """
    found: list[float] = []
    start = end = Fraction(0)
    duration = 0.0
    for piece in pieces:
        if piece.start_s is not start or piece.end_s is not end:
            start, end = piece.start_s, piece.end_s
            duration = float((end - start) * share)
        found.append(duration)
    return found
