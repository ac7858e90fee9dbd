"""The map of what is caught, and the exact integral over arrival times."""

from __future__ import annotations

import numpy as np
import pytest
from tanh_tubes import MASS_KG, ramp, tubes

from wellseq.clouds.approach import Tracks, approach
from wellseq.clouds.capture import CaptureMap, capture_map, held_V
from wellseq.clouds.figures import Outside
from wellseq.clouds.swarm import Spreading

TABLE = tubes([(-0.025, 0.025), (0.475, 0.525)], (-0.25, 0.75))
WAVES = ramp(1e-6, 1.15e-6, [0.0, -5000.0], [-5000.0, -5000.0])


def box(first: int, last: int) -> CaptureMap:
    """One energy, caught from sample `first` up to `last` of eleven, one second apart."""
    since = np.arange(11.0)[:, None]
    caught = np.zeros((11, 1))
    caught[first : last + 1] = 1.0
    tracks = Tracks(np.ones(1), np.ones(1), since, since, np.ones((11, 1)))
    return CaptureMap(tracks, 20.0, caught, 1.0 - caught, 3.0 * caught, 1.0, 0.0, 0)


def test_the_share_is_the_integral_over_arrivals() -> None:
    # Caught for 2.5 < tau < 6.5, half a step beyond the samples; arrivals even over 14 +- 3.
    found = box(3, 6)
    arrival = Spreading(14.0, 3.0)
    begin = np.array([20.0, 17.0, 30.0])
    exact = [2.5 / 6.0 + 1.0 / 6.0, 3.5 / 6.0, 0.0]
    exact[1] = (min(17.0, 14.5) - max(11.0, 10.5)) / 6.0
    assert found.share(arrival, begin) == pytest.approx(exact)
    assert found.share(arrival, begin) != pytest.approx([one + 0.01 for one in exact])


def test_weights_and_energies_of_what_is_kept() -> None:
    found, arrival = box(3, 6), Spreading(15.0, 9.0)
    weight = found.weights(arrival)
    assert weight.sum() == pytest.approx(float(found.share(arrival, np.array([20.0]))[0]))
    gain, mean, highest = found.energies(arrival)
    assert (gain, mean, highest) == pytest.approx((2.0, 3.0, 3.0))
    assert np.isnan(found.energies(Spreading(500.0, 1.0))).all()


def test_late_is_what_was_going_out_and_what_is_out() -> None:
    # tau = 20 - arrival: beyond 10 all are out; between samples the map is half and half.
    found = box(0, 6)
    assert found.late(Spreading(5.0, 4.0)) == pytest.approx(1.0)
    share = float(found.share(Spreading(14.0, 3.0), np.array([20.0]))[0])
    assert found.late(Spreading(14.0, 3.0)) == pytest.approx(1.0 - share)
    assert found.late(Spreading(19.0, 0.5)) == pytest.approx(0.0)


def test_gates_hold_up_to_the_lower_top() -> None:
    shut = TABLE.potential([-5000.0, -3000.0], -1)
    assert held_V((shut,), 0.0, 0.5) == pytest.approx(3000.0 * 0.9499, rel=1e-4)
    both = (shut, TABLE.potential([-1000.0, -3000.0], -1))
    assert held_V(both, 0.0, 0.5) == pytest.approx(1000.0 * 0.9499, rel=1e-3)


def mapped(mass_kg: float) -> CaptureMap | tuple[Outside, ...]:
    found = approach(
        table=TABLE,
        volts=WAVES.volts[0],
        mass_kg=MASS_KG,
        charge_e=-1,
        energy_eV=np.array([500.0, 2000.0]),
        near_m=0.0,
        far_m=0.5,
        early_s=150e-9,
    )
    return capture_map(
        table=TABLE,
        waves=WAVES,
        mass_kg=mass_kg,
        charge_e=-1,
        tracks=found,
        each=0.5,
        energetic=0.0,
        near_m=0.0,
        far_m=0.5,
    )


def test_a_track_is_caught_from_when_it_is_in_until_it_comes_back() -> None:
    found = mapped(MASS_KG)
    assert isinstance(found, CaptureMap)
    for column, speed in ((0, 309.5e3), (1, 619.0e3)):
        since = found.tracks.since_s[:, column][found.caught[:, column] > 0.0]
        # In before 2000 V (at 60 ns) have risen, and not yet back by then: 2 x 0.46 m or so.
        assert -150e-9 < since.min() < 60e-9
        assert since.max() == pytest.approx(0.92 / speed, rel=0.05)
        assert len(set(np.diff(np.flatnonzero(found.caught[:, column])))) == 1
    assert found.kept_eV[found.caught > 0.0].min() == pytest.approx(500.0, abs=0.5)


def test_reasons_come_back_when_it_cannot_be_flown() -> None:
    # A thousandth of the mass makes the same volts too much for Newton.
    found = mapped(MASS_KG * 1e-3)
    assert isinstance(found, tuple)
    assert found[0].quantity == "kinetic over rest energy"
