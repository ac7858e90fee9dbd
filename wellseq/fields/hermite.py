"""Values and derivatives on equally spaced nodes → rigorous bounds and values between the nodes.

Between two nodes the polynomial of degree 2m − 1 that has the given m derivatives (orders 0 … m −
1) at both is written in Bernstein form; its values lie between its least and greatest control
value. m = 3 is the quintic Hermite interpolant, wrong by at most step⁶/46080 · sup|f⁽⁶⁾|; m = 5
(degree 9) is used where rounding is the only error wanted.

Shapes: derivatives (m, …, nz); controls (2m, …, nz − 1), one column per interval between nodes.
Units: those of the function; derivatives per metre to their order; step in m.
Accuracy: tests/fields/test_hermite.py.
Source: P. J. Davis, Interpolation and Approximation (Blaisdell 1963) ch. 3; Bernstein form: G.
Farin,
Curves and Surfaces for CAGD (Academic Press 1988) ch. 4.
"""

from __future__ import annotations

from math import comb, factorial

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]
POWERS = np.array(
    [
        [1, 0, 0, 0, 0, 0],
        [-5, 5, 0, 0, 0, 0],
        [10, -20, 10, 0, 0, 0],
        [-10, 30, -30, 10, 0, 0],
        [5, -20, 30, -20, 5, 0],
        [-1, 5, -10, 10, -5, 1],
    ],
    dtype=float,
)
"""Control values of a quintic → its coefficients of 1, t, … t⁵."""
QUINTIC_ERROR = 1.0 / 46080.0
"""The quintic interpolant is wrong by at most this × step⁶ × sup|f⁽⁶⁾|."""


def controls(derivatives: FloatArray, step_m: float) -> FloatArray:
    """Bernstein control values of the two-point Hermite interpolant of every interval.

    `derivatives` (m, …, nz): orders 0 … m − 1 at the nodes, per metre to their order.
    Returns (2m, …, nz − 1), in the unit of the function.
    """
    count = derivatives.shape[0]
    degree = 2 * count - 1
    scale = [step_m**i * factorial(degree - i) / factorial(degree) for i in range(count)]
    rise = np.array([[comb(j, i) * scale[i] for i in range(count)] for j in range(count)])
    fall = rise[::-1] * (-1.0) ** np.arange(count)
    flat = derivatives.reshape(count, -1)
    shape = derivatives.shape
    return np.concatenate(
        ((rise @ flat).reshape(shape)[..., :-1], (fall @ flat).reshape(shape)[..., 1:])
    )


def bernstein(fraction: FloatArray, degree: int) -> FloatArray:
    """Bernstein polynomials of a degree at fractions (k,) of an interval: (degree + 1, k)."""
    result = np.empty((degree + 1, fraction.size))
    rest = 1.0 - fraction
    result[0] = 1.0
    for i in range(degree):
        np.multiply(result[i], fraction, out=result[i + 1])
    power = rest.copy()
    for i in range(degree - 1, -1, -1):
        result[i] *= comb(degree, i) * power
        power *= rest
    return result


class Curve:
    """One function along the axis, known by its derivatives of orders 0 … 4 at equal steps.

    `nodes` (5, nz); beyond the ends the function decays as exp(−`decay_per_m` · distance), which is
    the slowest mode of a grounded tube.  Lengths in m; values in the unit of the function.
    """

    def __init__(
        self, nodes: FloatArray, start_m: float, step_m: float, decay_per_m: float
    ) -> None:
        self.nodes = nodes
        self.start_m = start_m
        self.step_m = step_m
        self.decay_per_m = decay_per_m
        self._controls: dict[int, FloatArray] = {}
        self.turns: tuple[FloatArray, FloatArray, FloatArray] | None = None
        self._bounds: dict[int, tuple[FloatArray, FloatArray]] = {}

    @property
    def z_m(self) -> FloatArray:
        """The nodes (nz,), in m."""
        return np.asarray(self.start_m + self.step_m * np.arange(self.nodes.shape[1]))

    def controls(self, order: int = 0) -> FloatArray:
        """Quintic control values (6, nz − 1) of the derivative of this order (0, 1 or 2)."""
        if order not in self._controls:
            self._controls[order] = controls(self.nodes[order : order + 3], self.step_m)
        return self._controls[order]

    def bounds(self, order: int = 0) -> tuple[FloatArray, FloatArray]:
        """Least and greatest value (nz − 1,) of the derivative's interpolant on every interval."""
        if order not in self._bounds:
            control = self.controls(order)
            self._bounds[order] = control.min(axis=0), control.max(axis=0)
        return self._bounds[order]

    def at(self, z_m: ArrayLike, order: int = 0) -> FloatArray:
        """The derivative 0, 1 or 2 at any z in m (shape kept), by the quintic interpolant."""
        return self._blend(np.asarray(z_m, dtype=float), self.controls(order), order)

    def exact(self, z_m: ArrayLike) -> FloatArray:
        """The value at any z in m (shape kept), by the interpolant of degree 9, to rounding."""
        return self._blend(np.asarray(z_m, dtype=float), controls(self.nodes, self.step_m), 0)

    def _blend(self, z_m: FloatArray, control: FloatArray, order: int) -> FloatArray:
        last = self.nodes.shape[1] - 1
        place = (z_m - self.start_m) / self.step_m
        inside = np.clip(place, 0.0, last)
        interval = np.minimum(inside.astype(np.intp), last - 1)
        degree = control.shape[0] - 1
        weight = bernstein((inside - interval).ravel(), degree)
        value = np.einsum("jk,jk->k", weight, control[:, interval.ravel()]).reshape(z_m.shape)
        beyond = np.abs(place - inside)
        if beyond.any():
            value = value * np.exp(-self.decay_per_m * self.step_m * beyond)
        return np.asarray(value)
