"""Every boundary: at the very instant, one tick before, one tick after; open against closed.

Steps of the sequences fall on ticks of 1 us, on outputs and lines without lag, so that a rule turns
from kept to broken between one tick and the next.
"""

from __future__ import annotations

import pytest
from rules_bench import ruling

RAMP = "ramp { C1 = 10 V } over 10 us"
GAP = [("999 us", "short"), ("1 ms", "exact"), ("1.001 ms", "long")]


def outcome(sentence: str, piece: str) -> str:
    return ruling(sentence, piece).outcome.value


@pytest.mark.parametrize(("gap", "which"), GAP)
def test_before_for(gap: str, which: str) -> None:
    piece = f"hold for 5 ms; set valve open; hold for {gap}; {RAMP}; hold for 5 ms"
    found = outcome("before ramp, require valve open for 1 ms", piece)
    assert found == ("broken" if which == "short" else "kept")


@pytest.mark.parametrize(("gap", "which"), GAP)
def test_before_for_does_not_take_the_instant_itself(gap: str, which: str) -> None:
    # The valve closes at the very instant at which the ramp begins.
    piece = (
        f"hold for 5 ms; set valve open; hold for {gap}; set valve closed; {RAMP}; hold for 9 ms"
    )
    found = outcome("before ramp, require valve open for 1 ms", piece)
    assert found == ("broken" if which == "short" else "kept")


def test_before_means_just_before() -> None:
    opened = f"hold for 1 ms; set valve open; {RAMP}; hold for 1 ms"
    assert outcome("before ramp, require valve open", opened) == "broken"
    closed = f"set valve open; hold for 1 ms; set valve closed; {RAMP}; hold for 1 ms"
    assert outcome("before ramp, require valve open", closed) == "kept"


@pytest.mark.parametrize(("gap", "which"), GAP)
def test_before_within(gap: str, which: str) -> None:
    # Open for 1 us only: from the set to one tick later, that instant not taken in.
    piece = (
        f"hold for 5 ms; set valve open; hold for 1 us; set valve closed; hold for {gap}; {RAMP}"
    )
    found = outcome("before ramp, require valve open within 1 ms", f"{piece}; hold for 5 ms")
    assert found == ("kept" if which == "short" else "broken")


@pytest.mark.parametrize(("gap", "which"), GAP)
def test_after_for(gap: str, which: str) -> None:
    piece = (
        f"set valve open; hold for 1 ms; {RAMP}; hold for {gap}; set valve closed; hold for 5 ms"
    )
    found = outcome("after ramp, require valve open for 1 ms", piece)
    # Up to and with 1 ms after: a valve that closes exactly then is not open any more.
    assert found == ("kept" if which == "long" else "broken")


@pytest.mark.parametrize(("gap", "which"), GAP)
def test_after_within(gap: str, which: str) -> None:
    piece = f"hold for 1 ms; {RAMP}; hold for {gap}; set valve open; hold for 5 ms"
    found = outcome("after ramp, require valve open within 1 ms", piece)
    assert found == ("broken" if which == "long" else "kept")


@pytest.mark.parametrize(("gap", "which"), GAP)
def test_for_takes_both_ends_in(gap: str, which: str) -> None:
    piece = f"hold for 5 ms; set valve open; hold for {gap}; set valve closed; hold for 5 ms"
    # Open on [0, gap): 1 ms after its beginning it is closed again if the gap is exactly that.
    found = outcome("forbid valve open for 1 ms", piece)
    assert found == ("broken" if which == "long" else "kept")


@pytest.mark.parametrize(("gap", "which"), GAP)
def test_within_takes_both_ends_in(gap: str, which: str) -> None:
    piece = f"hold for 5 ms; set valve open; hold for {gap}; set lamp on; hold for 5 ms"
    piece = f"set lamp off; {piece}"
    # `lamp on` begins `gap` after `valve closed` was true for the last time, which is before it.
    found = outcome("while lamp on, require valve closed within 1 ms", piece)
    assert found == "broken"
    short = (
        f"hold for 5 ms; set valve open; hold for {gap}; set lamp on; hold for 1 us; set lamp off"
    )
    found = outcome("while lamp on, require valve closed within 1 ms", f"{short}; hold for 5 ms")
    assert found == ("kept" if which == "short" else "broken")


