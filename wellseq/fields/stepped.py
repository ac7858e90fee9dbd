"""A bore with steps and end plates → the potential of each electrode at 1 V, and its error.

In every section φ = wall part + what the openings at its ends make.  The wall part carries the wall
and, by mirror images, the levels of the faces; it is exact (tube.py).  The traces in the openings
(aperture.py) follow from ∂φ/∂z being the same on both sides, tested by the same functions: a
symmetric positive system, block-tridiagonal, one block per step,
 (D_before + D_after) c_j − X c_{j−1} − X c_{j+1} = outward slopes of both wall parts.
It is solved for P functions and for the first 2P/3 of them; the difference is the error told, some
eight times the true one.  P is raised until the error told is small.  Fields that leak into gaps
are found from a first solution and enter as strips on the wall (gaps.py).

Shapes: coefficients (f, ne) per step; potentials (orders, ne, nz).  Units: m, V per V, V/m^n per V.
Accuracy: tests/fields/test_stepped.py, against finite elements.
Source: aperture.py; mode matching: R. Mittra, S. W. Lee, Analytical Techniques in the Theory of
Guided Waves (Macmillan 1971) (method).
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

import numpy as np

from wellseq.fields.aperture import family_of
from wellseq.fields.bore import Bore, Section, mirrored
from wellseq.fields.gaps import leak, wall_slope
from wellseq.fields.hermite import FloatArray
from wellseq.fields.opening import Opening
from wellseq.fields.tube import Axis, Box, Wall

METHOD = "bore in sections, matched openings, leaking gaps, 1"
LEVELS = (24, 36, 54, 80)
"""Numbers of functions per step that are tried."""
GOAL_V_PER_V = 1e-7
"""The error on the axis that is good enough to stop at."""


def settled(bore: Bore, axis: Axis, orders: Sequence[int]) -> tuple[FloatArray, FloatArray]:
    """Potentials (orders, ne, count) on the axis and the error told (orders, count), V/m^n per V.

    The error is the greatest of all electrodes.  P is raised until order 0, the first of `orders`,
    is within 1e-7, or no further.
    """
    powers = tuple(orders)
    for plain in LEVELS:
        table, change = Matching(bore, plain).on_axis(axis, powers)
        if not bore.steps or change[0].max() <= GOAL_V_PER_V:
            break
    return table, change.max(axis=1)


class Matching:
    """The traces of all steps of one bore with `plain` + 1 functions each."""

    def __init__(self, bore: Bore, plain: int) -> None:
        self.bore = bore
        family = family_of(plain)
        self.full, self.part = family.size, 1 + 2 * plain // 3
        self.openings: list[list[Opening | None]] = [
            [
                Opening(section, plane, family) if plane and plane.radius_m > 0.0 else None
                for plane in (section.left, section.right)
            ]
            for section in bore.sections
        ]
        self.strips = [np.zeros_like(section.rise) for section in bore.sections]
        self.diagonal, self.beside = self._blocks()
        self.traces = self.fewer = self._solve(self.full)
        self.strips = [self._leaks(number) for number in range(len(bore.sections))]
        self.traces = self._solve(self.full)
        self.fewer = self._solve(self.part)

    def _pair(self, number: int) -> tuple[Opening, Opening]:
        """The two sides of a step, before and after it."""
        before, after = self.openings[number][1], self.openings[number + 1][0]
        assert before is not None
        assert after is not None
        return before, after

    def _blocks(self) -> tuple[list[FloatArray], list[FloatArray]]:
        """The blocks on the diagonal, and those between neighbouring steps, (f, f) in m."""
        pairs = [self._pair(number) for number in range(len(self.bore.steps))]
        diagonal = [before.flux() + after.flux() for before, after in pairs]
        beside = [pairs[number][1].across(pairs[number + 1][0]) for number in range(len(pairs) - 1)]
        return diagonal, beside

    def _loads(self) -> list[FloatArray]:
        """Outward slopes of both wall parts at every step, tested, (f, ne) in m."""
        found = []
        for number in range(len(self.bore.steps)):
            before, after = self._pair(number)
            here, there = self.strips[number], self.strips[number + 1]
            found.append(before.wall_flux(here) + after.wall_flux(there))
        return found

    def _solve(self, count: int) -> list[FloatArray]:
        """Traces (count, ne) of all steps: elimination from left to right, then back."""
        square = np.s_[:count, :count]
        pivots: list[FloatArray] = []
        loads: list[FloatArray] = []
        for number, whole in enumerate(self._loads()):
            block, load = self.diagonal[number][square], whole[:count]
            if number:
                link = self.beside[number - 1][square]
                carried = np.linalg.solve(pivots[-1], np.hstack((link, loads[-1])))
                block = block - link.T @ carried[:, :count]
                load = load + link.T @ carried[:, count:]
            pivots.append(block)
            loads.append(load)
        traces: list[FloatArray] = []
        for number in range(len(pivots) - 1, -1, -1):
            load = loads[number]
            if traces:
                load = load + self.beside[number][square] @ traces[-1]
            traces.append(np.linalg.solve(pivots[number], load))
        return traces[::-1]

    def _leaks(self, number: int) -> FloatArray:
        """Areas (ne, n) m of the strips in a section, from the slopes of the first solution.

        Strips enter the slope at other gaps only to higher order.
        """
        section = self.bore.sections[number]
        wall = self.wall(number, self.bore.span_of(section))
        slope = wall_slope(section.centre_m, wall.centre_m, wall.width_m, section.radius_m)
        area = leak(wall.rise, slope, section.width_m)
        for opening, trace, _ in self.openings_of(number):
            area = area + leak(trace.T, opening.wall_slope().T, section.width_m)
        return np.asarray(area * section.leaky())

    def wall(self, number: int, span_m: tuple[float, float]) -> Wall:
        """The wall of a section with its strips and mirror images, for places within a span (m)."""
        return mirrored(self.bore.sections[number], self.strips[number], span_m)

    def openings_of(self, number: int) -> list[tuple[Opening, FloatArray, FloatArray]]:
        """The openings of a section, each with its trace and the one of fewer functions."""
        found = []
        for opening, step in zip(self.openings[number], (number - 1, number), strict=True):
            if opening is not None:
                found.append((opening, self.traces[step], self.fewer[step]))
        return found

    def on_axis(self, axis: Axis, orders: Iterable[int]) -> tuple[FloatArray, FloatArray]:
        """Potentials (orders, ne, count) on the axis, and how far fewer functions are off."""
        powers = tuple(orders)
        result = np.zeros((len(powers), self.bore.count, axis.count))
        change = np.zeros_like(result)
        z_m = axis.z_m
        for number, section in enumerate(self.bore.sections):
            found = part_of(axis, section)
            if found is None:
                continue
            first, inner = found
            here = slice(first, first + inner.count)
            wall = self.wall(number, (inner.start_m, inner.stop_m))
            span_m = float(wall.centre_m.min()), float(wall.centre_m.max())
            box = Box(section.radius_m, inner, span_m)
            amplitude = box.amplitudes(wall)
            for i, order in enumerate(powers):
                result[i, :, here] = box.potential(amplitude, 0.0, order)
                for opening, trace, less in self.openings_of(number):
                    table = opening.on_axis(z_m[here], order)
                    made = trace.T @ table
                    result[i, :, here] += made
                    change[i, :, here] += made - less.T @ table[: less.shape[0]]
        return result, np.abs(change)


def part_of(axis: Axis, section: Section) -> tuple[int, Axis] | None:
    """The number of the first point of an axis in a section, and the points; None for none."""
    low, high = section.span_m
    z_m = axis.z_m
    first = int(np.searchsorted(z_m, low, side="left"))
    last = int(np.searchsorted(z_m, high, side="right")) - 1
    if first > last:
        return None
    return first, Axis(float(z_m[first]), axis.step_m, last - first + 1)
