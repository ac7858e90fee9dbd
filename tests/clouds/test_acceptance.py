"""Gyration and the share of a beam that fits through a bore."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from tanh_tubes import LIGHT_KG, MASS_KG

from wellseq.clouds.acceptance import gyration_radius_m, share_through_bore
from wellseq.clouds.swarm import even_points


def test_gyration_radii() -> None:
    # sqrt(2 m E)/(eB): 3.372 um for 1 eV electrons at 1 T, 144.5 um for antiprotons (derived).
    electron = gyration_radius_m(perpendicular_eV=1.0, field_T=1.0, mass_kg=LIGHT_KG)
    assert electron == pytest.approx(3.3721e-6, abs=1e-10)
    heavy = gyration_radius_m(perpendicular_eV=1.0, field_T=-1.0, mass_kg=MASS_KG, charge_e=-1)
    assert heavy == pytest.approx(144.5e-6, rel=1e-3)
    assert heavy != pytest.approx(146e-6, rel=1e-3)
    doubly = gyration_radius_m(perpendicular_eV=4.0, field_T=1.0, mass_kg=MASS_KG, charge_e=2)
    assert doubly == pytest.approx(heavy)


def test_a_beam_against_its_particles() -> None:
    # A Gaussian beam's radius squared is exponential; fields map r to r sqrt(B0/B) (derived).
    radius = 4e-3 * np.sqrt(-2.0 * np.log(even_points(20_000, 1)[0])) * np.sqrt(0.5 / 2.0)
    share = (radius + 1e-4 < 5e-3).mean()
    found = share_through_bore(
        beam_rms_m=4e-3,
        beam_field_T=0.5,
        bore_field_T=2.0,
        bore_radius_m=5e-3,
        gyration_radius_m=1e-4,
    )
    assert found == pytest.approx(share, abs=1e-3)
    assert found != pytest.approx((radius + 5e-4 < 5e-3).mean(), abs=1e-3)


@given(wide=st.floats(1e-4, 1e-1), more=st.floats(1.0, 3.0), gyration=st.floats(0.0, 0.02))
def test_a_wider_beam_fits_less(wide: float, more: float, gyration: float) -> None:
    def share(beam_rms_m: float) -> float:
        return share_through_bore(
            beam_rms_m=beam_rms_m,
            beam_field_T=1.0,
            bore_field_T=1.0,
            bore_radius_m=0.015,
            gyration_radius_m=gyration,
        )

    assert 0.0 <= share(wide * more) <= share(wide) <= 1.0
    if gyration >= 0.015:
        assert share(wide) == 0.0
