"""Segments: the wish lies within base + Σ p moves ± shape at every instant; lag is bounded."""

from fractions import Fraction as F
from itertools import pairwise, product

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from playing import table

from wellseq.timeline.motion import Carry, segments
from wellseq.timeline.timeline import progress


def cut(body, carry=None):
    timeline, shipped = table(body)
    return timeline, list(segments(timeline.trap, shipped.blocks[-1], carry))


def wish_of(timeline, output, time):
    """Wished volts of a converter at an instant of the last block, read off its pieces."""
    volts = timeline.blocks[-1].volts[output]
    for piece in timeline.blocks[-1].pieces:
        if piece.output == output and piece.start_s <= time:
            volts = piece.at(min(time, piece.end_s))
    return volts


def columns(timeline):
    return {e.name: i for i, e in enumerate(timeline.trap.electrodes)}


def test_segments_cover_the_block_without_a_hole():
    body = "hold for 1 s\nramp { E1 = 3 V } over 2 s\nhold for 1 s\nthrow G1 to -3 kV\nhold for 1 s"
    timeline, found = cut(body)
    assert found[0].start_s == 0
    assert found[-1].end_s == timeline.blocks[0].duration_s
    assert all(one.end_s == two.start_s for one, two in pairwise(found))


def test_straight_ramps_that_overlap_share_time_as_progress():
    _, found = cut(
        "alongside { lane { ramp { E1 = 4 V } over 4 s }"
        " lane { hold for 1 s; ramp { E2 = 2 V } over 1 s } }"
    )
    assert {0, 1, 2, 4} <= {s.start_s for s in found} | {found[-1].end_s}
    assert all(len(s.moves) == 1 and not s.shape_V.any() for s in found)


def test_a_smooth_ramp_alone_is_exact_and_beside_a_straight_one_a_chord():
    _, (alone,) = cut("ramp { E1 = 4 V } over 4 s smoothly")
    assert not alone.shape_V.any()
    _, found = cut(
        "alongside { lane { ramp { E1 = 4 V } over 4 s smoothly }"
        " lane { ramp { E2 = 2 V } over 4 s } }"
    )
    assert found[0].shape_V.max() == pytest.approx(4 / 2 * np.pi**2 / 8)
    halves = found[0].cut()
    assert halves is not None
    assert halves[0].shape_V.max() == pytest.approx(found[0].shape_V.max() / 4)


def test_switches_thrown_together_are_independent():
    timeline, found = cut("throw G1, G2 to -3 kV\nhold for 1 s")
    swinging = [segment for segment in found if len(segment.moves) == 2]
    assert len(swinging) == 1
    at = columns(timeline)
    assert swinging[0].end()[at["G1"]] == -3000
    assert swinging[0].end()[at["G2"]] == -3000
    # delay 30 ns, whole edge 100 ns
    assert (swinging[0].start_s, swinging[0].end_s) == (F(30, 10**9), F(130, 10**9))


def test_an_edge_that_was_rounded_widens_its_window_by_that_much():
    _, found = cut("hold for 4 us / 3\nthrow G1 to -3 kV\nhold for 1 s")
    swinging = next(segment for segment in found if len(segment.moves) == 1)
    asked, emitted = F(4, 3 * 10**6), F(1330, 10**9)
    assert swinging.start_s == emitted + F(30, 10**9)
    assert swinging.end_s == asked + F(130, 10**9)


def test_an_edge_over_a_moving_converter_counts_its_drift():
    _, found = cut(
        "ramp { G1 = 5 V } over 1 s\nalongside { lane { throw G1 to -3 kV }"
        " lane { ramp { E1 = 1 V } over 12 us } }"
    )
    assert any(len(segment.moves) == 2 for segment in found)


@settings(max_examples=40, deadline=None)
@given(
    st.lists(
        st.tuples(
            st.sampled_from(["E1", "E2", "R4", "E3"]),
            st.integers(-50, 50),
            st.integers(1, 9),
            st.booleans(),
        ),
        min_size=2,
        max_size=2,
        unique_by=lambda one: one[0],
    ),
    st.integers(1, 9),
)
def test_the_wish_never_leaves_its_segment(moves, wait):
    lanes = "".join(
        f" lane {{ hold for {i * wait + 1} ms; ramp {{ {e} = {v} V }} over {t} ms"
        f"{' smoothly' if smooth else ''} }}"
        for i, (e, v, t, smooth) in enumerate(moves)
    )
    timeline, found = cut(f"alongside {{{lanes} }}")
    for segment in found:
        for share in (0.0, 0.3, 0.5, 0.9, 1.0):
            time = segment.start_s + F(share) * (segment.end_s - segment.start_s)
            wish = np.array(
                [
                    wish_of(timeline, timeline.trap.output_of(e.name).name, time)
                    if e.name[0] != "G"
                    else 0.0
                    for e in timeline.trap.electrodes
                ]
            )
            off = min(
                float(np.max(np.abs(wish - segment.base - p * _one(segment)) - segment.shape_V))
                for p in _progresses(segment, wish, share)
            )
            assert off <= 1e-9


