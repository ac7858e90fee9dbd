"""`neighbours-too-far-apart`: the difference of adjacent electrodes at every instant."""

import math
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.checks.judging import check
from wellseq.model.trap import Margins, PairMargin
from wellseq.timeline.timeline import Drive, Edge

NAME = "neighbours-too-far-apart"
END_US = 1000


def converters(make, names="abc"):
    """Ideal outputs: no errors but half a code of 1e-7 V, fast enough for anything."""
    facts = {"range_V": (-214.0, 214.0), "bits": 32, "slew_V_per_s": 1e15}
    return [make.converter(name, between_rows="line", **facts) for name in names]


def case(make, pieces, volts=None, margins=None, outputs=None, **more):
    margins = margins or Margins(neighbour_difference_V=100.0)
    trap = make.trap(outputs or converters(make), margins=margins, **more.pop("trap", {}))
    moves = [make.piece(name, a * make.us, b * make.us, v, w) for name, a, b, v, w in pieces]
    block = make.block(trap, moves, [(0 * make.us, END_US * make.us)], volts=volts, **more)
    return make.case(trap, [block])


def verdicts(make, *args, **more):
    return make.verdicts(case(make, *args, **more), NAME)


def test_far_from_the_limit_passes_and_names_the_pairs(make):
    found = make.findings(case(make, [], {"a": 10.0}), NAME)
    assert [(one.subject, one.verdict.value) for one in found] == [
        ("A, B", "pass"),
        ("B, C", "pass"),
    ]
    assert found[0].value == pytest.approx(10.0)


def test_at_rest_too_far_apart_fails(make):
    (found,) = (f for f in make.findings(case(make, [], {"a": -60.0, "b": 60.0}), NAME) if f.blocks)
    assert (found.verdict, found.subject) == ("fail", "A, B")
    assert found.message == "A and B side by side stand up to 120 V apart, at most 100 V"


def test_exactly_at_the_limit_with_no_error_passes_and_one_step_beyond_does_not(make, monkeypatch):
    module = check(NAME)
    real = module.segments

    def exact(trap, shipped, carry):
        for segment in real(trap, shipped, carry):
            for name in ("shape", "stray", "lag", "half_code", "calibration", "noise"):
                getattr(segment, f"{name}_V")[:] = 0.0
            yield segment

    monkeypatch.setattr(module, "segments", exact)
    assert verdicts(make, [], {"a": -30.1, "b": 69.9, "c": 30.0}) == ["pass", "pass"]
    assert verdicts(make, [], {"a": -30.1, "b": 69.9000001, "c": 30.0}) == ["fail", "pass"]


def test_within_the_errors_of_the_limit_it_is_unsure(make):
    noisy = [make.converter(name, noise_V=0.01) for name in "abc"]
    assert verdicts(make, [], {"a": 99.99}, outputs=noisy)[0] == "unsure"
    assert verdicts(make, [], {"a": 99.5}, outputs=noisy)[0] == "pass"
    assert verdicts(make, [], {"a": 100.5 - 1000.0}, outputs=noisy)[0] == "fail"


def test_it_is_found_in_the_midst_of_a_motion_that_ends_well(make):
    # a comes down before b follows: fine before and after, 120 V apart in between.
    pieces = [("a", 0, 10, 60.0, -60.0), ("b", 20, 30, 60.0, -60.0)]
    volts = {"a": 60.0, "b": 60.0, "c": 0.0}
    assert sorted(verdicts(make, pieces, volts)) == ["fail", "pass", "pass"]
    together = [("a", 0, 10, 60.0, -60.0), ("b", 0, 10, 60.0, -60.0)]
    assert verdicts(make, together, volts) == ["pass", "pass"]


