"""One mistake is told once: what follows from it is no news."""

from pathlib import Path

import pytest

from wellseq.model.build import build
from wellseq.text.parse import parse

HERE = Path(__file__).parent.parent / "timeline"
HEAD = """wellseq 1
trap "bench.trap.toml"
cloud cold is electron { number 1e6; radius 1 mm; temperature 100 K }
"""


def mistakes(body, before=""):
    source = f"{HEAD}{before}\nsequence test {{\n{body}\n}}\n"
    return [m.name for m in build(parse(source, "t"), HERE / "t", known_findings=()).mistakes]


BEGIN = "begin with cold in { E1 = 0 V } at E1\n"


@pytest.mark.parametrize(
    ("before", "body", "name"),
    [
        ("let huge = 1e400 V", "ramp { E1 = huge } over 1 s", "too-large"),
        ("let wide 90 V", "ramp { E1 = wide } over 1 s", "syntax"),
        ("pattern cup { E1 = = 3 V }", "ramp cup over 1 s", "syntax"),
        ("pattern cup [ E1 = 3 V ]", "ramp cup over 1 s", "syntax"),
        ("", "ramp { E1 = 1,5 V } over 1 s", "syntax"),
    ],
)
def test_a_spoilt_definition_is_the_only_mistake(before, body, name):
    assert set(mistakes(BEGIN + body, before)) == {name}


def test_what_has_nothing_to_do_with_it_is_still_told():
    found = mistakes(BEGIN + "ramp { E1 = hug } over 1 s", "let huge = 1e400 V")
    assert found == ["too-large", "unknown-name"]
    assert mistakes(BEGIN + "ramp { } over 1 s") == ["syntax"]
