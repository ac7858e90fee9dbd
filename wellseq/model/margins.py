"""What a trap demands of every sequence: least depths, largest differences, the card's memory.

The defaults are the house's; a trap file states its own.  Depths and differences in volts,
separation in metres, `depth_over_temperature` in units of kT per elementary charge.
"""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from wellseq.model.bounds import bounds
from wellseq.model.hardware import Mention, Part
from wellseq.model.written import listing, plain, real, sound, whole

PositiveVolts = Annotated[float, real("V", bounds("V", above="0", most="1e6"))]


class PairMargin(Part):
    """A largest difference of its own for one pair of neighbouring electrodes, V."""

    between: Annotated[
        tuple[Mention, Mention],
        listing(2, 2, '["G1", "C1"]'),
        sound(lambda pair: pair[0] != pair[1], "a pair is two different electrodes"),
    ]
    difference_V: PositiveVolts = Field(alias="difference")


class Margins(Part):
    """The limits that checks judge by.

    `depth_V`: least vacuum depth of any cloud.  `staircase_V`: how far a played staircase may stray
    from the ramp that was written.  `neighbour_difference_V`: between adjacent electrodes, unless
    `pairs` says otherwise.  `separation_m`: least distance between wells of different species that
    do not share a well.  `table_rows`: the card's memory for one block.
    """

    depth_V: PositiveVolts = Field(0.5, alias="depth")
    staircase_V: PositiveVolts = Field(0.02, alias="staircase")
    depth_over_temperature: Annotated[float, plain(bounds(above="0", most="1e6"))] = 10.0
    neighbour_difference_V: PositiveVolts = Field(1200.0, alias="neighbour_difference")
    separation_m: Annotated[float, real("m", bounds("mm", above="0", most="1e6"))] = Field(
        0.005, alias="separation"
    )
    table_rows: Annotated[int, whole(bounds(least="1", most="1e7"))] = 65536
    pairs: tuple[PairMargin, ...] = Field((), alias="pair")

    def difference_V(self, one: str, other: str) -> float:
        """The largest difference allowed between two adjacent electrodes, V."""
        for pair in self.pairs:
            if {one, other} == set(pair.between):
                return pair.difference_V
        return self.neighbour_difference_V
