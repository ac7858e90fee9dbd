"""SARIF by the OASIS schema, JUnit XML by a strict one: for every broken file, and by content."""

from __future__ import annotations

import json
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import jsonschema
import pytest
import xmlschema
from hypothesis import given
from hypothesis import strategies as st

from wellseq.base.finding import Finding, Verdict
from wellseq.base.place import Place
from wellseq.checks.judging import check_names
from wellseq.emit.about import OWN, about
from wellseq.emit.examined import Examined, examined
from wellseq.emit.formats import Options, report
from wellseq.pipeline import compile_file

HERE = Path(__file__).parent
BROKEN = sorted((HERE.parent / "broken").glob("*.well"))
USED = "wellseq 1\n\nprocedure lift(low) {\n  ramp { C3 = low } over 20 ms\n}\n"
MAIN = """\
wellseq 1
use "gates.well"
sequence night {
  repeat 4 {
    do lift(5 V)
  }
}
"""
CHAINED = Finding(
    "slew-too-fast",
    Verdict.FAIL,
    "too fast",
    Place("a/gates.well", 4, 3, 4, 31),
    passes=(3,),
    chain=(Place("a/night.well", 5, 5, 5, 17),),
    value=3.0,
    limit=float("inf"),
)


@cache
def sarif_schema() -> Any:
    schema = json.loads((HERE / "schemas" / "sarif-schema-2.1.0.json").read_text("utf-8"))
    return jsonschema.validators.validator_for(schema)(schema)


@cache
def junit_schema() -> xmlschema.XMLSchema:
    return xmlschema.XMLSchema(str(HERE / "schemas" / "junit.xsd"))


def thing(*findings: Finding, **more: Any) -> Examined:
    sources = {"a/night.well": MAIN, "a/gates.well": USED}
    return Examined("a/night.well", findings, ("slew-too-fast", "syntax"), sources=sources, **more)


def log(*things: Examined, **options: Any) -> Any:
    document = json.loads(report("sarif", things, Options(**options)))
    sarif_schema().validate(document)
    return document["runs"][0]


def suites(*things: Examined) -> Any:
    text = report("junit", things)
    junit_schema().validate(text)
    return junit_schema().to_dict(text)["testsuite"]


@cache
def of_broken(path: Path) -> Examined:
    return examined(compile_file(path))


@pytest.mark.parametrize("path", BROKEN, ids=lambda path: path.stem)
def test_every_broken_file_gives_valid_reports_that_say_something(path: Path) -> None:
    one = of_broken(path)
    blocking = [finding for finding in one.findings if finding.blocks]
    run = log(one)
    assert len([r for r in run["results"] if r["level"] == "error"]) == len(blocking) > 0
    (suite,) = suites(one)
    assert int(suite["@failures"]) == len({finding.name for finding in blocking})
    assert int(suite["@tests"]) == len(suite["testcase"]) == len(check_names())


def test_the_schemas_can_refuse() -> None:
    document = json.loads(report("sarif", [thing(CHAINED)]))
    result = document["runs"][0]["results"][0]
    result["locations"][0]["physicalLocation"]["region"]["startColumn"] = 0
    with pytest.raises(jsonschema.ValidationError):
        sarif_schema().validate(document)
    text = report("junit", [thing()])
    with pytest.raises(xmlschema.XMLSchemaException):
        junit_schema().validate(text.replace('hostname="localhost"', ""))


def test_the_chain_leads_from_the_use_over_the_call_to_the_pass() -> None:
    (result,) = log(thing(CHAINED))["results"]
    related = [
        (
            one["message"]["text"],
            one["physicalLocation"]["artifactLocation"]["uri"],
            one["physicalLocation"]["region"]["startLine"],
        )
        for one in result["relatedLocations"]
    ]
    assert related == [
        ("brought by this `use`", "a/night.well", 2),
        ("in pass 3 of this repeat", "a/night.well", 4),
        ("called here", "a/night.well", 5),
    ]
    place = result["locations"][0]["physicalLocation"]
    assert place["artifactLocation"]["uri"] == "a/gates.well"
    assert place["region"] == {"startLine": 4, "startColumn": 3, "endLine": 4, "endColumn": 31}


