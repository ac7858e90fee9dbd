"""The page of every check: headings, examples that keep their promise, limits as in the code."""

import re
from fractions import Fraction

import pytest
from page_examples import examples, sections, whole

from wellseq.base.data import data_folder
from wellseq.base.finding import Limit
from wellseq.checks.judging import check, check_names
from wellseq.checks.numbers import amount
from wellseq.model.trap import Margins

HEADINGS = ["What it refuses", "Why", "Refused", "Accepted", "Where the limit comes from"]
COMES_WITH = re.compile(r"^Comes with (.+?):", re.MULTILINE)
NAMED = re.compile(r"`([a-z-]+)`")
MARGIN = re.compile(
    r"`(\w+)`\s+under\s+\[margins\],\s+(.+?)\s+unless\s+the\s+trap\s+file", re.DOTALL
)
MARGIN_UNITS = {"depth": "V", "staircase": "V", "neighbour_difference": "V", "separation": "m"}


def page(name):
    return (data_folder("safety") / "checks" / f"{name}.md").read_text("utf-8")


def compiled(example, tmp_path, number):
    folder = tmp_path / str(number)
    folder.mkdir()
    return example.compile(folder)


def faults(name, text, tmp_path):
    """What is wrong with the examples of a page, in words; empty when they keep their promise."""
    found = []
    parts = sections(text)
    extra = {one for said in COMES_WITH.findall(parts["Refused"]) for one in NAMED.findall(said)}
    number = 0
    for heading, wanted in (("Refused", {name} | extra), ("Accepted", set())):
        shown = examples(parts[heading])
        if not shown:
            found.append(f"no example under {heading}")
        for example in shown:
            number += 1
            case = compiled(example, tmp_path, number)
            blocking = {one.name for one in case.blocked}
            if blocking != wanted:
                messages = "; ".join(one.message for one in case.blocked)
                found.append(f"{heading}: {sorted(blocking)}, not {sorted(wanted)}: {messages}")
            if heading == "Accepted" and case.not_run:
                found.append(f"{heading}: not everything was examined: {case.not_run}")
    return found


def unlike_the_code(name, text):
    """The limits of a check's module and the margins' defaults that its page does not say."""
    said = " ".join(text.split())
    missing = []
    for constant, value in vars(check(name)).items():
        if not constant.isupper():
            continue
        if isinstance(value, Limit):
            shown = amount(value.value, value.unit)
        elif isinstance(value, (Fraction, float)):
            shown = f"{float(value) * 100:g} %"
        else:
            continue
        if not re.search(rf"(?<![\d.]){re.escape(shown)}(?![\w.]*\d)", said):
            missing.append(f"{constant} = {shown}")
    for key, default in MARGIN.findall(sections(text)["Where the limit comes from"]):
        value = getattr(Margins(), key if key == "table_rows" else f"{key}_{MARGIN_UNITS[key]}")
        if default != amount(value, MARGIN_UNITS.get(key, "")):
            missing.append(f"the margin {key} is {value}, not {default}")
    return missing


@pytest.mark.parametrize("name", check_names())
def test_a_page_has_its_headings_and_its_name(name):
    text = page(name)
    assert text.startswith(f"# {name}\n")
    assert list(sections(text)) == HEADINGS
    assert all(part.strip() for part in sections(text).values())
    assert max(map(len, text.splitlines())) <= 100


@pytest.mark.parametrize("name", check_names())
def test_its_examples_do_what_they_say(name, tmp_path):
    assert faults(name, page(name), tmp_path) == []


@pytest.mark.parametrize("name", check_names())
def test_its_limits_are_those_of_the_code(name):
    assert unlike_the_code(name, page(name)) == []


@pytest.mark.parametrize("name", check_names())
def test_it_says_whether_it_may_be_allowed(name):
    said = " ".join(sections(page(name))["What it refuses"].split())
    assert ("It cannot be allowed." in said) is not check(name).WAIVABLE
    assert (f"`allow {name} because" in said) is check(name).WAIVABLE


def test_no_page_is_left_over():
    pages = {path.stem for path in (data_folder("safety") / "checks").glob("*.md")}
    assert pages == set(check_names())


# That these yardsticks can fail


@pytest.mark.parametrize(
    ("before", "after"),
    [
        ("C9 = 150 V", "C9 = 100 V"),
        ("C9 = 120 V", "C9 = 150 V"),
        ("ramp { C9 = 150 V }", "rmp { C9 = 150 V }"),
        ("```well\nramp { C9 = 120 V } over 20 ms\n```", ""),
    ],
)
def test_an_example_that_does_something_else_is_seen(tmp_path, before, after):
    text = page("voltage-out-of-range")
    assert before in text
    assert len(faults("voltage-out-of-range", text.replace(before, after), tmp_path)) == 1


def test_a_limit_that_was_changed_in_the_page_alone_is_seen():
    text = page("lag-too-long")
    assert unlike_the_code("lag-too-long", text.replace("10 %", "20 %")) == ["SHARE = 10 %"]
    text = page("steps-too-coarse")
    assert unlike_the_code("steps-too-coarse", text.replace("20 mV", "30 mV"))
    text = page("hazardous-output-live-at-end")
    assert unlike_the_code("hazardous-output-live-at-end", text.replace("60 V", "160 V"))


def test_a_piece_of_a_sequence_gets_the_clouds_that_it_names_and_no_others():
    text = whole("cool pool for 2 s\n")
    assert text.count("cloud ") == 1
    assert "begin with pool in cradle at R6" in text
    assert "cloud" not in whole("hold for 2 s\n")
    assert "begin" not in whole("load pool at R6 for 2 s\n")
