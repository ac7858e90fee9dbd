"""The fast column: against the plain one of the same model, and its monotone corners."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.clouds.axis import axis_well
from wellseq.clouds.cheap import log_column
from wellseq.clouds.columns import Filling, column, trough
from wellseq.clouds.figures import Figure, around, exactly
from wellseq.fields.field import Field
from wellseq.pipeline import load_trap

TRAP = load_trap(Path(__file__).parents[1] / "pages" / "page.trap.toml")
FIELD = Field(TRAP)
VECTOR = FIELD.vector({"C5": -80.0, "C7": -80.0, "R6": -20.0})
WELL = trough(FIELD, -1, VECTOR, 0.012)
assert WELL is not None


def filling(number: float, radius_m: float = 1e-3, kelvin: float = 300.0) -> Filling:
    return Filling(exactly(number), exactly(radius_m), exactly(kelvin))


@pytest.mark.parametrize("number", [1e4, 1e6, 1e7, 2e7])
def test_it_is_the_plain_log_column(number: float) -> None:
    z_m = np.linspace(-0.1, 0.12, 6001)
    span = WELL.left_barrier_m, WELL.right_barrier_m
    plain = log_column(
        well=axis_well(z_m, FIELD.at(VECTOR, z_m), -1, span),
        charge_e=-1,
        number=number,
        temperature_K=300.0,
        radius_m=1e-3,
        wall_radius_m=FIELD.radius_m,
    )
    fast = column(WELL, filling(number), FIELD.radius_m)
    assert abs(fast.space_charge_V.value - plain.space_charge_eV) < 2e-3 * WELL.depth_V
    assert fast.length_m.value == pytest.approx(plain.length_m, rel=0.02)
    other = column(WELL, filling(1.1 * number), FIELD.radius_m)
    assert other.space_charge_V.value > 1.02 * fast.space_charge_V.value


@settings(max_examples=40, deadline=None)
@given(st.floats(1e3, 1.5e7), st.floats(3e-4, 3e-3), st.floats(5.0, 2000.0))
def test_the_interval_holds_every_answer_inside_the_box(
    number: float, radius_m: float, kelvin: float
) -> None:
    wide = Filling(
        around(number, 0.2 * number), around(radius_m, 0.2 * radius_m), around(kelvin, 0.2 * kelvin)
    )
    whole = column(WELL, wide, FIELD.radius_m)
    for share in (0.85, 1.0, 1.15):
        one = column(WELL, filling(share * number, radius_m / share, kelvin), FIELD.radius_m)
        if whole.outside or one.outside:
            continue
        phi = one.space_charge_V
        assert whole.space_charge_V.low <= phi.value * 1.001
        assert phi.value <= whole.space_charge_V.high * 1.001


@pytest.mark.parametrize(
    ("cloud", "quantity"),
    [
        (filling(0.0), "number of particles"),
        (filling(1e14), "level filled"),
        (filling(1e6, 0.014), "cloud radius"),
        (filling(1e6, 1e-3, 0.0), "temperature"),
        (filling(1e6, 1e-3, 1e7), "thermal energy"),
        (Filling(Figure(1e6, 0.0, 2e6), exactly(1e-3), exactly(300.0)), "number of particles"),
    ],
)
def test_what_is_no_cloud_or_does_not_fit_has_no_figure(cloud: Filling, quantity: str) -> None:
    found = column(WELL, cloud, FIELD.radius_m)
    assert quantity in {reason.quantity for reason in found.outside}
    assert not found.space_charge_V.known
