"""Clouds on a grid → the one potential and the pressures at which they rest: a convex minimum.

Each cloud s with signed charge number q, number N, thermal energy θ (eV) has

    n = N exp(g)/Z,  Z = ∫ exp(g) dV,  g = −(q (φ_vac + φ) + κ r²)/θ,

and −ε0 ∇²φ = Σ q e n with φ = 0 on the wall.  With A the discrete −∇² integrated over cells and
c = ε0/e these are the conditions for the minimum of

    J[φ, κ] = (c/2) φ·Aφ + Σ_s (N θ ln Z + κ N ⟨r²⟩_given),

jointly convex: a quadratic plus log-sums of exponentials of linear functions.  Newton's method with
a line search reaches the one minimum from any start.  A cloud may instead have each radius on its
own in equilibrium along z: Σ_i N_i ln Z_i in place of N ln Z, no κ.  The Hessian is c A + diag(w)
less one outer product per sum: one banded Cholesky factor, then a small dense system for the
products and the κ (Woodbury).

Changes of J are computed from the step itself, never as a difference of two large J, so that the
line search still works where J no longer changes in its last digit.

Shapes: fields (nz, nr).  Units: V, eV, m, V/m² for κ.
Accuracy: the decrement √(gᵀH⁻¹g / ΣNθ) is below 1e-8 at the end; tests/clouds/test_newton.py.
Source: S. Boyd, L. Vandenberghe, Convex Optimization (Cambridge 2004) sec. 9.5; the functional:
derived (minimum principle for N, ⟨r²⟩ and T given).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import inf, isfinite, nan, sqrt

import numpy as np

from wellseq.clouds.constants import ELEMENTARY_CHARGE_C, PERMITTIVITY_F_PER_M
from wellseq.clouds.grid import Grid
from wellseq.clouds.shares import Charges, Shares
from wellseq.fields.hermite import FloatArray

CHARGES_PER_VM = PERMITTIVITY_F_PER_M / ELEMENTARY_CHARGE_C
DECREMENT_LAST, DECREMENT_RUNG = 1e-8, 1.0
"""A hotter rung is only a start for the next: close to it is enough, and a third of the steps."""
STEPS_MAX = 160
"""Newton steps of one solve, all rungs of the temperature together."""
STEPS_WARM = 40
"""Steps that an earlier solution is given before the ladder takes over."""
_HALVINGS_MAX = 40
_RUNG_FACTOR = 2.5
_FALL = 1e-4


@dataclass(frozen=True, slots=True)
class Rest:
    """The state found: own potential (nz, nr) V, κ of each cloud (V/m², NaN with a profile).

    `shares` are the fractions of each cloud per cell, (last − first, rings), summing to 1.
    `decrement` says how far from the minimum; `steps` Newton steps were taken.
    """

    own_V: FloatArray
    pressure_V_per_m2: tuple[float, ...]
    shares: tuple[FloatArray, ...]
    decrement: float
    steps: int


@dataclass(frozen=True, slots=True)
class _Step:
    own_V: FloatArray
    pressure: FloatArray
    slope_eV: float


def rest(
    *,
    grid: Grid,
    vacuum_V: FloatArray,
    clouds: Sequence[Charges],
    energy_scale_eV: float,
    start: Rest | None = None,
) -> Rest:
    """The minimum of J for an empty bore's potential (nz, nr) in V.

    `start` is a state of as many clouds on the same grid to begin from.  Without it, or when it
    does not lead there soon, the temperature comes down a ladder from about `energy_scale_eV`.
    The result's `decrement` is above 1e-6 when that many steps did not do.
    """
    matrix = CHARGES_PER_VM * grid.matrix()
    spent = 0
    if start is not None:
        shares = [Shares(cloud, grid, vacuum_V) for cloud in clouds]
        pressure = np.array(start.pressure_V_per_m2)
        found = _settle(grid, matrix, shares, start.own_V, pressure, DECREMENT_LAST, STEPS_WARM)
        if found.decrement <= DECREMENT_LAST:
            return found
        spent = found.steps
    outward = [_outward_V_per_m2(grid, vacuum_V, cloud) for cloud in clouds]
    # Against the vacuum field's outward slope there must be pressure from the first step on, and
    # the first rung as hot as what that slope does over the cloud.
    leaning = [(item.mean_r2_m2 or 0.0) * out for item, out in zip(clouds, outward, strict=True)]
    scale_eV = max(energy_scale_eV, *leaning)
    own_V = np.zeros(grid.shape)
    pressure = np.array(
        [_first_pressure(item, scale_eV, out) for item, out in zip(clouds, outward, strict=True)]
    )
    rungs = _ladder(clouds, scale_eV)
    for thermal_eV in rungs:
        warm = [replace(item, thermal_eV=max(item.thermal_eV, thermal_eV)) for item in clouds]
        shares = [Shares(cloud, grid, vacuum_V) for cloud in warm]
        goal = DECREMENT_LAST if thermal_eV == rungs[-1] else DECREMENT_RUNG
        found = _settle(grid, matrix, shares, own_V, pressure, goal, STEPS_MAX - spent)
        spent += found.steps
        own_V, pressure = found.own_V, np.array(found.pressure_V_per_m2)
        if not found.decrement <= goal:
            # The shares are those of a hotter cloud: this is no answer, however close.
            return replace(found, steps=spent, decrement=inf)
    return replace(found, steps=spent)


def _ladder(clouds: Sequence[Charges], scale_eV: float) -> list[float]:
    """Least thermal energies of the rungs, from the scale down to the coldest cloud's."""
    rungs = [min(item.thermal_eV for item in clouds)]
    while rungs[-1] * _RUNG_FACTOR < 1.5 * scale_eV:
        rungs.append(rungs[-1] * _RUNG_FACTOR)
    return rungs[::-1]


