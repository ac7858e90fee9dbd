"""Clouds on a grid → the one potential and the pressures at which they rest: a convex minimum.

Each cloud s with signed charge number q, number N, thermal energy θ (eV) has

    n = N exp(g)/Z,  Z = ∫ exp(g) dV,  g = −(q (φ_vac + φ) + κ r²)/θ,

and −ε0 ∇²φ = Σ q e n with φ = 0 on the wall.  With A the discrete −∇² integrated over cells and
c = ε0/e these are the conditions for the minimum of

    J[φ, κ] = (c/2) φ·Aφ + Σ_s (N θ ln Z + κ N ⟨r²⟩_given),

jointly convex: a quadratic plus log-sums of exponentials of linear functions.  Newton's method with
a line search reaches the one minimum from any start.  A cloud may instead have each radius on its
own in equilibrium along z: Σ_i N_i ln Z_i in place of N ln Z, no κ.  The Hessian is c A + diag(w)
less one outer product per free sum: one banded Cholesky factor, then a small dense system for the
products and the κ (Woodbury).

Changes of J are computed from the step itself, never as a difference of two large J, so that the
line search still works where J no longer changes in its last digit.

Shapes: fields (nz, nr).  Units: V, eV, m, V/m² for κ.
Accuracy: the decrement √(gᵀH⁻¹g / ΣNθ) is 1e-8 at the end; tests/clouds/test_newton.py.
Source: S. Boyd, L. Vandenberghe, Convex Optimization (Cambridge 2004) sec. 9.5; the functional:
derived (minimum principle for N, ⟨r²⟩ and T given).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import inf, sqrt
from typing import Any

import numpy as np

from wellseq.clouds.constants import ELEMENTARY_CHARGE_C, PERMITTIVITY_F_PER_M
from wellseq.clouds.grid import Grid
from wellseq.fields.hermite import FloatArray

CHARGES_PER_VM = PERMITTIVITY_F_PER_M / ELEMENTARY_CHARGE_C
DECREMENT_LAST = 1e-8
DECREMENT_RUNG = 1e-3
STEPS_MAX = 250
"""Newton steps of one solve, all rungs together."""
_HALVINGS_MAX = 40
_RUNG_FACTOR = 4.0


@dataclass(frozen=True, slots=True)
class Charges:
    """One cloud for the solver: `charge_e` (signed number of e), `number`, `thermal_eV`.

    It lives in the cells `first` … `last` − 1 along z.  Exactly one of `mean_r2_m2` (⟨r²⟩),
    `pressure_V_m2` (κ) and `profile` (nr,), the number of particles at each radius, is given.
    """

    charge_e: int
    number: float
    thermal_eV: float
    first: int
    last: int
    mean_r2_m2: float | None = None
    pressure_V_m2: float | None = None
    profile: FloatArray | None = None


@dataclass(frozen=True, slots=True)
class Rest:
    """The state found: own potential (nz, nr) V, κ of each cloud (V/m², NaN with a profile).

    `shares` are the fractions of each cloud per cell, (last − first, nr), summing to 1.
    `decrement` says how far from the minimum; `steps` Newton steps were taken.
    """

    own_V: FloatArray
    pressure_V_m2: tuple[float, ...]
    shares: tuple[FloatArray, ...]
    decrement: float
    steps: int


class _Sum:
    """One cloud at one temperature: log shares and what the Hessian needs of them."""

    def __init__(self, cloud: Charges, grid: Grid, vacuum_V: FloatArray) -> None:
        self.cloud = cloud
        self.span = slice(cloud.first, cloud.last)
        self.r2 = grid.mean_r2_m2
        self.log_volume = np.log(grid.volume_m3[self.span])
        self.vacuum_V = vacuum_V[self.span]
        if cloud.profile is not None:
            self.counts = cloud.profile
        else:
            self.counts = np.array([cloud.number])

    @property
    def free(self) -> bool:
        """Whether κ is an unknown."""
        return self.cloud.mean_r2_m2 is not None

    def exponent(self, own_V: FloatArray, pressure: float) -> FloatArray:
        """g + ln V (cells)."""
        cloud = self.cloud
        energy = cloud.charge_e * (self.vacuum_V + own_V[self.span])
        if cloud.profile is None:
            energy = energy + pressure * self.r2
        return np.asarray(self.log_volume - energy / cloud.thermal_eV)

    def log_shares(self, exponent: FloatArray) -> FloatArray:
        """ln p (cells), p summing to 1 over the cloud, or over each radius with a profile."""
        axis = None if self.cloud.profile is None else 0
        top = exponent.max(axis=axis, keepdims=True)
        return np.asarray(
            exponent - top - np.log(np.exp(exponent - top).sum(axis=axis, keepdims=True))
        )

    def columns(self, shares: FloatArray) -> FloatArray:
        """The outer products' vectors (cells, k): one, or one per radius with particles."""
        if self.cloud.profile is None:
            return shares.reshape(-1, 1)
        nr = shares.shape[1]
        kept = np.flatnonzero(self.counts > 0)
        table = np.zeros((*shares.shape, kept.size))
        table[:, kept, np.arange(kept.size)] = shares[:, kept]
        return table.reshape(-1, nr and kept.size)

    def products(self) -> FloatArray:
        """Weights (k,) of the outer products: q² N/θ."""
        counts = self.counts[self.counts > 0]
        return np.asarray(self.cloud.charge_e**2 * counts / self.cloud.thermal_eV)

    def change(self, log_shares: FloatArray, shares: FloatArray, move: FloatArray) -> float:
        """Σ N θ ln⟨exp(u)⟩ for a change u of the exponent that has no mean."""
        axis = None if self.cloud.profile is None else (0,)
        if np.abs(move).max() <= 0.5:
            small = np.expm1(move) - move
            logs = np.log1p((shares * small).sum(axis=axis))
        else:
            total = log_shares + move
            top = total.max(axis=axis)
            logs = top + np.log(np.exp(total - top).sum(axis=axis))
        return float(self.cloud.thermal_eV * (self.counts * logs).sum())

    def centred(self, shares: FloatArray, move: FloatArray) -> FloatArray:
        """A change of the exponent less its mean over the shares (of each radius)."""
        axis = None if self.cloud.profile is None else 0
        return np.asarray(move - (shares * move).sum(axis=axis, keepdims=True))