def test_a_step_does_not_hold_its_last_instant() -> None:
    one_after_the_other = "rotate_here; hold for 1 us; hold for 1 us".replace(
        "rotate_here", "ramp { C1 = 5 V } over 10 us"
    )
    assert outcome("forbid hold while ramp", one_after_the_other) == "kept"
    assert outcome("forbid hold while (ramp within 1 us)", one_after_the_other) == "broken"


def test_a_line_has_its_state_from_the_tick_on() -> None:
    together = "hold for 1 ms; set lamp on; set valve open; hold for 1 ms"
    assert outcome("never lamp on and valve closed", together) == "kept"
    apart = "hold for 1 ms; set lamp on; hold for 1 us; set valve open; hold for 1 ms"
    found = ruling("never lamp on and valve closed", apart)
    assert found.outcome.value == "broken"
    (breach,) = found.breaches
    assert (breach.start_s * 10**6, breach.end_s * 10**6) == (1000, 1001)


@pytest.mark.parametrize(
    ("sentence", "expected"),
    [
        ("forbid G1 beyond 500 V", "kept"),
        ("forbid G1 beyond 499.999 V", "broken"),
        ("forbid G1 below -500 V", "kept"),
        ("forbid G1 between -600 V and -500 V", "broken"),
        ("forbid G1 between -600 V and -500.001 V", "kept"),
        ("require G1 between -500 V and 0 V", "kept"),
    ],
)
def test_a_bound_met_exactly(sentence: str, expected: str) -> None:
    # -500 V is known exactly; 0 V is a whole code of the converter behind the switch.
    piece = "hold for 1 ms; throw G1 to -500 V; hold for 1 ms; throw G1 to lv0; hold for 1 ms"
    assert outcome(sentence, piece) == expected


def test_a_straight_line_crosses_a_bound_at_one_instant() -> None:
    piece = "hold for 1 ms; ramp { C1 = 100 V } over 100 us; hold for 1 ms"
    found = ruling("forbid C1 above 50 V while ramp", piece)
    (breach,) = found.breaches
    assert (breach.start_s, breach.end_s * 10**6) == (pytest.approx(1.05e-3), 1100)
    # The bound itself is not above it: the breach begins just after that instant.
    assert outcome("forbid C1 above 100 V", piece) == "kept"
    assert outcome("forbid C1 between 100 V and 101 V", piece) == "broken"


@pytest.mark.parametrize(
    ("most", "window", "expected"),
    [
        (2, "", "broken"),
        (3, "", "kept"),
        (1, " within 1.009 ms", "kept"),
        (1, " within 1.01 ms", "broken"),
        (2, " within 2.019 ms", "kept"),
        (2, " within 2.02 ms", "broken"),
    ],
)
def test_a_window_of_counting_takes_both_ends_in(most: int, window: str, expected: str) -> None:
    # Three ramps of 10 us, 1 ms apart: they begin 1.01 ms after each other.
    ramps = "; ".join(f"ramp {{ C1 = {volts} V }} over 10 us; hold for 1 ms" for volts in (5, 9, 5))
    assert outcome(f"ramp at most {most} times{window}", f"hold for 1 ms; {ramps}") == expected


def test_at_end_is_the_last_instant() -> None:
    piece = "hold for 1 ms; set valve open"
    assert outcome("at end, require valve closed", piece) == "broken"
    assert outcome("at end, forbid hold", "hold for 1 ms") == "kept"
    piece = "set valve open; hold for 1 ms; set valve closed"
    assert outcome("at end, require not (valve open within 1 us)", piece) == "broken"