def _outward_V_per_m2(grid: Grid, vacuum_V: FloatArray, cloud: Charges) -> float:
    """The least κ, at least 0, that puts the empty well's bottom on the axis."""
    energy = cloud.charge_e * vacuum_V[cloud.span]
    r2 = grid.r2_m2[: cloud.rings]
    fall = (energy[:, 0].min() - energy[:, 1:].min(axis=0)) / (r2[1:] - r2[0])
    return max(0.0, float(fall.max(initial=0.0)))


def _first_pressure(cloud: Charges, scale_eV: float, outward: float) -> float:
    if cloud.pressure_V_per_m2 is not None:
        return cloud.pressure_V_per_m2
    if cloud.mean_r2_m2 is None:
        return nan
    return outward + (max(cloud.thermal_eV, scale_eV) + scale_eV / 2) / cloud.mean_r2_m2


def _settle(
    grid: Grid,
    matrix: FloatArray,
    shares: Sequence[Shares],
    own_V: FloatArray,
    pressure: FloatArray,
    goal: float,
    steps_max: int,
) -> Rest:
    """Newton steps at fixed temperatures until the decrement is at most `goal`."""
    scale_eV = sum(item.cloud.number * item.cloud.thermal_eV for item in shares)
    decrement, steps = inf, 0
    _update(shares, own_V, pressure)
    while steps < steps_max and decrement > goal:
        steps += 1
        try:
            step = _newton_step(grid, matrix, shares, own_V)
        except np.linalg.LinAlgError:
            # The cloud has shrunk into one cell or lost all hold: not an answer.
            decrement = inf
            break
        decrement = sqrt(max(-step.slope_eV, 0.0) / scale_eV)
        length = _search(grid, shares, step) if isfinite(decrement) else 0.0
        if length == 0.0:
            decrement = inf
            break
        own_V = own_V + length * step.own_V
        pressure = pressure + length * step.pressure
        _update(shares, own_V, pressure)
    pressures = tuple(float(item) for item in pressure)
    fractions = tuple(item.held / item.cloud.number for item in shares)
    return Rest(own_V, pressures, fractions, decrement, steps)


def _update(shares: Sequence[Shares], own_V: FloatArray, pressure: FloatArray) -> None:
    for item, kappa in zip(shares, pressure, strict=True):
        item.update(own_V, float(kappa))


