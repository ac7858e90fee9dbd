"""Repeats, scans, calls and lanes: read once, counted before they are played, bounded."""

from __future__ import annotations

import pytest

from wellseq.model.plan import DEPTH_MAX, STEPS_MAX


def names_of(refused):
    return [(name, at) for name, at, _ in refused]


def test_passes_share_one_step(bench):
    items = bench.items("repeat 3 { hold for 1 s; ramp cradle over 1 s }")
    assert [item.verb for item in items] == ["hold", "ramp"] * 3
    assert items[0].step is items[2].step is items[4].step


def test_calls_with_equal_arguments_share_their_steps_and_others_do_not(bench):
    lift = "procedure lift(height) { ramp { E1 = height } over 1 s }"
    items = bench.items("do lift(60 V); do lift(0.06 kV); do lift(50 V)", lift)
    assert items[0].step is items[1].step
    assert items[2].step.pattern.volts == {"E1": 50.0}


def test_an_each_goes_through_values_and_through_things(bench):
    items = bench.items(
        "each height of 1 V, 2 V { ramp { E1 = height } over 1 s }\n"
        "each one of E2, E4 { ramp { one = 3 V } over 1 s }\n"
        "each well of cradle { ramp well over 1 s }\n"
        "each who of bunch, plus { cool who for 1 s }"
    )
    volts = [item.step.pattern.volts for item in items[:4]]
    assert volts == [{"E1": 1.0}, {"E1": 2.0}, {"E2": 3.0}, {"E4": 3.0}]
    assert items[4].step.pattern.volts["E9"] == -90.0
    assert [item.step.cloud for item in items[5:]] == ["bunch", "plus"]


def test_a_procedure_hands_its_arguments_on(bench):
    items = bench.items(
        "do both(E3, 5 V)",
        "procedure one(where, height) { ramp { where = height / 2 } over 1 s }",
        "procedure both(where, height) { do one(where, height); do one(E4, 2 * height) }",
    )
    assert [item.step.pattern.volts for item in items] == [{"E3": 2.5}, {"E4": 5.0}]


def test_a_procedure_without_arguments_needs_no_parentheses(bench):
    for call in ("do rest", "do rest()"):
        assert len(bench.items(call, "procedure rest { hold for 1 s }")) == 1


@pytest.mark.parametrize(
    ("line", "told"),
    [
        ("repeat 0 { hold for 1 s }", ("unit-mismatch", "0")),
        ("repeat 1.5 { hold for 1 s }", ("unit-mismatch", "1.5")),
        ("repeat 2 s { hold for 1 s }", ("unit-mismatch", "2 s")),
        ("repeat 1000000000 { hold for 1 s }", ("too-large", "1000000000")),
        ("repeat { hold for 1 s }", ("syntax", "repeat")),
        ("repeat 2 { }", ("syntax", "{ }")),
        ("each x of 1 V, 2 V { }", ("syntax", "{ }")),
        ("each x in 1 V { hold for 1 s }", ("syntax", "in 1 V")),
        ("each wall of 1 V { hold for 1 s }", ("name-reused", "wall")),
        ("each x of 1 V { each x of 2 V { hold for 1 s } }", ("name-reused", "x")),
        ("alongside { hold for 1 s }", ("syntax", "hold for 1 s")),
        ("alongside { }", ("syntax", "{ }")),
        ("alongside { lane { } }", ("syntax", "{ }")),
        ("lane { hold for 1 s }", ("syntax", "lane")),
        ("do lift(5 V)", ("unknown-name", "lift")),
        ("do cradle", ("unknown-name", "cradle")),
        ("do 5 V", ("syntax", "do")),
        ("let x = 5 V", ("syntax", "let")),
        ("hld for 1 s", ("unknown-step", "hld")),
        ("E1 = 5 V", ("syntax", "E1 = 5 V")),
        ('repeat 2 { hold for 1 s } allow syntax because "x"', ("syntax", 'syntax because "x"')),
    ],
)
def test_what_is_refused(bench, line, told):
    assert names_of(bench.refused(line)) == [told]


def test_the_number_of_arguments_must_be_right(bench):
    lift = "procedure lift(height, span) { ramp { E1 = height } over span }"
    refused = bench.refused("do lift(5 V)", lift)
    message = "'lift' takes 2 arguments, 1 are given"
    assert refused == [("syntax", "lift(5 V)", message)]


def test_a_mistake_that_an_argument_makes_names_the_call(bench):
    text = bench.whole("do lift(5 s)", "procedure lift(height) { ramp { E1 = height } over 1 s }")
    (mistake,) = [m for m in bench.build(text).mistakes if m.name != "name-unused"]
    assert (mistake.name, mistake.place.line) == ("unit-mismatch", 8)
    assert [place.line for place in mistake.origin.chain] == [10]


def test_a_mistake_in_a_body_is_told_once_for_all_passes_and_calls(bench):
    told = bench.refused("repeat 5 { do go(1 V); do go(2 V) }", "procedure go(x) { hold to x }")
    assert [name for name, _, _ in told] == ["syntax", "syntax"]


def test_a_call_that_never_ends_is_shown_as_a_circle(bench):
    ((name, at, message),) = bench.refused(
        "do one()", "procedure one() { do two() }", "procedure two() { do one() }"
    )
    assert (name, at) == ("too-large", "one()")
    assert message == "this call never ends: one → two → one"


