"""`rules-contradict`: two rules that cannot both be kept are told at the second."""

from ruled import found

NAME = "rules-contradict"
STEPS = "set lamp on; hold for 1 ms; set lamp off"
ONE = "rule lit: while E5 beyond 20 V, require lamp on\n"


def test_opposite_demands_of_one_condition(tmp_path):
    other = ONE.replace("lit", "dark").replace("on\n", "off\n")
    findings = found(tmp_path, ONE + other, STEPS, NAME)
    assert len(findings) == 1
    assert findings[0].place.line == 2


def test_rules_that_agree_do_not_contradict(tmp_path):
    assert found(tmp_path, ONE + ONE.replace("lit", "again"), STEPS, NAME) == []
