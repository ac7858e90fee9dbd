"""`rule-never-applies`: a rule that no sequence on this trap could break guards nothing."""

import pytest
from ruled import found

NAME = "rule-never-applies"
STEPS = "set lamp on; hold for 1 ms; set lamp off"


@pytest.mark.parametrize(("volts", "count"), [("130 V", 0), ("150 V", 1)])
def test_a_bound_beyond_every_output_is_told(tmp_path, volts, count):
    rule = f"rule dark: while E5 beyond {volts}, require lamp on\n"
    findings = found(tmp_path, rule, STEPS, NAME)
    assert len(findings) == count
    assert all(one.place.file.endswith("our.rules") for one in findings)
