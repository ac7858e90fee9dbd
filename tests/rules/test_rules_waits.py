"""A rule is judged for every time at which a trigger may come, from at once to the longest."""

from __future__ import annotations

from fractions import Fraction

import pytest
from rules_bench import ruling

from wellseq.rules.choices import RUNS_MAX
from wellseq.rules.examine import SEVERAL
from wellseq.rules.rulings import Outcome

MS = Fraction(1, 1000)


def test_a_bunch_that_comes_at_once_breaks_what_a_late_one_would_keep() -> None:
    piece = "hold for 20 ms; set valve open; hold for 1 ms; await bell; ramp { C1 = 5 V } over 1 ms"
    found = ruling("before ramp, require valve open for 3 ms", piece)
    assert found.outcome is Outcome.BROKEN
    (breach,) = found.breaches
    assert breach.waits == {"bell": 0}
    assert ruling("before ramp, require valve open for 1 ms", piece).outcome is Outcome.KEPT


def test_a_bunch_that_comes_late_breaks_what_an_early_one_would_keep() -> None:
    piece = "hold for 9 ms; set valve open; await bell; set valve closed; hold for 20 ms"
    found = ruling("forbid valve open for 9 ms", piece)
    assert found.outcome is Outcome.BROKEN
    (breach,) = found.breaches
    assert breach.awaiting == "bell"
    assert breach.start_s == 18 * MS
    assert ruling("forbid valve open for 11 ms", piece).outcome is Outcome.KEPT


@pytest.mark.parametrize(
    ("low", "expected"), [("3", Outcome.KEPT), ("4", Outcome.BROKEN), ("12", Outcome.BROKEN)]
)
def test_an_arrival_between_the_two_ends_can_be_the_only_one_that_breaks(
    low: str, expected: Outcome
) -> None:
    # The lamp was on 2 ms to 1 ms before the wait; 2 ms after it the valve opens for a moment.
    # Between the lamp's end and the valve lie 3 ms and the wait, 0 to 10 ms: 3 to 13 ms.
    piece = (
        "hold for 20 ms; set lamp on; hold for 1 ms; set lamp off; hold for 1 ms; await bell; "
        "hold for 2 ms; set valve open; hold for 1 us; set valve closed; hold for 20 ms"
    )
    # It was on within the last `low` ms and not within the 1 us before that.
    was_on = f"(lamp on within {low} ms)"
    found = ruling(f"forbid valve open and {was_on} and not (lamp on within 1 ms)", piece)
    assert found.outcome is expected


def test_latency_and_jitter_are_part_of_the_wait() -> None:
    piece = "hold for 1 ms; set valve open; hold for 1 ms; await horn; ramp { C1 = 5 V } over 1 ms"
    # The first row comes 3 us after the trigger, give or take 1 us: 2 us at the least.
    found = ruling("before ramp, require valve open for 1.003 ms", piece)
    assert found.outcome is Outcome.BROKEN
    assert found.breaches[0].waits == {"horn": Fraction(2, 10**6)}
    assert ruling("before ramp, require valve open for 1.002 ms", piece).outcome is Outcome.KEPT


def test_awaiting_is_from_the_last_row_to_the_first() -> None:
    piece = "hold for 1 ms; await horn; set valve open; hold for 1 ms"
    assert ruling("forbid awaiting while valve open", piece).outcome is Outcome.KEPT
    assert ruling("while awaiting horn, require valve open", piece).outcome is Outcome.BROKEN
    assert ruling("forbid awaiting bell", piece).outcome is Outcome.KEPT


def test_what_stands_at_the_last_row_stands_while_waiting() -> None:
    piece = "throw G1 to -500 V; hold for 1 ms; await bell; throw G1 to lv0; hold for 1 ms"
    found = ruling("forbid G1 beyond 400 V while awaiting", piece)
    assert found.outcome is Outcome.BROKEN
    (breach,) = found.breaches
    assert breach.end_s - breach.start_s == 10 * MS


def test_a_count_within_a_window_is_densest_when_nobody_waits() -> None:
    piece = "hold for 1 ms; await bell; ramp { C1 = 5 V } over 10 us; await bell; "
    piece += "ramp { C1 = 0 V } over 10 us; hold for 1 ms"
    assert ruling("ramp at most 1 times within 1 ms", piece).outcome is Outcome.BROKEN
    assert ruling("ramp at most 1 times within 9 us", piece).outcome is Outcome.KEPT


def test_a_window_over_several_waits_is_never_taken_for_kept() -> None:
    ramp = "ramp { C1 = 5 V } over 10 us; ramp { C1 = 0 V } over 10 us"
    piece = f"set lamp on; hold for 1 ms; set lamp off; await bell; {ramp}; await bell; {ramp}; "
    piece += "set valve open; hold for 50 ms"
    sentence = "forbid valve open and (lamp on within 5 ms) and not (lamp on within 4 ms)"
    found = ruling(sentence, piece)
    assert found.outcome in (Outcome.BROKEN, Outcome.UNSURE)
    kept = ruling("forbid G1 beyond 400 V and (lamp on within 5 ms)", piece)
    assert kept.outcome is Outcome.KEPT
    # It is kept, whatever the two waits are; but not all of their choices were looked at.
    sentence = "before ramp, require (lamp on within 25 ms) or valve open"
    undecided = ruling(sentence, f"hold for 30 ms; {piece}")
    assert (undecided.outcome, undecided.why) == (Outcome.UNSURE, SEVERAL)


def test_so_many_changes_that_not_every_arrival_is_tried_are_said_to_be() -> None:
    # Forty changes on either side of the wait, all within reach of one window.
    flicker = "; ".join(f"set lamp {state}; hold for 7 us" for state in ("on", "off") * 20)
    after = flicker.replace("7 us", "11 us")
    piece = f"hold for 5 ms; {flicker}; await bell; {after}; hold for 1 ms"
    sentence = "forbid (lamp on within 600 us) and (lamp off for 500 us) and G1 below -1 V"
    assert ruling(sentence, piece).outcome in (Outcome.KEPT, Outcome.UNSURE)
    restless = "forbid (lamp on within 600 us) and (lamp off for 900 us)"
    found = ruling(restless, piece)
    assert found.outcome in (Outcome.UNSURE, Outcome.NOT_EXAMINED)
    assert found.why
    assert RUNS_MAX >= 100
