"""What is forecast of each cloud → figures with their intervals, or the reason why there is none.

A figure that is not known stays and is shown as absent, with the model and the limit that it left.
Values are in the units of `clouds.forecast.UNITS` (SI), times in s of the block.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

import numpy as np

from wellseq.checks.case import Case
from wellseq.clouds.figures import Figure
from wellseq.clouds.forecast import UNITS, Row, in_words
from wellseq.emit.pictures.score import WHOLE, Score
from wellseq.emit.pictures.thinning import keep

ROWS_MOST = 1200
WORDS = {
    "number": "number",
    "temperature": "temperature",
    "radius": "radius",
    "length": "length",
    "density": "density",
    "space_charge": "space charge",
    "depth_left": "depth left",
    "bounce": "bounce frequency",
    "rotation": "rotation frequency",
}
"""The quantities that a cloud always has, in the order in which they are shown."""


@dataclass(frozen=True, slots=True)
class Told:
    """One cloud at the end of one step: figures by quantity, models, what was lacking."""

    cloud: str
    number: int
    block: int
    start_s: float
    end_s: float
    figures: Mapping[str, Figure]
    models: tuple[str, ...]
    why: str

    def figure(self, quantity: str) -> Figure | None:
        """The figure of a quantity; None when it is absent."""
        found = self.figures.get(quantity)
        return found if found is not None and found.known else None

    def further(self) -> Iterable[tuple[str, Figure]]:
        """Figures apart from those that every cloud has, in the order of `UNITS`."""
        for quantity in UNITS:
            if quantity not in WORDS and quantity in self.figures:
                yield quantity, self.figures[quantity]


def told(case: Case, axis: Score | None) -> tuple[Told, ...]:
    """Every forecast row in order of play, thinned where there are very many; none without one."""
    if case.forecast is None or axis is None:
        return ()
    by_cloud: dict[str, list[Row]] = {}
    for row in case.forecast.rows:
        by_cloud.setdefault(row.cloud, []).append(row)
    kept = [row for rows in by_cloud.values() for row in _thinned(rows, axis)]
    order = {id(row): at for at, row in enumerate(case.forecast.rows)}
    return tuple(_told(row) for row in sorted(kept, key=lambda row: order[id(row)]))


def unit_of(quantity: str) -> str:
    """The unit of a quantity; empty for counts and shares."""
    return UNITS.get(quantity, "")


def _told(row: Row) -> Told:
    reasons = [in_words(reason) for reason in row.outside]
    return Told(
        row.cloud,
        row.number,
        row.block,
        float(row.start_s),
        float(row.end_s),
        row.figures,
        row.models,
        "; ".join([*reasons, row.cites] if row.cites else reasons),
    )


def _thinned(rows: list[Row], axis: Score) -> list[Row]:
    """Few enough rows; the least and the greatest depth left within any stretch stay."""
    if len(rows) <= ROWS_MOST:
        return rows
    place = np.array([float(axis.before(row.block, row.end_s)) for row in rows])
    depth = [row.figures.get("depth_left") for row in rows]
    value = np.array([math.nan if one is None else one.low for one in depth])
    ordered = np.maximum.accumulate(place)
    return [rows[at] for at in keep(ordered, value, 0.0, float(WHOLE), ROWS_MOST // 6)]