def test_suppressions_carry_their_reason() -> None:
    allowed = replace(CHAINED, verdict=Verdict.ALLOWED, reason="dumped next")
    known = replace(CHAINED, known="old gate (2026-05-12)")
    run = log(thing(allowed, known, CHAINED, against="known.list"))
    assert [result["suppressions"] for result in run["results"]] == [
        [{"kind": "inSource", "status": "accepted", "justification": "dumped next"}],
        [{"kind": "external", "status": "accepted", "justification": "old gate (2026-05-12)"}],
        [],
    ]
    assert [result["level"] for result in run["results"]] == ["note", "note", "error"]
    assert [result["baselineState"] for result in run["results"]] == ["new", "unchanged", "new"]
    (suite,) = suites(thing(known))
    assert suite["@failures"] == suite["@errors"] == 0
    assert suite["@skipped"] == 1


def test_rules_are_indexed_and_have_their_pages() -> None:
    run = log(thing(CHAINED), thing(replace(CHAINED, name="well-lost")))
    rules = run["tool"]["driver"]["rules"]
    assert len({rule["id"] for rule in rules}) == len(rules)
    for result in run["results"]:
        assert rules[result["ruleIndex"]]["id"] == result["ruleId"]
    assert all(rule["help"]["markdown"].startswith(f"# {rule['id']}") for rule in rules)


def test_everything_that_reports_can_find_has_a_page() -> None:
    for name in OWN:
        page = about(name).page
        assert page.startswith(f"# {name}\n")
        parts = ("What it says", "Why it matters", "What to do")
        assert all(f"**{part}.**" in page for part in parts)
    assert about("file-altered").says.endswith(".")
    assert about("nobody knows").page == "nobody knows."


def test_what_was_not_examined_is_no_success_in_any_form() -> None:
    silent = replace(thing(), ran=(), not_run=(("well-lost", "no wells were reached"),))
    run = log(silent)
    assert [result["ruleId"] for result in run["results"]] == ["not-examined"]
    assert run["invocations"][0]["toolExecutionNotifications"]
    (suite,) = suites(silent)
    assert suite["@errors"] == 1
    (suite,) = suites(Examined("a.well", (), ()))
    assert suite["@errors"] == 1


def test_a_clean_file_is_in_it_too() -> None:
    run = log(thing())
    assert run["results"] == []
    assert run["artifacts"][0]["location"]["uri"] == "a/night.well"
    (suite,) = suites(thing())
    assert (suite["@tests"], suite["@failures"], suite["@errors"]) == (2, 0, 0)


def test_margins_are_passes_without_a_level() -> None:
    passed = replace(CHAINED, verdict=Verdict.PASS, margin=2.0)
    assert log(thing(passed))["results"] == []
    (result,) = log(thing(passed), margins=True)["results"]
    assert (result["kind"], result["level"]) == ("pass", "none")
    assert result["properties"]["margin"] == 2.0
    assert "limit" not in result["properties"]


def test_names_become_references() -> None:
    run = log(Examined("a b/µ.well", (), ("syntax",)), Examined("/x/y.well", (), ("syntax",)))
    uris = [one["location"]["uri"] for one in run["artifacts"]]
    assert uris == ["a%20b/%C2%B5.well", "file:///x/y.well"]


texts = st.text(st.characters(codec=None), max_size=12)
findings = st.builds(
    Finding,
    name=st.sampled_from(["well-lost", "syntax", "file-altered"]),
    verdict=st.sampled_from(list(Verdict)),
    message=texts,
    place=st.builds(Place, texts.filter(bool), *[st.integers(1, 9)] * 4),
    hint=texts,
    subject=texts,
    label=texts,
    reason=texts,
    known=texts,
    passes=st.lists(st.integers(1, 9), max_size=3).map(tuple),
    chain=st.lists(st.builds(Place, st.just("a/night.well"), *[st.integers(1, 9)] * 4)).map(tuple),
    window_s=st.none() | st.tuples(st.floats(), st.floats()),
    value=st.none() | st.floats(),
    margin=st.none() | st.floats(),
)


@given(st.lists(findings, max_size=3), texts.filter(bool), st.booleans())
def test_no_text_makes_a_report_invalid(found: list[Finding], shown: str, margins: bool) -> None:
    one = replace(thing(*found), shown=shown)
    log(one, margins=margins)
    report_text = report("junit", [one])
    junit_schema().validate(report_text.encode("utf-8", "strict").decode())
