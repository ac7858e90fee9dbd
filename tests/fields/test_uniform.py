"""Unit potentials of a uniform bore against exact and published values, and against laws.

In units of the bore radius.  Every check has a companion: the same check on a bore, an edge or a
voltage that is wrong by a thousandth must not pass.
"""

import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import minimize_scalar
from stacks import ZEROS, pitched, stand, unit_step

from wellseq.fields.uniform import (
    SLOWEST_MODE,
    STEP_SUPREMA,
    Axis,
    axis_of,
    gap_error,
    interpolation_error,
    stack_of,
    unit_potentials,
)

FAR = 24.0


def potentials(edges, points, radii=(0.0,), orders=(0,), radius=1.0):
    """(radii, orders, electrodes, points) of gapless or gapped spans at equally spaced points."""
    step = points[1] - points[0] if len(points) > 1 else 0.01
    axis = Axis(float(points[0]), float(step), len(points))
    return unit_potentials(stack_of(stand(edges, radius).electrodes), axis, radii, orders)


def step_derivative(order, z, radius=1.0, height=1.0):
    """A unit step at 0: an electrode so long that its other edge is not felt."""
    return height * float(
        potentials([(0.0, FAR)], [z, z + 0.01], (0.0,), (order,), radius)[0, 0, 0, 0]
    )


@pytest.mark.parametrize(
    ("order", "value"),
    [(1, 0.303749098766), (2, -0.583237924946), (4, 1.26372390203)],
)
def test_derivatives_of_the_step_to_twelve_digits(order, value):
    # Source: the Fourier integral of the step at z = 0.7 by mpmath, 30 digits (derived).
    assert step_derivative(order, 0.7) == pytest.approx(value, abs=6e-12)
    assert step_derivative(order, 0.7, radius=1.001) != pytest.approx(value, rel=1e-4)


@pytest.mark.parametrize(("z", "r", "gap"), [(0.05, 0.0, 0.0), (0.4, 0.0, 0.3), (-0.2, 0.5, 0.1)])
def test_against_the_fourier_integral_in_high_precision(z, r, gap):
    mpmath.mp.dps = 20

    def integrand(k):
        return (
            mpmath.sin(k * z) / k * mpmath.sinc(k * gap / 2)
            * mpmath.besseli(0, k * r) / mpmath.besseli(0, k)
        )  # fmt: skip

    top = 40 / (1 - r)
    exact = 0.5 + float(mpmath.quad(integrand, mpmath.linspace(0, top, 12)) / mpmath.pi)
    real_gap = gap / 1.1027
    edges = [(-FAR, -real_gap / 2), (real_gap / 2, FAR)]
    found = potentials(edges, [z, z + 0.01], (r,))[0, 0, 1, 0]
    assert found == pytest.approx(exact, abs=1e-13)
    moved = potentials(edges, [z + 0.001, z + 0.011], (r,))[0, 0, 1, 0]
    assert moved != pytest.approx(exact, abs=1e-5)


def test_slope_at_a_gapless_edge():
    # A01. w = (2/pi) Int dx/I0(x) = 1.32623, dphi/dz = (V2 - V1) w/(2R): exact (derived); printed
    # fit 1.318: Electrostatic electron-optics, Bell Syst. Tech. J. 18, 1 (1939).
    assert 2 * step_derivative(1, 0.0) == pytest.approx(1.32623, abs=1e-5)
    assert 2 * step_derivative(1, 0.0, radius=1.001) != pytest.approx(1.32623, abs=1e-5)


def lens_error(w, height=1.0):
    """Greatest |step - (1 + tanh(w z))/2| on the axis for z in 0 … 4."""
    z = np.linspace(0.0, 4.0, 801)
    step = height * potentials([(0.0, FAR)], z)[0, 0, 0]
    return float(np.abs(step - (1 + np.tanh(w * z)) / 2).max())


def test_hyperbolic_tangent_of_the_two_tube_lens():
    # A02, A03. tanh(1.318 z/R) is good to 0.0035 of V2 - V1; the best constant is 1.3047
    # (derived); the fit: J. Appl. Phys. 13, 496 (1942).
    assert lens_error(1.318) == pytest.approx(0.00348675, abs=1e-6)
    assert lens_error(1.318) <= 0.0036
    assert lens_error(1.318, height=0.999) > 0.0036
    best = minimize_scalar(lens_error, bounds=(1.25, 1.35), method="bounded")
    assert best.x == pytest.approx(1.3047, abs=1e-3)
    assert best.fun < lens_error(1.318)


def decay_amplitude(z, height=1.0):
    """(1 - phi) exp(j01 z) for a lens from -1 to 1."""
    return (1.0 - height * (2 * step_derivative(0, z) - 1.0)) * np.exp(SLOWEST_MODE * z)


