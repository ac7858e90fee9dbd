"""`interlock-broken`: a rule is judged over all of time, with its least margin when kept."""

import pytest
from ruled import found, verdicts

NAME = "interlock-broken"
RULE = "rule dark_below: while E5 beyond 20 V, require lamp on\n"
STEPS = "set lamp {}; hold for 1 ms; ramp {{ E5 = {} V }} over 5 ms; hold for 1 ms; set lamp off"


def ours(folder, rules, steps):
    return [one for one in found(folder, rules, steps, NAME) if "dark_below" in one.message]


def test_a_broken_rule_fails_at_the_step_that_breaks_it(tmp_path):
    (one,) = ours(tmp_path, RULE, STEPS.format("off", 30))
    assert one.verdict.value == "fail"
    assert one.step == "ramp"
    assert one.window_s is not None
    assert one.window_s[0] == pytest.approx(1e-3 + 5e-3 * 20 / 30, abs=2e-5)


def test_a_kept_rule_passes_with_its_margin(tmp_path):
    assert set(verdicts(ours(tmp_path, RULE, STEPS.format("off", 10)))) == {"pass"}


@pytest.mark.parametrize(("volts", "verdict"), [(19.9, "pass"), (20.1, "fail")])
def test_a_little_on_either_side_of_the_bound(tmp_path, volts, verdict):
    (one,) = ours(tmp_path, RULE, STEPS.format("off", volts))
    assert one.verdict.value == verdict


def test_what_the_errors_of_the_output_leave_open_is_unsure(tmp_path):
    found_here = ours(tmp_path, RULE, STEPS.format("off", "20.0"))
    assert "unsure" in verdicts(found_here)


def test_it_may_be_allowed_unless_the_rule_says_never(tmp_path):
    steps = STEPS.format("off", 30).replace("over 5 ms", f'over 5 ms allow {NAME} because "tested"')
    assert verdicts(ours(tmp_path, RULE, steps)) == ["allowed"]
    never = RULE.replace("dark_below:", "dark_below never_waivable:")
    assert verdicts(ours(tmp_path, never, steps)) == ["fail"]