def edge_case(make, *, limit):
    outputs = [make.switch("g", 0.0, -60.0), make.switch("h", 0.0, 60.0)]
    ns = make.ns
    edges = [
        Edge("g", 0 * ns, 0 * ns, 125 * ns, 0, 1, 0),
        Edge("h", 0 * ns, 0 * ns, 125 * ns, 0, 1, 0),
    ]
    margins = Margins(neighbour_difference_V=limit)
    return case(make, [], outputs=outputs, margins=margins, edges=edges)


def test_two_edges_at_once_may_come_in_any_order(make):
    assert make.verdicts(edge_case(make, limit=119.0), NAME) == ["fail"]
    assert make.verdicts(edge_case(make, limit=120.0), NAME) == ["pass"]


def test_what_only_an_order_of_edges_would_do_is_unsure(make):
    # g from 0 to -60 V and h from 60 to 0 V: 60 V apart before and after, 120 V if g comes first.
    outputs = [make.switch("g", 0.0, -60.0), make.switch("h", 60.0, 0.0)]
    edges = [Edge(name, 0 * make.ns, 0 * make.ns, 125 * make.ns, 0, 1, 0) for name in ("g", "h")]
    margins = Margins(neighbour_difference_V=100.0)
    assert verdicts(make, [], outputs=outputs, margins=margins, edges=edges) == ["unsure", "pass"]


def test_a_pair_of_its_own_limit(make):
    own = PairMargin(between=("B", "A"), difference_V=150.0)
    margins = Margins(neighbour_difference_V=100.0, pairs=(own,))
    volts = {"a": -60.0, "b": 60.0, "c": -60.0}
    assert sorted(verdicts(make, [], volts, margins)) == ["fail", "pass"]


def test_a_rotating_drive_adds_to_its_ring(make):
    drive = Drive("A", 0 * make.us, 5 * make.us, 1e5, 1e6, 8.0, 1, (0.0, 90.0, 180.0, 270.0), 0)
    more = {"drives": [drive], "trap": {"sectors": 4}}
    assert verdicts(make, [], {"a": 95.0}, **more)[0] == "fail"
    assert verdicts(make, [], {"a": 91.0}, **more)[0] == "pass"


def test_a_voltage_that_is_not_known_is_unsure(make, monkeypatch):
    module = check(NAME)
    real = module.segments

    def unknown(trap, shipped, carry):
        for segment in real(trap, shipped, carry):
            segment.base[0] = math.nan
            yield segment

    monkeypatch.setattr(module, "segments", unknown)
    assert sorted(verdicts(make, [])) == ["pass", "unsure"]


def test_one_electrode_has_no_neighbour_and_it_may_not_be_allowed(make):
    assert verdicts(make, [], outputs=converters(make, "a")) == []
    assert not check(NAME).WAIVABLE


@settings(deadline=None, max_examples=40)
@given(
    start=st.lists(st.floats(-100, 100), min_size=2, max_size=2),
    end=st.lists(st.floats(-100, 100), min_size=2, max_size=2),
    times=st.lists(st.integers(0, 40), min_size=4, max_size=4),
    shape=st.sampled_from(["straight", "smooth"]),
)
def test_no_sample_of_the_motion_exceeds_what_was_read(make, start, end, times, shape):
    spans = [(times[0], times[0] + times[1] + 1), (times[2], times[2] + times[3] + 1)]
    trap = make.trap(converters(make, "ab"), margins=Margins(neighbour_difference_V=1e5))
    pieces = [
        make.piece(name, a * make.us, b * make.us, v, w, 0, shape)
        for name, (a, b), v, w in zip("ab", spans, start, end, strict=True)
    ]
    volts = dict(zip("ab", start, strict=True))
    block = make.block(trap, pieces, [(0 * make.us, 100 * make.us)], volts=volts)
    (found,) = make.findings(make.case(trap, [block]), NAME)
    read = found.value + found.uncertainty
    for now in np.linspace(0, 100, 201):
        at = [
            piece.at(min(max(Fraction(now) * make.us, piece.start_s), piece.end_s))
            for piece in pieces
        ]
        assert abs(at[0] - at[1]) <= read