def test_decay_far_from_an_edge():
    # A04, A05, A06. phi -> 1 - A exp(-j01 z/R), A = 2/(j01 J1(j01)) = 1.602; j01 = 2.404826,
    # J1(j01) = 0.5191475: Handbook of Mathematical Functions, Table 9.5 (1964).
    assert pytest.approx(2.404826, abs=1e-6) == SLOWEST_MODE
    assert decay_amplitude(4.0) == pytest.approx(2 / (2.404826 * 0.5191475), abs=5e-5)
    assert decay_amplitude(4.0) == pytest.approx(1.602, abs=5e-4)
    assert decay_amplitude(4.0, height=1.001) != pytest.approx(1.602, abs=5e-4)


def centre_of_ring(length):
    return float(potentials([(-length / 2, length / 2)], [0.0, 0.01])[0, 0, 0, 0])


def test_ring_as_long_as_its_radius():
    # A08. (2/pi) Int sin(k/2)/(k I0(k)) dk = 0.5764965 (derived, exact).
    assert centre_of_ring(1.0) == pytest.approx(0.5764965, abs=1e-6)
    assert centre_of_ring(1.001) != pytest.approx(0.5764965, abs=1e-4)


def centre_of_can(length, images=14):
    """Side wall at 1 V, ends grounded: by reflection the wall changes sign from can to can."""
    edges = [((k - 0.5) * length, (k + 0.5) * length) for k in range(-images, images + 1)]
    signs = (-1.0) ** np.arange(-images, images + 1)
    return float(signs @ potentials(edges, [0.0, 0.01])[0, 0, :, 0])


def test_closed_can_by_reflection():
    # A26. Can of length 2a: one end at 1 V gives 0.139337 at the centre, the side 0.721326; twice
    # the first and the second are 1: Classical Electrodynamics, 3rd ed., sec. 3.8 (method).
    assert centre_of_can(2.0) == pytest.approx(1.0 - 2 * 0.139337, abs=2e-6)
    assert centre_of_can(2.002) != pytest.approx(1.0 - 2 * 0.139337, abs=1e-4)


@pytest.mark.parametrize("r", [0.0, 0.3, 0.9])
def test_fourier_form_equals_residues(r):
    # The two exact forms of the step share nothing but Laplace's equation.
    z = np.linspace(-3.0, 3.0, 61)
    z = z[np.abs(z) > 0.65]
    found = np.array([potentials([(0.0, FAR)], [p, p + 0.01], (r,))[0, 0, 0, 0] for p in z])
    np.testing.assert_allclose(found, unit_step(z, r), rtol=0, atol=1e-12)
    assert np.abs(found - unit_step(z * 1.001, r)).max() > 1e-5


def test_residues_cannot_be_used_close_to_an_edge():
    # Why the Fourier form is the one in use: the series is wrong by percents there.
    assert abs(unit_step(0.001) - step_derivative(0, 0.001)) > 0.01
    assert ZEROS.size == 60


def test_near_the_axis_the_expansion_in_r_holds():
    # phi(r) = phi - r^2/4 phi'' + r^4/64 phi'''' - r^6/2304 phi''''''
    z = [0.3, 0.31]
    on_axis = potentials([(0.0, 1.0)], z, (0.0,), (0, 2, 4, 6))[0, :, 0, 0]
    r = 0.05
    series = on_axis @ np.array([1.0, -(r**2) / 4, r**4 / 64, -(r**6) / 2304])
    off_axis = potentials([(0.0, 1.0)], z, (r,))[0, 0, 0, 0]
    assert off_axis == pytest.approx(series, abs=1e-11)
    assert potentials([(0.0, 1.0)], z, (r * 1.01,))[0, 0, 0, 0] != pytest.approx(series, abs=1e-6)


def test_the_wall_is_approached():
    z = np.linspace(-0.5, 1.5, 5)
    near = potentials([(0.0, 1.0)], z, (0.9,))[0, 0, 0]
    assert near[2] > 0.92
    assert near[1] == pytest.approx(0.5, abs=0.01)
    assert near[0] < 0.06