def test_the_most_that_can_be_played_can_be_played_and_one_more_cannot(bench):
    fine = bench.items(f"repeat {STEPS_MAX // 100} {{ repeat 100 {{ hold for 1 s }} }}")
    assert len(fine) == STEPS_MAX
    more = bench.refused(f"repeat {STEPS_MAX} {{ hold for 1 s }}; hold for 1 s")
    message = (
        f"this sequence plays {STEPS_MAX + 1:,} steps, and at most {STEPS_MAX:,} can be played"
    )
    assert more == [("too-large", "run", message)]


def test_passes_multiply_before_anything_is_played(bench):
    line = "repeat 1000 { repeat 1000 { hold for 1 s } }"
    message = "1,000 passes of 1,000 steps are more than can be played"
    assert bench.refused(line) == [("too-large", line, message)]


def test_calls_that_double_at_every_level_are_counted_and_not_played(bench):
    levels = [f"procedure p{n}() {{ do p{n - 1}(); do p{n - 1}() }}" for n in range(1, 40)]
    refused = bench.refused("do p39()", "procedure p0() { hold for 1 s }", *levels)
    assert [name for name, _, _ in refused] == ["too-large"]


def test_scans_in_scans_are_stopped(bench):
    values = ", ".join(f"{n} V" for n in range(1, 60))
    line = "".join(f"each v{n} of {values} {{ " for n in range(5)) + "hold for 1 s" + " }" * 5
    assert [name for name, _, _ in bench.refused(line)] == ["too-large"]


def test_calls_in_calls_end_at_a_depth(bench):
    chain = [f"procedure p{n}() {{ do p{n - 1}() }}" for n in range(1, DEPTH_MAX + 1)]
    rest = "procedure p0() { hold for 1 s }"
    assert len(bench.items(f"do p{DEPTH_MAX - 1}()", rest, *chain[:-1])) == 1
    refused = bench.refused(f"do p{DEPTH_MAX}()", rest, *chain)
    assert {name for name, _, _ in refused} == {"too-large"}


def test_a_deep_chain_is_not_hidden_by_having_been_read_before(bench):
    count = 3 * DEPTH_MAX
    chain = [f"procedure p{n}() {{ do p{n - 1}() }}" for n in range(1, count)]
    calls = "; ".join(f"do p{n}()" for n in range(count))
    refused = bench.refused(calls, "procedure p0() { hold for 1 s }", *chain)
    assert {name for name, _, _ in refused} == {"too-large"}


def test_allowances_are_for_their_step(bench):
    line = 'hold for 1 s allow well-too-shallow because "it is empty"'
    built = bench.build(bench.whole(f"repeat 3 {{ {line} }}"))
    (allowed,) = built.sequence.allowances
    assert (allowed.name, allowed.reason) == ("well-too-shallow", "it is empty")
    assert allowed.step_place == built.sequence.items[2].origin.place
    assert allowed.place != allowed.step_place


@pytest.mark.parametrize(
    ("allow", "told"),
    [
        ('allow well-to-shallow because "x"', ("unknown-name", "well-to-shallow")),
        ('allow slew-too-fast because " "', ("syntax", '" "')),
        (
            'allow slew-too-fast because "x" allow slew-too-fast because "y"',
            ("syntax", "slew-too-fast"),
        ),
    ],
)
def test_what_is_no_allowance(bench, allow, told):
    assert names_of(bench.refused(f"hold for 1 s {allow}")) == [told]


SCAN = "each height of 1 V, 2 V, 3 V { ramp { E1 = height } over 1 s }"


@pytest.mark.parametrize("pick", [2, ("height", 2)])
def test_one_value_of_an_each_can_be_played(bench, pick):
    built = bench.build(bench.whole(SCAN), each=pick)
    (item,) = built.sequence.items
    assert item.step.pattern.volts == {"E1": 2.0}
    assert item.origin.passes == (2,)
    assert built.sequence.each_values == (1, 2, 3)


def test_all_values_are_listed_when_none_is_picked(bench):
    assert bench.build(bench.whole(SCAN)).sequence.each_values == (1, 2, 3)
    named = bench.whole("each one of E1, E2 { ramp { one = 1 V } over 1 s }")
    assert bench.build(named).sequence.each_values == ("E1", "E2")
    assert bench.build(bench.whole("hold for 1 s")).sequence.each_values == ()


@pytest.mark.parametrize(
    ("steps", "pick", "message"),
    [
        (SCAN, 4, "this `each` has 3 values, and number 4 was asked for"),
        (SCAN, ("height", 0), "this `each` has 3 values, and number 0 was asked for"),
        (SCAN, ("hight", 1), "this file plays no `each` that goes through 'hight'"),
        ("hold for 1 s", 1, "this file plays no `each`"),
        (
            SCAN + "; each span of 1 s { hold for span }",
            1,
            "this file has more than one `each`",
        ),
    ],
)
def test_a_value_that_is_not_there_cannot_be_picked(bench, steps, pick, message):
    built = bench.build(bench.whole(steps), each=pick)
    assert message in [m.message for m in built.mistakes]


def test_of_two_scans_the_named_one_is_picked(bench):
    steps = SCAN + "; each span of 1 s, 2 s { hold for span }"
    built = bench.build(bench.whole(steps), each=("span", 1))
    assert [item.verb for item in built.sequence.items] == ["ramp"] * 3 + ["hold"]
    assert built.sequence.each_values == (1, 2)
