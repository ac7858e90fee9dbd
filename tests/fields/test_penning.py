"""The open-endcap compensated trap: published coefficients, and the exact Fourier-Bessel series.

Geometry in units of z0: gapless ring of half-length z0 - dzc, compensation rings of length dzc,
endcaps of length ze, bore rho0.  phi = (V0/2) sum C_k (r/d)^k P_k(cos), C_k = C_k(0) + D_k Vc/V0,
d^2 = (z0^2 + rho0^2/2)/2; ring at -V0/2, endcaps at +V0/2, compensation at Vc.
Source: Open-endcap Penning traps for high precision experiments, Int. J. Mass Spectrom. Ion
Processes 88, 319 (1989) (values from memory).  There the outer ends are grounded planes; here the
wall is continued by its odd reflection in them, which is the same thing.
"""

from math import factorial, pi

import numpy as np
import pytest
from scipy.special import ive
from stacks import stand

from wellseq.fields.uniform import Axis, stack_of, unit_potentials

RHO0, DZC, ZE = 1.0239, 0.8351, 4.327
D = np.sqrt((1 + RHO0**2 / 2) / 2)


def coefficients(rho0=RHO0, dzc=DZC, ze=ZE):
    """(C_k(0), D_k) for k = 2, 4, 6 from the solver's derivatives at the centre."""
    ring, end = 1.0 - dzc, 1.0 + ze
    half = [(0.0, ring), (ring, 1.0), (1.0, end), (end, 2 * end - 1.0),
            (2 * end - 1.0, 2 * end - ring), (2 * end - ring, 2 * end)]  # fmt: skip
    edges = [(-q, -p) for p, q in reversed(half)] + half
    base = np.array([-0.5, 0.0, 0.5, -0.5, 0.0, 0.5])
    comp = np.array([0.0, 1.0, 0.0, 0.0, -1.0, 0.0])
    axis = Axis(0.0, 0.01, 2)
    stack = stack_of(stand(edges, rho0).electrodes)
    table = unit_potentials(stack, axis, (0.0,), (2, 4, 6))[0, :, :, 0]
    scale = [2 * D**k / factorial(k) for k in (2, 4, 6)]
    both = [table @ np.concatenate((side[::-1], side)) * scale for side in (base, comp)]
    return both[0], both[1]


def series(rho0=RHO0, dzc=DZC, ze=ZE, terms=90):
    """The same by A_n cos(k_n z) I0(k_n rho)/I0(k_n rho0), k_n = (n + 1/2) pi/(z0 + ze)."""
    end = 1.0 + ze
    k = (np.arange(terms) + 0.5) * pi / end
    ring, comp = np.sin(k * (1 - dzc)), np.sin(k)
    wall_base = (-0.5 * ring + 0.5 * (np.sin(k * end) - comp)) * 2 / (k * end)
    wall_comp = (comp - ring) * 2 / (k * end)
    fall = np.exp(-k * rho0) / ive(0, k * rho0)
    result = []
    for wall in (wall_base, wall_comp):
        moments = [(-1) ** (m // 2) * np.sum(wall * fall * k**m) for m in (2, 4, 6)]
        scale = [2 * D**m / factorial(m) for m in (2, 4, 6)]
        result.append(np.array(moments) * scale)
    return result


@pytest.mark.parametrize(
    ("name", "printed", "tolerance"),
    [
        ("C2", 0.5449, 0.0003),  # A11
        ("C4", -0.2119, 0.0012),  # A12
        ("C6", 0.1638, 0.0015),  # A13
        ("D2", 0.0, 0.001),  # A14
        ("D4", -0.556, 0.0015),  # A15
        ("D6", 0.430, 0.0015),  # A16
    ],
)
def test_published_coefficients(name, printed, tolerance):
    names = ("C2", "C4", "C6", "D2", "D4", "D6")
    found = dict(zip(names, np.concatenate(coefficients()), strict=True))
    assert found[name] == pytest.approx(printed, abs=tolerance)


def test_published_coefficients_tell_one_trap_from_another():
    # Compensation rings longer by a hundredth: four of the six printed values no longer hold.
    wrong = np.concatenate(coefficients(dzc=DZC * 1.01))
    printed = np.array([0.5449, -0.2119, 0.1638, 0.0, -0.556, 0.430])
    assert (np.abs(wrong - printed) > [0.0003, 0.0012, 0.0015, 0.001, 0.0015, 0.0015]).sum() >= 4


def test_coefficients_equal_the_exact_series():
    for found, exact in zip(coefficients(), series(), strict=True):
        np.testing.assert_allclose(found, exact, rtol=0, atol=1e-9)


@pytest.mark.parametrize("wrong", [{"rho0": RHO0 * 1.001}, {"dzc": DZC * 1.001}])
def test_the_series_sees_a_thousandth(wrong):
    found, exact = coefficients(**wrong)[0], series()[0]
    assert np.abs(found - exact).min() > 1e-5


def test_one_compensation_nulls_two_orders():
    # A17, A18: Vc/V0 = -C4/D4 = -0.3806, and C6 vanishes at the same voltage to 0.1 %.
    base, comp = coefficients()
    v4, v6 = -base[1] / comp[1], -base[2] / comp[2]
    assert v4 == pytest.approx(-0.3806, abs=0.001)
    assert v6 / v4 == pytest.approx(1.0, abs=0.001)
    other = coefficients(dzc=DZC * 1.01)
    assert (other[0][2] / other[1][2]) / (other[0][1] / other[1][1]) != pytest.approx(
        1.0, abs=0.001
    )
