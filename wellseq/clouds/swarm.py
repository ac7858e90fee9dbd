"""A cloud's temperature or a bunch's spread → particles, the same ones every time.

Points are taken evenly, not by chance: point i has coordinates frac(1/2 + i/g^k), g the root of
g^(d+1) = g + 1, a rank-1 sequence in which every number of points is evenly spread.  In one
dimension quantiles are taken at the middles of equal shares.

Shapes: particles (n,).  Units: m, m/s, K, eV, kg.
Accuracy: shares of 1000 points within 0.01, tests/clouds/test_swarm.py.
Source: additive recurrences: H. Niederreiter, Random Number Generation and Quasi-Monte Carlo
Methods (SIAM 1992) ch. 3, from memory.
"""

from __future__ import annotations

from dataclasses import dataclass
from statistics import NormalDist
from typing import Literal

import numpy as np

from wellseq.clouds.constants import ELEMENTARY_CHARGE_C, THERMAL_EV_PER_K
from wellseq.clouds.forces import AxisPotential, Basin
from wellseq.fields.hermite import FloatArray

_PLACES = 8001
_NORMAL_REACH = 8.0


def even_points(count: int, dimensions: int) -> FloatArray:
    """(dimensions, count) numbers between 0 and 1, evenly spread; the same ones every time."""
    root = 2.0
    for _ in range(60):
        root = (1.0 + root) ** (1.0 / (dimensions + 1))
    powers = root ** -np.arange(1.0, dimensions + 1.0)
    return np.asarray((0.5 + powers[:, None] * np.arange(count)) % 1.0)


def normal_quantiles(share: FloatArray) -> FloatArray:
    """Quantiles (n,) of the normal distribution of width 1 at shares between 0 and 1."""
    inverse = NormalDist().inv_cdf
    return np.array([inverse(one) for one in share.tolist()])


def _normal_table() -> tuple[FloatArray, FloatArray]:
    place = np.linspace(-_NORMAL_REACH, _NORMAL_REACH, 4001)
    below = NormalDist().cdf
    return place, np.array([below(one) for one in place.tolist()])


_PLACE, _BELOW = _normal_table()


@dataclass(frozen=True, slots=True)
class Spreading:
    """How a quantity is spread: `uniform` over `middle` ± `width`, or `normal` of rms `width`.

    All in the unit of the quantity; a width of 0 is one value.
    """

    middle: float
    width: float
    shape: Literal["uniform", "normal"] = "uniform"

    def quantiles(self, count: int) -> FloatArray:
        """The middles (count,) of equal shares, in rising order."""
        share = (np.arange(count) + 0.5) / count
        if self.shape == "normal":
            return np.asarray(self.middle + self.width * normal_quantiles(share))
        return np.asarray(self.middle + self.width * (2.0 * share - 1.0))

    def below(self, value: FloatArray) -> FloatArray:
        """The share of all that is below `value` (any shape), 0 to 1, to 1e-6."""
        if self.width <= 0.0:
            return np.asarray(np.where(value > self.middle, 1.0, 0.0))
        place = (value - self.middle) / self.width
        if self.shape == "normal":
            return np.asarray(np.interp(place, _PLACE, _BELOW))
        return np.asarray(np.clip((place + 1.0) / 2.0, 0.0, 1.0))

    @property
    def reach(self) -> float:
        """Nearly all is within this distance of the middle."""
        return self.width * (4.0 if self.shape == "normal" else 1.0)


def thermal(
    potential: AxisPotential,
    basin: Basin,
    temperature_K: float,
    mass_kg: float,
    count: int,
    charge_e: float = 1.0,
) -> tuple[FloatArray, FloatArray]:
    """Places (m) and speeds (m/s) of a cloud in thermal equilibrium along a well, (count,) each.

    The density goes with e^{-U/kT} between the barriers; particles whose speed would take them
    over the lower barrier are given the greatest that does not.  Mass in kg, temperature in K,
    charge in e.
    """
    theta = THERMAL_EV_PER_K * temperature_K / abs(charge_e)
    z_m = np.linspace(basin.left_m, basin.right_m, _PLACES)
    above = potential.at(z_m)
    weight = np.exp(-(above - above.min()) / theta)
    weight[above > basin.barrier_V] = 0.0
    filled = np.concatenate(([0.0], np.cumsum((weight[1:] + weight[:-1]) / 2.0)))
    filled /= filled[-1]
    # Where nothing is, places would not be settled by the share below them.
    rising = np.concatenate(([True], np.diff(filled) > 0.0))
    share, chance = even_points(count, 2)
    place = np.interp(share, filled[rising], z_m[rising])
    most = np.sqrt(np.maximum(basin.barrier_V - potential.at(place), 0.0) * (1.0 - 1e-6))
    root_eV = np.clip(np.sqrt(theta / 2.0) * normal_quantiles(chance), -most, most)
    factor = np.sqrt(2.0 * ELEMENTARY_CHARGE_C * abs(charge_e) / mass_kg)
    return place, root_eV * float(factor)
