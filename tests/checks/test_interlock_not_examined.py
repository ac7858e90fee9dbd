"""`interlock-not-examined`: what a rule speaks of is not known, so nothing may pass."""

from ruled import found, verdicts

NAME = "interlock-not-examined"
COLD = "rule only_cold: while lamp on, require temperature below 100 K\n"
CLOUD = "hold for 1 ms; set lamp on; hold for 1 ms; set lamp off"


def test_a_rule_over_voltages_is_examined(tmp_path):
    rule = "rule dark: while E5 beyond 20 V, require lamp on\n"
    assert found(tmp_path, rule, CLOUD, NAME) == []


def test_a_rule_over_a_temperature_that_nobody_stated_blocks(tmp_path):
    cloud = "cloud cold is electron { number 1e6; radius 1 mm }"
    begin = "begin with cold in { E3, E7 = -60 V; E4..E6 = 10 V; others = 0 V } at E5\n"
    findings = found(tmp_path, COLD, begin + CLOUD, NAME, before=cloud)
    assert findings
    assert all(verdict != "pass" for verdict in verdicts(findings))