@dataclass(slots=True)
class _State:
    own_V: FloatArray
    pressure: FloatArray
    logs: list[FloatArray]


def rest(
    grid: Grid,
    vacuum_V: FloatArray,
    clouds: Sequence[Charges],
    start: Rest | None = None,
    energy_scale_eV: float = 0.0,
) -> Rest:
    """The minimum of J.  `start` is a state on the same grid to begin from.

    Without it the temperature comes down a ladder from about `energy_scale_eV`.  The result's
    `decrement` is above 1e-6 when STEPS_MAX Newton steps did not do.
    """
    matrix = CHARGES_PER_VM * grid.matrix()
    if start is not None:
        state = _State(start.own_V, np.array(start.pressure_V_m2), [])
        found = _settle(grid, matrix, vacuum_V, clouds, state, DECREMENT_LAST, 60)
        if found.decrement <= DECREMENT_LAST:
            return found
    steps = start.steps if start is not None else 0
    own_V = np.zeros(grid.shape)
    pressure = np.array([_first_pressure(cloud, energy_scale_eV) for cloud in clouds])
    state = _State(own_V, pressure, [])
    rungs = _ladder(clouds, energy_scale_eV)
    steps = 0
    for lowest in rungs:
        warm = [replace(item, thermal_eV=max(item.thermal_eV, lowest)) for item in clouds]
        goal = DECREMENT_LAST if lowest == rungs[-1] else DECREMENT_RUNG
        found = _settle(grid, matrix, vacuum_V, warm, state, goal, STEPS_MAX - steps)
        steps += found.steps
        state = _State(found.own_V, np.array(found.pressure_V_m2), [])
        if steps >= STEPS_MAX:
            break
    return replace(found, steps=steps)


def _ladder(clouds: Sequence[Charges], scale_eV: float) -> list[float]:
    """Least thermal energies of the rungs, from the scale down to the coldest cloud's."""
    coldest = min(item.thermal_eV for item in clouds)
    rungs = [coldest]
    while rungs[-1] * _RUNG_FACTOR < 1.5 * scale_eV:
        rungs.append(rungs[-1] * _RUNG_FACTOR)
    return rungs[::-1]


def _first_pressure(cloud: Charges, scale_eV: float) -> float:
    if cloud.pressure_V_m2 is not None:
        return cloud.pressure_V_m2
    if cloud.mean_r2_m2 is None:
        return float("nan")
    return (max(cloud.thermal_eV, scale_eV) + scale_eV / 2) / cloud.mean_r2_m2


def _settle(
    grid: Grid,
    matrix: FloatArray,
    vacuum_V: FloatArray,
    clouds: Sequence[Charges],
    state: _State,
    goal: float,
    steps_max: int,
) -> Rest:
    """Newton steps at fixed temperatures until the decrement is at most `goal`."""
    sums = [_Sum(cloud, grid, vacuum_V) for cloud in clouds]
    scale = sum(item.cloud.number * item.cloud.thermal_eV for item in sums)
    state.logs = [
        item.log_shares(item.exponent(state.own_V, pressure))
        for item, pressure in zip(sums, state.pressure, strict=True)
    ]
    decrement, steps = inf, 0
    while steps < steps_max:
        shares = [np.exp(logs) for logs in state.logs]
        step = _newton_step(grid, matrix, sums, state, shares)
        steps += 1
        decrement = sqrt(max(-step.slope, 0.0) / scale)
        if not np.isfinite(decrement):
            break
        length = _search(grid, sums, state, shares, step)
        if length == 0.0:
            break
        state.own_V = state.own_V + length * step.own_V
        state.pressure = state.pressure + length * step.pressure
        state.logs = [
            item.log_shares(item.exponent(state.own_V, pressure))
            for item, pressure in zip(sums, state.pressure, strict=True)
        ]
        if decrement <= goal:
            break
    shares = [np.exp(logs) for logs in state.logs]
    return Rest(
        state.own_V, tuple(float(k) for k in state.pressure), tuple(shares), decrement, steps
    )