def _newton_step(
    grid: Grid, matrix: FloatArray, shares: Sequence[Shares], own_V: FloatArray
) -> _Step:
    """Solve H d = −g; the slope of J along d is −dᵀHd."""
    from scipy.linalg import cho_solve_banded, cholesky_banded

    cells = grid.shape[0] * grid.shape[1]
    bands = matrix.copy(order="F")
    diagonal = bands[0].reshape(grid.shape)
    gradient = CHARGES_PER_VM * grid.apply(own_V)
    columns, borders, stiffness, pull = [], [], [], []
    for item in shares:
        cloud, held = item.cloud, item.held
        gradient[cloud.span] -= cloud.charge_e * held
        diagonal[cloud.span] += cloud.charge_e**2 / cloud.thermal_eV * held
        columns.append(_spread(grid, cloud, item.columns()))
        if item.free:
            lean = item.r2_m2 - item.mean_r2_m2
            border = cloud.charge_e / cloud.thermal_eV * held * lean
            borders.append(_spread(grid, cloud, border[:, :, None]))
            stiffness.append(float((held * lean**2).sum()) / cloud.thermal_eV)
            pull.append(cloud.number * ((cloud.mean_r2_m2 or 0.0) - item.mean_r2_m2))
    bands[0] = diagonal.ravel()
    outer = np.concatenate(columns, axis=1)
    sides = np.concatenate([np.empty((cells, 0)), *borders], axis=1)
    right = np.concatenate((gradient.reshape(-1, 1), outer, sides), axis=1)
    factor = cholesky_banded(bands, overwrite_ab=True, lower=True, check_finite=False)
    solved = cho_solve_banded((factor, True), right, check_finite=False)
    weights = np.concatenate([item.weights() for item in shares])
    small = _small_system(solved, outer, sides, weights, np.array(stiffness), np.array(pull))
    split = outer.shape[1]
    own = solved @ np.concatenate(([-1.0], small[:split], -small[split:]))
    pressure = np.zeros(len(shares))
    pressure[[item.free for item in shares]] = small[split:]
    slope = float(gradient.ravel() @ own + np.dot(pull, small[split:]))
    return _Step(own.reshape(grid.shape), pressure, slope)


def _spread(grid: Grid, cloud: Charges, values: FloatArray) -> FloatArray:
    """Values (cells of a cloud, k) in the cells of the grid, (nz·nr, k)."""
    table = np.zeros((*grid.shape, values.shape[-1]))
    table[cloud.span] = values
    return table.reshape(-1, values.shape[-1])


def _small_system(
    solved: FloatArray,
    outer: FloatArray,
    sides: FloatArray,
    weights: FloatArray,
    stiffness: FloatArray,
    pull: FloatArray,
) -> FloatArray:
    """Amplitudes of the outer products, then changes of κ."""
    split = 1 + outer.shape[1]
    gradient, by_outer, by_sides = solved[:, 0], solved[:, 1:split], solved[:, split:]
    upper = np.concatenate((np.diag(1.0 / weights) - outer.T @ by_outer, outer.T @ by_sides), 1)
    lower = np.concatenate((sides.T @ by_outer, np.diag(stiffness) - sides.T @ by_sides), 1)
    right = np.concatenate((-outer.T @ gradient, sides.T @ gradient - pull))
    return np.asarray(np.linalg.solve(np.concatenate((upper, lower)), right))


def _search(grid: Grid, shares: Sequence[Shares], step: _Step) -> float:
    """The length of the step by Armijo's rule; 0 when J falls nowhere along it."""
    if step.slope_eV == 0.0:
        return 1.0
    bend = CHARGES_PER_VM * float((step.own_V * grid.apply(step.own_V)).sum())
    moves = [
        item.move(step.own_V, float(kappa))
        for item, kappa in zip(shares, step.pressure, strict=True)
    ]
    length = 1.0
    for _ in range(_HALVINGS_MAX):
        change = length * step.slope_eV + length**2 / 2 * bend
        for item, move in zip(shares, moves, strict=True):
            change += item.convex_part_eV(length * move)
        if change <= _FALL * length * step.slope_eV:
            return length
        length /= 2
    return 0.0