@settings(max_examples=25, deadline=None, derandomize=True)
@given(
    st.lists(st.floats(0.2, 3.0), min_size=2, max_size=6),
    st.lists(st.floats(0.0, 0.3), min_size=6, max_size=6),
    st.floats(0.01, 40.0),
    st.sampled_from([0.0, 0.5, 0.9]),
    st.lists(st.floats(-100, 100), min_size=6, max_size=6),
)
def test_laws_of_any_stack(lengths, gaps, radius, r, levels):
    edges, z = [], 0.0
    for length, gap in zip(lengths, gaps, strict=False):
        edges.append((z * radius, (z + length) * radius))
        z += length + gap
    points = np.linspace(-3.0, z + 3.0, 60) * radius
    found = potentials(edges, points, (r * radius,), radius=radius)[0, 0]
    # What leaks into the gaps is not on the wall any more: of the order of g² / 2π.
    leak = 1e-12 + 0.5 * max(gaps) ** 2
    # Maximum principle: between 0 and 1, and the grounded tube takes the rest.
    assert (found > -leak).all()
    assert (found.sum(axis=0) < 1 + leak).all()
    # The whole as one electrode: gaps within are filled up, so the sum is a single long step pair.
    whole = potentials([(0.0, z * radius - gaps[len(lengths) - 1] * radius)], points, (r * radius,),
                       radius=radius)[0, 0, 0]  # fmt: skip
    np.testing.assert_allclose(found.sum(axis=0), whole, rtol=0, atol=leak)
    # Scaling: lengths in any unit.
    unit = potentials([(p / radius, q / radius) for p, q in edges], points / radius, (r,))[0, 0]
    np.testing.assert_allclose(found, unit, rtol=0, atol=1e-11)
    # Mirror symmetry.
    mirrored = [(-q, -p) for p, q in reversed(edges)]
    back = potentials(mirrored, -points[::-1], (r * radius,), radius=radius)[0, 0]
    np.testing.assert_allclose(found, back[::-1, ::-1], rtol=0, atol=1e-11)
    # No extremum inside: the potential of any voltages stays between those on the wall.
    volts = np.array(levels[: len(lengths)])
    mixed = volts @ found
    spare = 1e-11 + 2 * leak * float(np.abs(volts).sum())
    assert mixed.min() >= min(0.0, volts.min()) - spare
    assert mixed.max() <= max(0.0, volts.max()) + spare


def test_suprema_of_the_step_behind_the_error_bound():
    z = np.linspace(0.0, 3.0, 1201)
    for order, bound in zip((6, 7, 8), STEP_SUPREMA, strict=True):
        found = np.abs(potentials([(0.0, FAR)], z, (0.0,), (order,))[0, 0, 0]).max()
        assert bound * 0.999 < found <= bound


def test_interpolation_error_is_a_bound_and_small():
    stack = stack_of(pitched(6).electrodes)
    axis = axis_of(stack)
    assert interpolation_error(stack, axis) < 1e-10
    assert interpolation_error(stack, axis, 2) > interpolation_error(stack, axis, 1)
    coarse = Axis(axis.start_m, 2 * axis.step_m, axis.count // 2)
    assert interpolation_error(stack, coarse) > 30 * interpolation_error(stack, axis)


def test_grid_reaches_eight_radii_beyond_the_stack():
    stack = stack_of(pitched(6).electrodes)
    axis = axis_of(stack)
    assert axis.z_m[0] == pytest.approx(stack.centre_m[0] - 8 * stack.radius_m)
    assert axis.z_m[-1] == pytest.approx(stack.centre_m[-1] + 8 * stack.radius_m)
    assert axis.step_m <= stack.radius_m / 22


def test_the_gap_error_grows_with_the_gap_and_is_nothing_without_one():
    def of(gap, length=1.0):
        edges = [(0.0, length), (length + gap, 2 * length + gap)]
        return float(gap_error(stack_of(stand(edges).electrodes)).sum(axis=1)[0])

    assert of(0.0) == 0.0
    assert of(0.2) > of(0.1) > of(0.05) > 0.0


@pytest.mark.parametrize(
    ("edges", "said"),
    [
        ([], "at least one"),
        ([(0.0, 0.0)], "longer than nothing"),
        ([(0.0, 1.0), (0.9, 2.0)], "overlap"),
        ([(0.0, np.nan)], "finite"),
        ([(0.0, np.inf)], "finite"),
    ],
)
def test_stacks_that_are_none(edges, said):
    with pytest.raises(ValueError, match=said):
        stack_of(stand(edges).electrodes)


def test_unequal_radii_and_a_hair_thin_bore_are_refused():
    parts = stand([(0.0, 1.0)]).electrodes + stand([(1.0, 2.0)], 0.9).electrodes
    with pytest.raises(ValueError, match="uniform bore"):
        stack_of(parts)
    with pytest.raises(ValueError, match="too long for its bore"):
        axis_of(stack_of(stand([(0.0, 1.0)], 1e-6).electrodes))


def test_radius_beyond_nine_tenths_is_refused():
    with pytest.raises(ValueError, match="beyond"):
        potentials([(0.0, 1.0)], [0.0, 0.1], (0.95,))
    assert np.isfinite(potentials([(0.0, 1.0)], [0.0, 0.1], (0.9,))).all()
