"""No electrode voltage within its declared errors ever makes a well shallower than certified.

The shipped rows are played back here by code of its own: decoded, held or joined by lines, sent
through the low-pass, shifted by gains, offsets and noise within their bounds; the own depth is then
sampled with the field's wells.
"""

import random
from bisect import bisect_right

import numpy as np
import pytest
from tracing import FIELDS, follow, held

BEGIN = "begin with cold in cup at E5\nhold for 1 ms\n"


def played(timeline, shipped, times, rng):
    """Electrode volts (times, electrodes) of the last block, errors drawn within their bounds."""
    block = shipped.blocks[-1]
    ticks = block.ticks * float(block.tick_s)
    fine = np.linspace(0, times[-1], 200_001)
    columns = []
    for electrode in timeline.trap.electrodes:
        output = timeline.trap.output_of(electrode.name)
        if electrode.name[0] == "G":
            columns.append(np.zeros(len(times)))
            continue
        codes = block.codes[:, shipped.converters.index(output.name)]
        nominal = output.low_V + codes * output.code_V
        gain = output.gain + rng.choice([-1, 1]) * output.gain_spread
        offset = output.offset_V + rng.choice([-1, 1]) * output.offset_spread_V
        volts = gain * nominal + offset
        if output.between_rows == "hold":
            signal = volts[np.searchsorted(ticks, fine, side="right") - 1]
        else:
            signal = np.interp(fine, ticks, volts)
        signal = low_pass(signal, fine[1] - fine[0], float(output.time_constant_s))
        noise = rng.choice([-6, 6]) * output.noise_V
        columns.append(np.interp(times, fine, signal) + noise + rng.choice([-1, 1]) * 1e-3)
    return np.stack(columns, axis=1)


def low_pass(signal, step_s, tau_s):
    """Single pole, exact between equal samples."""
    from scipy.signal import lfilter

    share = 1 - np.exp(-step_s / tau_s)
    start = [(1 - share) * signal[0]]
    return lfilter([share], [1, -(1 - share)], signal, zi=start)[0]


RAMPS = [
    "ramp {{ E3 = {a} V; E7 = {b} V }} over {t} us",
    "ramp {{ E3 = {a} V; E7 = {b} V }} over {t} us smoothly",
    "ramp {{ E3..E7 = {a} V; E3, E7 = {b} V }} over {t} us",
    "alongside {{ lane {{ ramp {{ E3 = {a} V }} over {t} us smoothly }}"
    " lane {{ hold for 200 us; ramp {{ E7 = {b} V }} over {t} us }} }}",
]


@pytest.mark.parametrize("seed", range(24))
def test_the_certificate_is_below_everything_that_can_be_played(seed):
    rng = random.Random(seed)
    shape = RAMPS[seed % 4] if seed % 4 != 2 else "ramp {{ E4 = {c} V; E7 = {b} V }} over {t} us"
    ramp = shape.format(
        a=rng.uniform(-90, -25),
        b=rng.uniform(-90, -25),
        c=rng.uniform(-5, 20),
        t=rng.randint(2000, 9000),
    )
    timeline, shipped, wells = follow(BEGIN + ramp + "\nhold for 1 ms\n")
    assert not wells.unproved
    stretches = held(wells, "cold")
    end = float(timeline.blocks[0].duration_s)
    times = np.linspace(0, end, 400)
    starts = [float(one.start_s) for one in stretches]
    for _ in range(3):
        volts = played(timeline, shipped, times, rng)
        for time, row in zip(times, volts, strict=True):
            stretch = stretches[bisect_right(starts, time) - 1]
            truth = sampled(row, stretch)
            assert stretch.left.certified_V <= truth[0] + 1e-6
            assert stretch.right.certified_V <= truth[1] + 1e-6


def sampled(row, stretch):
    """Own depths (left, right) of the well in the stretch's region at sampled voltages."""
    field = FIELDS[0]
    named = dict(zip(field.electrodes, map(float, row), strict=True))
    low, high = stretch.well_m
    found = [w for w in field.wells(named, -1) if low - 1e-6 <= w.z_m <= high + 1e-6]
    assert found, "the proved region holds no minimum"
    well = min(found, key=lambda w: w.depth_V)
    return well.depth_left_V, well.depth_right_V


def test_the_comparison_sees_a_certificate_that_forgets_its_losses():
    """Certified plus losses is the wished depth: errors of the hardware do get below it."""
    timeline, shipped, wells = follow(
        BEGIN + "ramp { E3, E7 = -40 V } over 3000 us\nhold for 1 ms\n"
    )
    stretches = held(wells, "cold")
    starts = [float(one.start_s) for one in stretches]
    times = np.linspace(0, float(timeline.blocks[0].duration_s), 400)
    below = 0
    for seed in range(4):
        volts = played(timeline, shipped, times, random.Random(seed))
        for time, row in zip(times, volts, strict=True):
            stretch = stretches[bisect_right(starts, time) - 1]
            left = stretch.left.certified_V + stretch.left.losses.total_V
            below += sampled(row, stretch)[0] < left - 1e-6
    assert below > 0


def test_the_losses_are_not_idle():
    """At rest the certificate is within a few hundredths of a volt of the wished depth."""
    _, _, wells = follow(BEGIN + "hold for 1 s")
    stretch = held(wells, "cold")[-1]
    assert stretch.left.best_V - stretch.left.certified_V < 0.05
