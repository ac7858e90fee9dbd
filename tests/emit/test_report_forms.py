"""Findings in their forms: text for people, GNU lines, JSON by its schema."""

from __future__ import annotations

import json
from dataclasses import replace

import jsonschema
import made_case
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.base.data import data_folder
from wellseq.base.finding import Finding, Verdict
from wellseq.base.place import Place
from wellseq.emit.examined import Examined, examined
from wellseq.emit.formats import Options, format_names, report
from wellseq.emit.reports.json import schema_text

LINE = "\tramp µ𝔸 cradl over 20 ms   # tired"
TEXT = f"wellseq 1\r\n{LINE}\r\n"
START = LINE.index("cradl") + 1
FAILING = Finding(
    name="unknown-name",
    verdict=Verdict.FAIL,
    message="'cradl' is not known as a pattern",
    place=Place("a.well", 2, START, 2, START + 5),
    hint="did you mean 'cradle'?",
    step="ramp",
    passes=(2, 1),
    chain=(Place("a.well", 9, 3, 9, 10),),
)


def thing(*findings: Finding, not_run: tuple[tuple[str, str], ...] = ()) -> Examined:
    return Examined("a.well", findings, ("syntax",), not_run, 3.5, {"a.well": TEXT})


def test_forms_are_the_files_of_the_folder() -> None:
    assert format_names() == ("json", "junit", "lines", "sarif", "text")
    with pytest.raises(KeyError):
        report("xml", [thing()])


def test_text_shows_the_written_line_with_a_marker_under_the_place() -> None:
    text = report("text", [thing(FAILING)])
    written, under = text.splitlines()[2:4]
    # The blank before the verb is a tab of eight cells, cut off together from both lines.
    assert written == " written  ramp µ𝔸 cradl over 20 ms   # tired"
    assert under.index("~") == written.index("cradl")
    assert under.count("~") == len("cradl")


def test_text_says_where_called_from_and_what_would_be_right() -> None:
    text = report("text", [thing(FAILING)])
    assert "a.well, line 2, column 10, step ramp, pass 2, inner pass 1" in text
    assert "called  from a.well, line 9, column 3" in text
    assert "try  did you mean 'cradle'?" in text
    assert text.endswith("a.well: not clear; 1 fail; 3.5 s played\n")


def test_text_keeps_margins_for_those_who_ask() -> None:
    case = examined(made_case.case())
    assert "margins of" not in report("text", [case])
    text = report("text", [case], Options(margins=True))
    rows = [line for line in text.splitlines() if " against " in line]
    assert [row.split()[2] for row in rows] == ["slew-too-fast", "well-too-shallow"]


def test_text_has_no_escapes_without_colour_and_the_same_words_with_it() -> None:
    plain = report("text", [thing(FAILING)])
    coloured = report("text", [thing(FAILING)], Options(colour=True))
    assert "\x1b" not in plain
    assert "\x1b[31;1mFAILS\x1b[0m" in coloured
    assert _without_colour(coloured) == plain


def _without_colour(text: str) -> str:
    pieces = text.split("\x1b[")
    return pieces[0] + "".join(piece.partition("m")[2] for piece in pieces[1:])


def test_what_did_not_run_is_never_called_clear() -> None:
    half = thing(not_run=(("well-lost", "no wells were reached"),))
    assert not half.clear
    assert "not clear; 1 checks not run" in report("text", [half])
    assert report("lines", [half]).startswith("a.well:1:1: error: not examined: well-lost")
    assert json.loads(report("json", [half]))["files"][0]["cleared"] is False
    assert not Examined("a.well", (), ()).clear


def test_lines_count_display_columns_and_stay_one_line_each() -> None:
    bent = replace(FAILING, message="two\nlines \x1b[31m")
    lines = report("lines", [thing(bent)]).splitlines()
    # A tab is eight cells, a mathematical letter one: `cradl` begins in cell 17.
    assert lines[0] == "a.well:2:17: error: two lines \\u001b[31m [unknown-name]"


@pytest.mark.parametrize(
    ("verdict", "severity"),
    [(Verdict.FAIL, "error"), (Verdict.UNSURE, "error: not decided"), (Verdict.ALLOWED, "note")],
)
def test_lines_give_each_verdict_its_severity(verdict: Verdict, severity: str) -> None:
    text = report("lines", [thing(replace(FAILING, verdict=verdict, reason="why"))])
    assert f": {severity}: " in text


def test_lines_say_so_when_all_is_clear() -> None:
    assert report("lines", [thing()]) == (
        "a.well:1:1: note: 1 checks ran, nothing stands in the way [cleared]\n"
    )


def test_stored_schema_is_that_of_the_models() -> None:
    stored = (data_folder("grammar") / "schemas" / "findings-1.json").read_text("utf-8")
    assert stored == schema_text()


numbers = st.none() | st.floats()
findings = st.builds(
    Finding,
    name=st.sampled_from(["well-lost", "syntax"]),
    verdict=st.sampled_from(list(Verdict)),
    message=st.text(st.characters(exclude_categories=["Cs"])),
    place=st.builds(Place, st.text(), *[st.integers(1, 9)] * 4),
    passes=st.lists(st.integers(1, 9)).map(tuple),
    window_s=st.none() | st.tuples(st.floats(), st.floats()),
    value=numbers,
    limit=numbers,
    margin=numbers,
    uncertainty=numbers,
)


@given(st.lists(findings, max_size=4))
def test_every_report_is_valid_by_the_schema(found: list[Finding]) -> None:
    document = json.loads(report("json", [thing(*found)]))
    jsonschema.validate(document, json.loads(schema_text()))
    assert len(document["findings"]) == len(found)


def test_the_schema_can_refuse() -> None:
    document = json.loads(report("json", [thing(FAILING)]))
    document["findings"][0]["verdict"] = "maybe"
    with pytest.raises(jsonschema.ValidationError):
        jsonschema.validate(document, json.loads(schema_text()))


@given(st.lists(findings, max_size=3), st.booleans(), st.integers(40, 120))
def test_no_form_fails_on_anything(found: list[Finding], margins: bool, width: int) -> None:
    for form in format_names():
        assert report(form, [thing(*found)], Options(False, margins, width)).endswith("\n")
