"""A step of the bore: the potential in the narrower opening, and what it does on either side.

On the plane of a step φ = V_face + ψ(r) for r < s (s the smaller radius, V_face the annular face).
At the edge ψ goes like ρ^{2/3}, ρ^{4/3}, ρ^{5/3} …, so ψ = Σ c ψ_pμ, ψ_pμ = (1 − r²/s²)^μ times a
Jacobi polynomial of degree p, many with μ = 2/3 and one with μ = 4/3.  All that is needed of them
is the Hankel transform, in closed form (e = μ + 1):
 ψ̂(k) = ∫ ψ J0(kr) r dr = s² h(ks),  h(x) = J_{2p+e}(x)/x^e.
Beyond the plane, in a tube of radius a ≥ s at the distance u, ψ makes
 Σ_n 2/(a² J1²(j_n)) ψ̂(j_n/a) J0(j_n r/a) e^{−j_n u/a}   (modes: fast for u > a/2),
or, the same, the half-space part ∫ ψ̂(k) J0(kr) e^{−ku} k dk, on the axis a Legendre function,
less (2/π) ∫ sin(κu) κ K0(κa)/I0(κa) ψ̂(iκ) I0(κr) dκ for the wall (fast close to the plane).

Shapes: one row per function of a trace, (f, n); no unit: lengths by s or by a, as said.
Accuracy: 1e-12, tests/fields/test_aperture.py.
Source: G. N. Watson, Theory of Bessel Functions, 2nd ed. (Cambridge 1944) sec. 13.2 and 13.4; edge
exponents: J. D. Jackson, Classical Electrodynamics, 3rd ed. (Wiley 1999) sec. 2.11.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from wellseq.fields.hermite import FloatArray

_EXPONENTS = (5.0 / 3.0, 7.0 / 3.0)
_DIGITS = 37.0
_LEGENDRE_TERMS = 60


@dataclass(frozen=True, eq=False)
class Family:
    """The functions of a trace: degrees p (f, 1) and exponents e = μ + 1 (f, 1).

    Two are the same only if they are one object.
    """

    p: FloatArray
    e: FloatArray

    @property
    def nu(self) -> FloatArray:
        """Orders 2p + e of their Bessel functions, (f, 1)."""
        return np.asarray(2 * self.p + self.e)

    @property
    def size(self) -> int:
        """How many they are."""
        return self.p.shape[0]


@lru_cache(maxsize=8)
def family_of(plain: int) -> Family:
    """One function of exponent 7/3 and then `plain` of 5/3, so that fewer are the first of them.

    A second one of 7/3 would gain little: the functions would be all but dependent.
    """
    p = np.concatenate(([0.0], np.arange(plain)))
    e = np.concatenate(([_EXPONENTS[1]], np.full(plain, _EXPONENTS[0])))
    return Family(p[:, None], e[:, None])


def transform(family: Family, x: FloatArray) -> FloatArray:
    """h(x) at x > 0 (n,): (f, n)."""
    from scipy.special import jv

    return np.asarray(jv(family.nu, x) / x**family.e)


def transform_at_zero(family: Family) -> FloatArray:
    """h(0), (f,)."""
    from scipy.special import gamma

    level = 1.0 / (2.0**family.e * gamma(family.e + 1.0))
    return np.asarray(np.where(family.p == 0, level, 0.0)[:, 0])


def growing(family: Family, x: FloatArray) -> FloatArray:
    """h(ix) e^{−x} at x > 0 (n,): (f, n)."""
    from scipy.special import ive

    return np.asarray((-1.0) ** family.p * ive(family.nu, x) / x**family.e)


def half_space(family: Family) -> FloatArray:
    """∫ t² h h′ dt (f, f): the flux of each function into a half-space tested by each, per s.

    Source: Watson 13.41, the critical case of the integral of Weber and Schafheitlin.
    """
    from scipy.special import gamma, gammaln, rgamma

    mu, nu = family.nu, family.nu.T
    power = family.e + family.e.T - 2.0
    ratio = gammaln((mu + nu - power + 1) / 2) - gammaln((mu + nu + power + 1) / 2)
    each = rgamma((nu - mu + power + 1) / 2) * rgamma((mu - nu + power + 1) / 2)
    return np.asarray(gamma(power) / 2.0**power * np.exp(ratio) * each)


@lru_cache(maxsize=1)
def quadrature() -> tuple[FloatArray, FloatArray]:
    """Nodes and weights of ∫_0^∞ for smooth integrands that decay by powers or exponentials.

    Source: H. Takahasi, M. Mori, Double exponential formulas, Publ. RIMS 9, 721 (1974).
    """
    # Beyond 1e9 the scaled Bessel functions of scipy are no numbers; what is left there is 1e-12.
    t = np.arange(-3.6, 3.28, 0.02)
    nodes = np.exp(np.pi / 2 * np.sinh(t))
    return nodes, 0.02 * np.pi / 2 * np.cosh(t) * nodes


@lru_cache(maxsize=64)
def tube_flux(family: Family, ratio: float) -> FloatArray:
    """Flux of each function into an endless tube with s/a = ratio tested by each, per s: (f, f)."""
    from scipy.special import ive, kve

    t, weight = quadrature()
    near = t * (1 / ratio - 1) < _DIGITS
    t, weight = t[near], weight[near]
    wall = kve(0, t / ratio) / ive(0, t / ratio) * np.exp(-2 * t * (1 / ratio - 1))
    table = growing(family, t)
    return half_space(family) + 2 / np.pi * (table * (weight * t**2 * wall)) @ table.T


def step_at_the_plane(family: Family, ratio: float, width: float) -> FloatArray:
    """Flux at the plane, tested, per s²/a: (f,), of a wall that rises by 1 beside it.

    The rise begins at the plane and is `width` wide (in a, at most a tenth of 1 − ratio); the plane
    stays at the level below.  ratio < 1.
    """
    from scipy.special import ive

    t, weight = quadrature()
    near = t * (1 / ratio - 1) < _DIGITS
    t, weight = t[near], weight[near]
    fall = np.exp(-t * (1 / ratio - 1)) / ive(0, t / ratio)
    fall *= np.sinc(t / ratio * width / np.pi)
    return np.asarray(2 / np.pi / ratio * growing(family, t) @ (weight * fall))


def axis_half_space(family: Family, place: FloatArray, order: int) -> FloatArray:
    """∫ t h(t) e^{−tζ} dt on the axis at ζ = u/s ≥ 0 (n,), or its derivative by ζ: (f, n).

    Source: Watson 13.21 (Legendre's functions), written as a hypergeometric series.
    """
    from scipy.special import poch

    power, nu = order + 2.0 - family.e, family.nu
    root = np.sqrt(1.0 + place**2)
    half = 1.0 / (2.0 * root * (root + place))
    term = np.ones((family.size, place.size))
    total = term.copy()
    for k in range(_LEGENDRE_TERMS):
        term *= (1 - power + k) * (power + k) / ((1 + nu + k) * (k + 1)) * half
        total += term
    fall = (root + place) ** -nu
    return np.asarray((-1.0) ** order * poch(1 + nu, power - 1) * root**-power * fall * total)


def axis_wall(family: Family, ratio: float, place: FloatArray, order: int) -> FloatArray:
    """What the wall takes off on the axis at u/a (n,) ≤ 1/2, or its derivative, per s²/a²."""
    from scipy.special import ive, kve

    x, weight = quadrature()
    near = (x * (2 - ratio) < _DIGITS + 8) & (x > 1e-30)
    x, weight = x[near], weight[near]
    wall = kve(0, x) / ive(0, x) * np.exp(-x * (2 - ratio)) * x ** (1 + order) * weight
    wave = np.sin(np.multiply.outer(x, place) + order * np.pi / 2)
    return np.asarray(2 / np.pi * (growing(family, x * ratio) * wall) @ wave)


@lru_cache(maxsize=4)
def modes(count: int) -> tuple[FloatArray, FloatArray]:
    """The first zeros j_n of J0 and J1(j_n), (count,) each.

    Source: Handbook of Mathematical Functions (1964) 9.5.12 (McMahon), then Newton's rule.
    """
    from scipy.special import j0, j1

    beta = (np.arange(count) + 0.75) * np.pi
    zero = beta + 1 / (8 * beta) - 31 / (384 * beta**3)
    for _ in range(3):
        zero = zero + j0(zero) / j1(zero)
    return zero, j1(zero)


def modes_for(distance: float) -> int:
    """How many modes reach 1e-16 at a distance (in a) from their source."""
    return int(np.ceil(_DIGITS / np.pi / distance)) + 2
