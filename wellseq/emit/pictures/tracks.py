"""Wells → each cloud's track: where it sits, how deep on both sides, against which limit, and when.

A stay is one proved stretch (`wells.wells.Held`) as plain numbers: times s of the block, places m,
depths V.  Certified depths are lower bounds with every loss taken off; evaluated ones are upper
bounds with none.  What is stated of a cloud is what its author declares or assumes (K, eV, m,
counts), with the half-width of its interval.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from itertools import groupby

import numpy as np

from wellseq.checks.case import Case
from wellseq.emit.pictures.score import WHOLE, Score
from wellseq.emit.pictures.thinning import keep
from wellseq.model.effects import Assumed
from wellseq.model.sequence import CloudDeclared
from wellseq.model.species import ELEMENTARY_CHARGE_C
from wellseq.wells.wells import Held

STAYS_MOST = 1200
SAME_PLACE_M = 1e-3
BOLTZMANN_EV_PER_K = 8.617333262e-5
"""k/e: CODATA 2018, exact by definition, rounded."""
UNITS = {"number": "", "temperature": "K", "energy": "eV", "radius": "m", "duration": "s"}


@dataclass(frozen=True, slots=True)
class Side:
    """One side of a stay: depths in V, places in m; `region_m` is the proved own side."""

    certified_V: float
    evaluated_V: float
    limit_V: float
    barrier_m: float
    region_m: tuple[float, float]


@dataclass(frozen=True, slots=True)
class Stay:
    """A cloud sits in one proved well; `from_ground` marks depths that count from ground."""

    block: int
    start_s: float
    end_s: float
    number: int
    from_m: float
    to_m: float
    left: Side
    right: Side
    from_ground: bool

    @property
    def lesser(self) -> Side:
        """The side with the smaller certified depth."""
        return min(self.left, self.right, key=lambda side: side.certified_V)


@dataclass(frozen=True, slots=True)
class Stated:
    """What stands for a cloud from an instant (s) of a block on: by declaration or assumption."""

    block: int
    time_s: float
    quantity: str
    value: float
    half_width: float
    unit: str
    how: str


@dataclass(frozen=True, slots=True)
class Track:
    """One cloud: `charges` is its charge in elementary charges, `all_stays` how many there were."""

    name: str
    species: str
    charges: float
    stays: tuple[Stay, ...]
    all_stays: int
    stated: tuple[Stated, ...]

    @property
    def sign(self) -> int:
        """+1 or -1."""
        return 1 if self.charges > 0 else -1

    @property
    def shown(self) -> tuple[Stay, ...]:
        """The stays to draw, in order: of a bunch known by its energy, those between its gates.

        Such a bunch is also proved in the well that waits for it; that is in the tables only.
        """
        ground = [stay for stay in self.stays if stay.from_ground]
        ends = {stay.block: (stay.start_s, stay.end_s) for stay in ground}
        for stay in ground:
            low, high = ends[stay.block]
            ends[stay.block] = min(low, stay.start_s), max(high, stay.end_s)
        return tuple(
            stay
            for stay in self.stays
            if stay.from_ground
            or stay.block not in ends
            or stay.end_s <= ends[stay.block][0]
            or stay.start_s >= ends[stay.block][1]
        )

    def at(self, block: int, time_s: float) -> Stay | None:
        """The stay at an instant (s) of a block; the later one where two meet."""
        found = [
            stay
            for stay in self.shown
            if stay.block == block and stay.start_s <= time_s <= stay.end_s
        ]
        return found[-1] if found else None

    def runs(self) -> Iterator[list[Stay]]:
        """Stays that follow one another without a gap, in order; gates and wells apart."""
        run: list[Stay] = []
        for stay in self.shown:
            last = run[-1] if run else stay
            apart = last.end_s < stay.start_s
            if last.block != stay.block:
                # Through the wait between two blocks nothing moves.
                apart = stay.start_s > 0 or abs(stay.from_m - last.to_m) > SAME_PLACE_M
            if run and (apart or last.from_ground != stay.from_ground):
                yield run
                run = []
            run.append(stay)
        if run:
            yield run


def tracks(case: Case, axis: Score) -> tuple[Track, ...]:
    """The track of every declared cloud, in the order of the file."""
    if case.timeline is None:
        return ()
    held = case.wells.held if case.wells is not None else ()
    by_cloud = {
        name: list(found)
        for name, found in groupby(sorted(held, key=lambda one: one.cloud), lambda one: one.cloud)
    }
    assumed = list(_assumed(case))
    found = []
    for name, cloud in case.timeline.clouds.items():
        stays = [_stay(one) for one in by_cloud.get(name, ())]
        stated = (*_declared(cloud), *(one for whose, one in assumed if whose == name))
        charges = cloud.species.charge_C / ELEMENTARY_CHARGE_C
        found.append(
            Track(name, cloud.species.name, charges, _thinned(stays, axis), len(stays), stated)
        )
    return tuple(found)


def energy_eV(stated: Stated) -> float:
    """The energy per particle that a temperature (kT) or an energy stands for, eV; else NaN."""
    if stated.quantity == "temperature":
        return stated.value * BOLTZMANN_EV_PER_K
    return stated.value if stated.quantity == "energy" else math.nan


def _stay(held: Held) -> Stay:
    left, right = (
        Side(
            float(side.certified_V),
            float(side.best_V),
            float(limit),
            float(side.barrier_m),
            (float(side.region_m[0]), float(side.region_m[1])),
        )
        for side, limit in zip((held.left, held.right), held.floor_V, strict=True)
    )
    return Stay(
        held.block,
        float(held.start_s),
        float(held.end_s),
        held.number,
        float(held.from_m),
        float(held.to_m),
        left,
        right,
        held.energetic,
    )


def _thinned(stays: list[Stay], axis: Score) -> tuple[Stay, ...]:
    """Few enough stays to draw; the least and the greatest depth of any stretch stay."""
    if len(stays) <= STAYS_MOST:
        return tuple(stays)
    blocks = {stay.block for stay in stays}
    place = np.empty(len(stays))
    starts = np.array([stay.start_s for stay in stays])
    owner = np.array([stay.block for stay in stays])
    for block in blocks:
        place[owner == block] = axis.after(block, starts[owner == block])
    depth = np.array([stay.lesser.certified_V for stay in stays])
    return tuple(stays[at] for at in keep(place, depth, 0.0, float(WHOLE), STAYS_MOST // 4))


def _declared(cloud: CloudDeclared) -> Iterator[Stated]:
    for quantity, unit in UNITS.items():
        spread = getattr(cloud, quantity)
        if spread is not None:
            value, half = float(spread.value), float(spread.half_width)
            yield Stated(0, 0.0, quantity, value, half, unit, "declared")


def _assumed(case: Case) -> Iterable[tuple[str, Stated]]:
    for block in case.timeline.blocks if case.timeline is not None else ():
        for event in block.events:
            effect = event.effect
            if isinstance(effect, Assumed):
                yield (
                    effect.cloud,
                    Stated(
                        block.index,
                        float(event.start_s),
                        effect.quantity,
                        float(effect.value),
                        float(effect.half_width),
                        effect.unit,
                        "assumed",
                    ),
                )
