"""Bessel functions and the column's levels against the library and closed limits."""

from __future__ import annotations

from math import log

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import special

from wellseq.clouds.bessel import bessel, bessel_levels, zeros_of_j0


def test_functions_are_the_library_s() -> None:
    x = np.linspace(0.0, 620.0, 4001)
    assert np.abs(bessel(0, x) - special.j0(x)).max() < 1e-12
    assert np.abs(bessel(1, x) - special.j1(x)).max() < 1e-12
    assert np.abs(bessel(1, x) - special.j1(x + 1e-9)).max() > 1e-12


def test_zeros_are_the_library_s() -> None:
    # First zero 2.404826: Handbook of Mathematical Functions, Table 9.5 (1964), printed; J1 there
    # 0.5191475, from memory.
    zeros = zeros_of_j0()
    assert np.abs(zeros - special.jn_zeros(0, zeros.size)).max() < 1e-11
    assert zeros[0] == pytest.approx(2.404826, abs=1e-6)
    assert bessel(1, zeros[:1])[0] == pytest.approx(0.5191475, abs=1e-7)


def test_a_long_column_has_the_logarithm() -> None:
    middle, end = bessel_levels(length=40.0, radius=0.05)
    assert middle == pytest.approx(1 + 2 * log(20), abs=1e-12)
    assert end == pytest.approx(middle / 2, abs=1e-12)
    assert bessel_levels(length=4.0, radius=0.05)[0] < middle - 1e-3


@given(st.floats(0.1, 10.0), st.floats(0.01, 0.7))
def test_middle_is_above_the_end(length: float, radius: float) -> None:
    middle, end = bessel_levels(length, radius)
    assert 0 < end < middle < 1 + 2 * log(1 / radius)


def test_levels_against_direct_integration() -> None:
    # The potential on the axis of a charged ring column in a grounded tube, by the Fourier
    # transform of its line charge: 2W/(πL) ∫∫ … with a point ring's Green function (derived).
    length, radius = 0.9, 0.2

    def ring(k: float, r: float) -> float:
        i0, k0 = special.i0, special.k0
        return k0(k * r) - i0(k * r) * k0(k) / i0(k)

    r, weight = np.polynomial.legendre.leggauss(24)
    r, weight = (r + 1) / 2 * radius, weight * radius / 2
    k = (np.arange(30000) + 0.5) * 3e-3
    shape = sum(w * 2 * a / radius**2 * ring(k, a) for a, w in zip(r, weight, strict=True))
    # Line charge uniform from −L/2 to L/2: its transform is 2 sin(kL/2)/k.
    for place, level in zip((0.0, length / 2), bessel_levels(length, radius), strict=True):
        wave = 2 * np.sin(k * length / 2) / k * np.cos(k * place)
        direct = 2 / np.pi * (shape * wave).sum() * 3e-3
        assert level == pytest.approx(direct, rel=2e-4)
