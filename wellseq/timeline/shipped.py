"""What the hardware gets: whole ticks and converter codes, one row wherever something changes."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
import numpy.typing as npt

from wellseq.timeline.timeline import Block

Integers = npt.NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Rounding:
    """An edge as written and as emitted on its output's clock (s, block time)."""

    number: int
    output: str
    asked_s: Fraction
    emitted_s: Fraction

    @property
    def error_s(self) -> Fraction:
        """Emitted minus asked, s."""
        return self.emitted_s - self.asked_s


@dataclass(frozen=True, slots=True)
class Stray:
    """How far an output's codes stray from the wish of one piece, and by what.

    `volts` bounds |shipped − wished| in V at every instant of the piece, half a code not counted;
    `rows` is how many rows the piece has.  Rounded rows may reach beyond the piece by `early_s`
    before its start and `late_s` after its end (s).
    """

    number: int
    output: str
    start_s: Fraction
    end_s: Fraction
    volts: float
    rows: int
    early_s: Fraction = Fraction(0)
    late_s: Fraction = Fraction(0)


@dataclass(frozen=True, slots=True)
class ShippedBlock:
    """The rows of one block.

    ticks: (rows,) whole ticks of `tick_s` from the block's first row, rising from 0 to the end.
    codes: (rows, converters), 0 … 2^bits − 1; levels: (rows, switches) indices of levels;
    states: (rows, lines) indices of states.  Columns are in the trap file's order.
    """

    block: Block
    tick_s: Fraction
    ticks: Integers
    codes: Integers
    levels: Integers
    states: Integers
    roundings: tuple[Rounding, ...]
    strays: tuple[Stray, ...]


@dataclass(frozen=True, slots=True, weakref_slot=True)
class Shipped:
    """All blocks as shipped; the column names in order."""

    converters: tuple[str, ...]
    switches: tuple[str, ...]
    lines: tuple[str, ...]
    blocks: tuple[ShippedBlock, ...]
    code_V: Mapping[str, float]
    """Electrode volts per code, per converter."""
