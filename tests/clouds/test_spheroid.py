"""Cold spheroids against published factors, a direct integral, and the limits of their modes."""

from __future__ import annotations

from math import inf, sqrt

import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad

from wellseq.clouds.spheroid import aspect_of, axial_mode, depolarisation


def integral(aspect: float) -> float:
    """N_z = (α/2) ∫ ds/((s + α²)^(3/2) (s + 1)): the field inside a uniform ellipsoid."""
    # With s = (α u)² the integrand is smooth at every aspect ratio.
    value, _ = quad(lambda u: u / ((u * u + 1) ** 1.5 * ((aspect * u) ** 2 + 1)), 0, inf)
    return value


# C12 to C14: Phys. Rev. 67, 351 (1945); Phys. Rev. A 48, 525 (1993); values from memory.
@pytest.mark.parametrize(("aspect", "printed"), [(1.0, 1 / 3), (2.0, 0.1736), (0.5, 0.5272)])
def test_published_depolarisation(aspect: float, printed: float) -> None:
    assert depolarisation(aspect) == pytest.approx(printed, abs=6e-5)
    assert depolarisation(1.002 * aspect) != pytest.approx(printed, abs=6e-5)


@given(st.floats(-1, 2))
def test_depolarisation_is_the_integral(log_aspect: float) -> None:
    aspect = 10**log_aspect
    assert depolarisation(aspect) == pytest.approx(integral(aspect), abs=2e-9)


def test_the_forms_meet_near_the_sphere() -> None:
    for near in (0.999, 1.001):
        inside, outside = near + (1 - near) * 1e-6, near - (1 - near) * 1e-6
        assert depolarisation(inside) == pytest.approx(depolarisation(outside), abs=1e-8)


@given(st.floats(1e-3, 0.999))
def test_aspect_is_the_inverse(ratio: float) -> None:
    assert depolarisation(aspect_of(ratio)) == pytest.approx(ratio, rel=1e-9)


def test_no_spheroid_out_of_range() -> None:
    for ratio in (0.0, 1.0, -0.1):
        with pytest.raises(ValueError, match="between 0 and 1"):
            aspect_of(ratio)
    with pytest.raises(ValueError, match="positive"):
        depolarisation(0.0)
    with pytest.raises(ValueError, match="prolate"):
        axial_mode(2, 0.9)


def test_centre_of_mass_moves_as_one_particle() -> None:
    # C16: Phys. Rev. Lett. 66, 2076 (1991), value from memory (exact identity).
    for aspect in (1.5, 2.0, 7.0, 40.0):
        assert axial_mode(1, aspect) / depolarisation(aspect) == pytest.approx(1.0, abs=1e-8)
    assert axial_mode(1, 2.01) / depolarisation(2.0) != pytest.approx(1.0, abs=1e-8)


def test_breathing_mode_of_a_sphere() -> None:
    # C17: Phys. Rev. Lett. 66, 2076 (1991); the limit 3/5 is derived.
    assert axial_mode(2, 1.0001) == pytest.approx(0.6, abs=2e-4)
    assert axial_mode(2, 1.01) != pytest.approx(0.6, abs=2e-4)


def test_breathing_mode_of_a_long_plasma() -> None:
    # C18: Phys. Rev. Lett. 66, 2076 (1991), derived; tends to sqrt(3).
    assert sqrt(axial_mode(2, 5.0) / axial_mode(1, 5.0)) == pytest.approx(1.5423, abs=1e-3)
    ratios = [sqrt(axial_mode(2, a) / axial_mode(1, a)) for a in (2.0, 5.0, 20.0, 200.0)]
    assert ratios == sorted(ratios)
    assert 1.6 < ratios[-1] < sqrt(3)
