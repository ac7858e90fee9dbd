"""The second reader's field: published values, two sums that agree, and the compiler's table."""

from __future__ import annotations

import math

import pytest

from wellseq.fields.field import Field
from wellseq.model.trap_file import trap_from
from wellseq.reread import steps
from wellseq.reread.steps import Rise, Steps, Tube, bessel_i0, bessel_j

# Zeros of J0 and values of J1 there: M. Abramowitz and I. A. Stegun, Handbook of Mathematical
# Functions (National Bureau of Standards, 1964), table 9.5.
ZEROS = {
    1: (2.4048255577, 0.5191474973),
    2: (5.5200781103, -0.3402648065),
    3: (8.6537279129, 0.2714522999),
    10: (30.6346064684, -0.1441659777),
    20: (62.0484691902, -0.1012934989),
}


@pytest.mark.parametrize("n", ZEROS)
def test_zeros_and_values_are_the_tabulated_ones(n: int) -> None:
    place, slope = ZEROS[n]
    found = steps.zeros_of_j0(steps.MODES)[n - 1]
    assert abs(found - place) < 1e-10
    assert abs(bessel_j(1, found) - slope) < 1e-10


def test_i0_is_the_tabulated_one() -> None:
    # The same handbook, table 9.8: e^-x I0(x).
    for x, value in ((1.0, 0.46575960759), (5.0, 0.18354081260), (20.0, 0.08978031187)):
        assert abs(bessel_i0(x) * math.exp(-x) - value) < 1e-9


def step(z: float, width: float = 0.0) -> float:
    """The unit step of a tube of radius 1."""
    return Steps().level(z, width)


def test_the_step_is_half_in_its_middle_and_odd_about_it() -> None:
    assert step(0.0) == 0.5
    for z in (0.05, 0.39, 0.41, 1.0, 5.0):
        assert abs(step(z) + step(-z) - 1.0) < 1e-15


@pytest.mark.parametrize("width", [0.0, 0.05, 0.2, 1.5])
def test_modes_and_waves_agree_where_both_converge(
    width: float, monkeypatch: pytest.MonkeyPatch
) -> None:
    places = [width / 2 + far for far in (0.4, 0.6, 0.8, 1.0, 1.5)]
    monkeypatch.setattr(steps, "NEAR", 0.0)
    modes = [step(z, width) for z in places]
    monkeypatch.setattr(steps, "NEAR", math.inf)
    waves = [step(z, width) for z in places]
    # The residue sum alone is only as good as its last mode this close to an edge.
    assert max(abs(a - b) for a, b in zip(modes, waves, strict=True)) < 2e-10


def test_modes_alone_would_be_wrong_beside_an_edge(monkeypatch: pytest.MonkeyPatch) -> None:
    # Companion: why there are two sums.
    right = step(0.01)
    monkeypatch.setattr(steps, "NEAR", 0.0)
    assert abs(step(0.01) - right) > 1e-3


def test_a_slope_of_the_step_is_the_known_one() -> None:
    # S'(0) = (1/pi) int dk / I0(k) = 0.66312 and S'(0.7) = 0.303749098766, by quadrature to 30
    # digits; derived, Jackson, Classical Electrodynamics, 3rd ed. (1999), sec. 3.8.
    for z, slope in ((0.0, 0.66312), (0.7, 0.303749098766)):
        h = 1e-4
        found = (step(z + h) - step(z - h)) / (2 * h)
        assert abs(found - slope) < (1e-5 if z == 0.0 else 2e-9)


TRAP = (
    """\
wellseq-trap = 1
name = "uneven"
[field]
uniform = "1 T"
[bore]
temperature = "6 K"
patch = "0 mV"
"""
    + "\n".join(
        f'[[electrode]]\nname = "E{n}"\nfrom = "{start} mm"\nto = "{stop} mm"\n'
        f'radius = "11 mm"\noutput = "o"'
        for n, (start, stop) in enumerate(
            [(-50, -36.5), (-36, -20), (-18.2, -10), (-9.9, 3), (5, 30), (30, 61)]
        )
    )
    + """
[[output]]
name = "o"
range = ["-10 V", "10 V"]
slew = "1 V/us"
bits = 16
clock = "1 us"
[margins]
depth = "1 V"
"""
)


def test_it_agrees_with_the_compiler_s_table_everywhere() -> None:
    trap, mistakes = trap_from(TRAP, "uneven.trap.toml")
    assert trap is not None, mistakes
    field = Field(trap)
    tube = Tube([(one.from_m, one.to_m) for one in trap.electrodes], 0.011)
    worst = 0.0
    for at in range(0, len(field.z_m), 7):
        ours = tube.potentials(float(field.z_m[at]))
        worst = max(worst, *(abs(a - b) for a, b in zip(ours, field.phi[0, :, at], strict=True)))
    assert worst < 1e-7
    # The comparison can fail: a gap taken as wide as it is cut differs by far more, and so does one
    # that the field does not leak into.
    right = tube.potentials(0.004)
    narrow = Tube([(one.from_m, one.to_m) for one in trap.electrodes], 0.011)
    narrow.rises = [Rise(one.place, one.gap, one.gap) for one in tube.rises]
    tight = Tube([(one.from_m, one.to_m) for one in trap.electrodes], 0.011)
    tight.leaks = [[] for _ in tube.leaks]
    for other in (narrow, tight):
        changed = other.potentials(0.004)
        assert max(abs(a - b) for a, b in zip(changed, right, strict=True)) > 1e-6


def test_all_electrodes_at_one_volt_are_one_volt_inside() -> None:
    tube = Tube([(0.0, 0.2), (0.21, 0.5), (0.5, 0.9)], 0.01)
    assert abs(sum(tube.potentials(0.45)) - 1.0) < 1e-10
    assert sum(tube.potentials(-0.2)) < 1e-10