def _one(segment):
    return segment.moves[0] if len(segment.moves) else np.zeros_like(segment.base)


def _progresses(segment, wish, share):
    """Time's share, and for one shared smooth progress the one that fits the largest mover."""
    move = _one(segment)
    if not move.any():
        return [0.0]
    largest = int(np.argmax(np.abs(move)))
    return [share, float(np.clip((wish[largest] - segment.base[largest]) / move[largest], 0, 1))]


def lag(swing, tau, duration, wait, smooth):
    """|electrode − wish| by stepping the low-pass finely; its maximum in the ramp, and after."""
    steps = 20000
    dt = (duration + wait) / steps
    from wellseq.timeline.timeline import Shape

    shape = Shape.SMOOTH if smooth else Shape.STRAIGHT
    value, worst, late = 0.0, 0.0, 0.0
    for i in range(1, steps + 1):
        time = i * dt
        wish = swing * progress(shape, min(time / duration, 1.0))
        value += (wish - value) * (1 - np.exp(-dt / tau))
        worst = max(worst, abs(wish - value))
        if time >= duration:
            late = max(late, abs(wish - value))
    return worst, late


@pytest.mark.parametrize("smooth", [False, True])
def test_the_lag_bound_holds_during_the_ramp_and_after_it(smooth):
    word = "smoothly" if smooth else ""
    timeline, found = cut(f"ramp {{ E2 = 40 V }} over 60 us {word}\nhold for 20 us\nhold for 1 s")
    column = columns(timeline)["E2"]
    ramp, short, late_part, long = found
    assert late_part.start_s == F(80, 10**6)
    assert long.start_s == F(142, 10**6)  # a clock and eight time constants after the ramp
    assert long.lag_V[column] < 2e-3 * short.lag_V[column]
    worst, late = lag(40.0, 10e-6, 60e-6, 20e-6, smooth)
    assert worst <= ramp.lag_V[column]
    assert late <= short.lag_V[column]
    assert long.lag_V[column] < short.lag_V[column]
    assert ramp.lag_V[column] <= (2.0 if smooth else 1.05) * worst  # and it is not idle


def test_the_lag_is_carried_into_the_next_block():
    timeline, shipped = table("ramp { E2 = 40 V } over 60 us\nawait bunch\nhold for 1 ms")
    carry = Carry()
    list(segments(timeline.trap, shipped.blocks[0], carry))
    after = next(iter(segments(timeline.trap, shipped.blocks[1], carry)))
    fresh = next(iter(segments(timeline.trap, shipped.blocks[1])))
    column = columns(timeline)["E2"]
    assert after.lag_V[column] > 1
    assert fresh.lag_V[column] == 0


def test_the_stray_of_the_last_rows_is_carried_through_the_filter():
    timeline, shipped = table("ramp { E2 = 40 V } over 100 ms\nawait bunch\nhold for 1 ms")
    carry = Carry()
    list(segments(timeline.trap, shipped.blocks[0], carry))
    after = next(iter(segments(timeline.trap, shipped.blocks[1], carry)))
    assert after.lag_V[columns(timeline)["E2"]] >= shipped.blocks[0].strays[0].volts > 0.01


def test_a_delay_counts_as_slope_times_delay():
    timeline, (ramp,) = cut("ramp { E3 = 10 V } over 100 us")
    assert ramp.lag_V[columns(timeline)["E3"]] == pytest.approx(0.1)


def test_calibration_noise_and_half_code_are_those_of_the_trap_file():
    timeline, (hold,) = cut("hold for 1 s")
    column = columns(timeline)["E2"]
    code = 200 / (2**18 - 1)
    assert hold.half_code_V[column] == pytest.approx(1.001 * code / 2)
    assert hold.calibration_V[column] == pytest.approx(1e-4 + 1e-3 / 1.001 * 1e-4, rel=1e-6)
    _, (ramp,) = cut("ramp { E2 = 50 V } over 1 s")
    assert ramp.calibration_V[column] == pytest.approx(1e-4 + 50.001 / 1.001 * 1e-4, rel=1e-6)


def test_every_corner_of_two_edges_is_seen():
    _, found = cut("throw G1, G2 to -3 kV")
    segment = next(s for s in found if len(s.moves) == 2)
    corners = {
        tuple((segment.base + np.array(p) @ segment.moves)[[0, -1]])
        for p in product((0.0, 1.0), repeat=2)
    }
    assert corners == {(0, 0), (-3000, 0), (0, -3000), (-3000, -3000)}
