"""Supporting lines of a convex function → bounds of its least value on the box [0, 1]^n.

D(p) ≥ c + g·p for every line found, so any average of lines is a bound from below as well:
 n = 1: the two lines of a bracket with slopes < 0 and > 0; their crossing is the bound;
 n > 1: the weights that make the average's least value over the box greatest, by the simplex
        method on the dual (cutting planes).  The bound is recomputed from the weights, so it is
        sound whatever the simplex did and whenever it stops.

Shapes: progress (n,), weights of a line (n + 1,).  Units: V.
Accuracy: upper − lower ≤ tolerance, tests/fields/test_convex.py.
Source: J. E. Kelley, The cutting-plane method for solving convex programs, J. SIAM 8, 703 (1960).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from wellseq.fields.hermite import FloatArray

TOLERANCE_V = 1e-4
EVALUATIONS_MAX = 200


@dataclass(frozen=True, slots=True)
class SideBound:
    """The least depth on one side: it lies in [lower_V, upper_V] (V).

    `progress` (n,) is where the smallest value was met, with the barrier and the bottom there (m).
    """

    lower_V: float
    upper_V: float
    progress: tuple[float, ...]
    barrier_z_m: float
    well_z_m: float


@dataclass(frozen=True, slots=True)
class Line:
    """A supporting line: D(p) ≥ weights · (1, p); it touches at the progress it was asked for."""

    weights: FloatArray
    barrier_z_m: float
    well_z_m: float

    def at(self, progress: FloatArray) -> float:
        """Its value (V) at a progress (n,)."""
        return float(self.weights[0] + self.weights[1:] @ progress)


Oracle = Callable[[FloatArray], Line]


def least(oracle: Oracle, count: int, tolerance_V: float = TOLERANCE_V) -> SideBound:
    """The least value (V) over [0, 1]^count of a convex function given by supporting lines."""
    if count == 0:
        line = oracle(np.empty(0))
        value = float(line.weights[0])
        return SideBound(value, value, (), line.barrier_z_m, line.well_z_m)
    if count == 1:
        return _bracket(oracle, tolerance_V)
    return _cutting_planes(oracle, count, tolerance_V)


def _side(lower_V: float, best: tuple[float, FloatArray, Line]) -> SideBound:
    value, progress, line = best
    return SideBound(
        min(lower_V, value), value, tuple(progress.tolist()), line.barrier_z_m, line.well_z_m
    )


def _bracket(oracle: Oracle, tolerance_V: float) -> SideBound:
    """n = 1: the crossing of two supporting lines with slopes of opposite sign."""
    start, stop = np.zeros(1), np.ones(1)
    falling = oracle(start)
    best = (falling.at(start), start, falling)
    if falling.weights[1] >= 0.0:
        return _side(best[0], best)
    rising = oracle(stop)
    if rising.at(stop) < best[0]:
        best = (rising.at(stop), stop, rising)
    if rising.weights[1] <= 0.0:
        return _side(rising.at(stop), best)
    lower_V = -np.inf
    for _ in range(EVALUATIONS_MAX):
        gap = falling.weights - rising.weights
        progress = np.clip(-gap[:1] / gap[1], 0.0, 1.0)
        # The lower of the two values at the crossing, so that rounding cannot flatter.
        lower_V = max(lower_V, min(falling.at(progress), rising.at(progress)))
        line = oracle(progress)
        value = line.at(progress)
        if value < best[0]:
            best = (value, progress, line)
        if best[0] - lower_V <= tolerance_V:
            break
        if line.weights[1] < 0.0:
            falling = line
        elif line.weights[1] > 0.0:
            rising = line
        else:
            lower_V = max(lower_V, value)
            break
    return _side(lower_V, best)


def _cutting_planes(oracle: Oracle, count: int, tolerance_V: float) -> SideBound:
    """n > 1: the greatest least value of an average of lines over the box, line by line."""
    progress = np.full(count, 0.5)
    line = oracle(progress)
    best = (line.at(progress), progress, line)
    average = _Average(line.weights)
    lower_V = average.least_V()
    for _ in range(EVALUATIONS_MAX):
        if best[0] - lower_V <= tolerance_V:
            break
        try:
            progress = average.lowest()
            line = oracle(progress)
            value = line.at(progress)
            if value < best[0]:
                best = (value, progress, line)
            average.add(line.weights)
            lower_V = max(lower_V, average.least_V())
        except np.linalg.LinAlgError:
            # Lines that are almost the same: what is proved so far stays proved.
            break
    return _side(lower_V, best)


class _Average:
    """Weights λ ≥ 0, Σλ = 1, of lines c_i + g_i · p that make min over the box of Σ λ_i line_i
    greatest.

    Columns of the linear programme: n excesses s, n shortfalls u (cost −1), then one per line;
    rows: Σλ = 1 and Σ λ g − s + u = 0.  A new line is a new column: the old basis stays feasible.
    """

    def __init__(self, weights: FloatArray) -> None:
        n = weights.size - 1
        self.count = n
        eye = np.eye(n)
        slack = np.vstack((np.zeros((1, 2 * n)), np.hstack((-eye, eye))))
        column = np.concatenate(((1.0,), weights[1:]))
        self.columns = np.column_stack((slack, column))
        self.cost = np.concatenate((np.zeros(n), -np.ones(n), weights[:1]))
        self.basis = [2 * n, *(j if weights[1 + j] >= 0 else n + j for j in range(n))]

    def add(self, weights: FloatArray) -> None:
        """Take in one more line and find the best weights again."""
        column = np.concatenate(((1.0,), weights[1:]))
        self.columns = np.column_stack((self.columns, column))
        self.cost = np.append(self.cost, weights[0])
        for turn in range(60):
            if not self._pivot(first=turn > 20):
                break

    def _pivot(self, first: bool) -> bool:
        """One exchange; by the first improving column when `first`, which cannot cycle."""
        matrix = self.columns[:, self.basis]
        price = np.linalg.solve(matrix.T, self.cost[self.basis])
        gain = self.cost - price @ self.columns
        gain[self.basis] = 0.0
        scale = 1e-12 * (1.0 + float(np.abs(self.cost).max()))
        enter = int((gain > scale).argmax()) if first else int(gain.argmax())
        if gain[enter] <= scale:
            return False
        share = np.linalg.solve(matrix, np.eye(self.count + 1)[0])
        change = np.linalg.solve(matrix, self.columns[:, enter])
        falls = np.flatnonzero(change > 1e-12)
        if falls.size == 0:
            return False
        ratio = np.maximum(share[falls], 0.0) / change[falls]
        ties = falls[ratio <= ratio.min() + 1e-15]
        leave = min(ties.tolist(), key=lambda row: self.basis[row])
        self.basis[leave] = enter
        return True

    def lowest(self) -> FloatArray:
        """Where the largest of all lines is least, as far as the basis knows: the next p."""
        price = np.linalg.solve(self.columns[:, self.basis].T, self.cost[self.basis])
        return np.clip(-price[1:], 0.0, 1.0)

    def least_V(self) -> float:
        """The least value (V) over the box of the average of the basis' lines."""
        share = np.linalg.solve(self.columns[:, self.basis], np.eye(self.count + 1)[0])
        lines = np.array(self.basis) >= 2 * self.count
        weight = np.clip(share[lines], 0.0, None)
        if not weight.sum() > 0.0:
            return -np.inf
        weight /= weight.sum()
        chosen = np.array(self.basis)[lines]
        slope = self.columns[1:, chosen] @ weight
        return float(self.cost[chosen] @ weight + np.minimum(slope, 0.0).sum())