@dataclass(slots=True)
class _Step:
    own_V: FloatArray
    pressure: FloatArray
    slope: float


def _newton_step(
    grid: Grid, matrix: FloatArray, sums: list[_Sum], state: _State, shares: list[FloatArray]
) -> _Step:
    """Solve H d = −g; the slope of J along d is −dᵀHd."""
    from scipy.linalg import cho_solve_banded, cholesky_banded

    nr = grid.shape[1]
    bands = matrix.copy(order="F")
    gradient = CHARGES_PER_VM * grid.apply(state.own_V)
    columns, weights = [], []
    borders, stiffness, pull, free = [], [], [], []
    for number, (item, share) in enumerate(zip(sums, shares, strict=True)):
        cloud = item.cloud
        cells = slice(cloud.first * nr, cloud.last * nr)
        held = share * item.counts
        gradient[item.span] -= cloud.charge_e * held
        bands[0, cells] += (cloud.charge_e**2 / cloud.thermal_eV * held).ravel()
        part = np.zeros((bands.shape[1], (item.counts > 0).sum()))
        part[cells] = item.columns(share)
        columns.append(part)
        weights.append(item.products())
        if item.free:
            mean = float((share * item.r2).sum())
            border = np.zeros((bands.shape[1], 1))
            lean = cloud.charge_e * cloud.number / cloud.thermal_eV * share * (item.r2 - mean)
            border[cells, 0] = lean.ravel()
            borders.append(border)
            spread = float((share * (item.r2 - mean) ** 2).sum())
            stiffness.append(cloud.number / cloud.thermal_eV * spread)
            pull.append(cloud.number * ((cloud.mean_r2_m2 or 0.0) - mean))
            free.append(number)
    outer = np.concatenate(columns, axis=1)
    sides = np.concatenate([*borders], axis=1) if borders else np.empty((bands.shape[1], 0))
    right = np.concatenate((gradient.reshape(-1, 1), outer, sides), axis=1)
    factor = cholesky_banded(bands, overwrite_ab=True, lower=True, check_finite=False)
    solved = cho_solve_banded((factor, True), right, check_finite=False)
    small = _small_system(solved, outer, sides, np.concatenate(weights), stiffness, pull)
    split = outer.shape[1]
    own = -solved[:, 0] + solved[:, 1 : 1 + split] @ small[:split]
    own -= solved[:, 1 + split :] @ small[split:]
    pressure = np.zeros(len(sums))
    pressure[free] = small[split:]
    slope = float(gradient.ravel() @ own + np.dot(pull, small[split:]))
    return _Step(own.reshape(grid.shape), pressure, slope)


def _small_system(
    solved: FloatArray,
    outer: FloatArray,
    sides: FloatArray,
    weights: FloatArray,
    stiffness: list[float],
    pull: list[float],
) -> FloatArray:
    """Amplitudes of the outer products and changes of κ."""
    split = 1 + outer.shape[1]
    gradient, by_outer, by_sides = solved[:, 0], solved[:, 1:split], solved[:, split:]
    upper = np.concatenate((np.diag(1.0 / weights) - outer.T @ by_outer, outer.T @ by_sides), 1)
    lower = np.concatenate((sides.T @ by_outer, np.diag(stiffness) - sides.T @ by_sides), 1)
    right = np.concatenate((-outer.T @ gradient, sides.T @ gradient - np.array(pull)))
    return np.asarray(np.linalg.solve(np.concatenate((upper, lower)), right))


def _search(
    grid: Grid, sums: list[_Sum], state: _State, shares: list[FloatArray], step: _Step
) -> float:
    """The length of the step by Armijo's rule; 0 when J falls nowhere along it."""
    bend = CHARGES_PER_VM * float((step.own_V * grid.apply(step.own_V)).sum())
    moves: list[Any] = []
    for item, share, pressure in zip(sums, shares, step.pressure, strict=True):
        cloud = item.cloud
        energy = cloud.charge_e * step.own_V[item.span]
        if item.free:
            energy = energy + pressure * item.r2
        moves.append(item.centred(share, -energy / cloud.thermal_eV))
    length = 1.0
    for _ in range(_HALVINGS_MAX):
        change = length * step.slope + length**2 / 2 * bend
        for item, logs, share, move in zip(sums, state.logs, shares, moves, strict=True):
            change += item.change(logs, share, length * move)
        if change <= 1e-4 * length * step.slope or step.slope > -1e-300:
            return length
        length /= 2
    return 0.0
