"""The manual of the language: its examples do what they say, its tables are those of the code."""

from __future__ import annotations

import re
from pathlib import Path
from typing import Any

import pytest
from manual_examples import Example, examples, faults

from wellseq.base.data import data_folder
from wellseq.base.names import RESERVED
from wellseq.base.quantity import DIGITS_MAX, EXPONENT_MAX, UNITS, kind_of
from wellseq.checks.judging import check_names, waivable
from wellseq.checks.patch_not_stated import LIMIT as PATCH_LIMIT
from wellseq.model import library, plan
from wellseq.model.declare import FIGURES
from wellseq.model.hardware import Converter, Electrode, Line, Switch, Trigger
from wellseq.model.margins import Margins, PairMargin
from wellseq.model.operands import DURATION_MAX_s
from wellseq.model.species import SPECIES
from wellseq.model.steps import verbs
from wellseq.model.surroundings import Bore, MagneticField, Site
from wellseq.model.trap_file import BYTES_MAX, Heading, trap_from
from wellseq.model.written import WRITTEN
from wellseq.text import scan, split
from wellseq.text.parse import SIZE_MAX
from wellseq.timeline.deviations import NOISE_RMS_TAKEN
from wellseq.timeline.gates import WHOLE_EDGE
from wellseq.wells.arrivals import EVAPORATION_FLOOR_SHARE
from wellseq.wells.bunches import ENERGY_KEPT_SHARE
from wellseq.wells.holding import RIPPLE_SHARE, RIPPLE_V

PAGE = (data_folder("grammar") / "LANGUAGE.md").read_text("utf-8")
CODE = re.compile(r"`([^`]+)`")
SHOWN = {f"line {one.line}": one for one in examples(PAGE)}


def section(heading: str, page: str = PAGE) -> str:
    """The text under the heading that begins so, up to the next heading of any level."""
    found = re.search(rf"^#+ {re.escape(heading)}.*?$(.*?)(?=^#|\Z)", page, re.M | re.S)
    assert found, heading
    return found[1]


def rows(heading: str, page: str = PAGE) -> list[list[str]]:
    """The cells of the table under a heading, its head left out."""
    lines = [line for line in section(heading, page).splitlines() if line.startswith("|")]
    return [[cell.strip() for cell in line.strip("|").split("|")] for line in lines[2:]]


def test_the_page_is_short_and_its_lines_too() -> None:
    lines = PAGE.splitlines()
    assert len(lines) < 700
    assert max(map(len, lines)) <= 110


# Examples


@pytest.mark.parametrize("name", SHOWN)
def test_an_example_does_what_it_says(name: str, tmp_path: Path) -> None:
    assert faults(SHOWN[name], tmp_path) == []


def test_there_are_examples_of_both_sorts() -> None:
    refused = [one for one in SHOWN.values() if one.refused]
    assert len(refused) >= 8
    assert len(SHOWN) - len(refused) >= 8


@pytest.mark.parametrize(
    ("text", "refused"),
    [
        ("hold for 2 s\n", True),
        ("hold for 20\n", False),
        ("hold for 2 s  # expect: unit-mismatch\n", True),
        ("hold for 2 s; hold for 20  # expect: syntax\n", True),
        ("cool pool for 2 s; ramp { R6 = -120 V } over 20 ms\n", False),
        ("let little = 20 ms / 3 V; let small = -little +\n", False),
    ],
)
def test_an_example_that_does_something_else_is_seen(
    text: str, refused: bool, tmp_path: Path
) -> None:
    assert faults(Example(text, 1, refused), tmp_path)


# Tables and lists


def units_in(page: str) -> list[set[str]]:
    return [set(CODE.findall(row[1])) for row in rows("Quantities and units", page)]


def test_the_units_are_those_that_are_read() -> None:
    groups = units_in(PAGE)
    assert set().union(*groups) == set(UNITS)
    assert sum(map(len, groups)) == len(UNITS)
    for group in groups:
        assert len({kind_of(unit) for unit in group}) == 1
    assert set().union(*units_in(PAGE.replace(" `uV` |", " |"))) != set(UNITS)


def test_the_reserved_words_are_those_that_are_read() -> None:
    assert set(CODE.findall(section("Reserved words"))) == RESERVED


def test_the_table_of_steps_is_complete() -> None:
    linked = [
        (match[1], match[2])
        for row in rows("Steps")
        if (match := re.fullmatch(r"\[(\w+)\]\(steps/(\w+)\.md\)", row[0]))
    ]
    assert [verb for verb, _ in linked] == list(verbs())
    for verb, file in linked:
        assert verb == file
        assert (data_folder("grammar") / "steps" / f"{file}.md").is_file()


def test_the_figures_of_clouds_and_the_species_are_those_of_the_code() -> None:
    said = section("Clouds")
    assert [CODE.findall(row[0])[0] for row in rows("Clouds")] == list(FIGURES)
    for word in (*SPECIES, "ion", "mass", "charge"):
        assert f"`{word}`" in said


def test_the_findings_that_can_be_allowed_are_those_of_the_code() -> None:
    said = section("Claims, measured values").partition("These findings can be allowed")[2]
    listed = {name for name in CODE.findall(said.partition("```")[0]) if name in check_names()}
    assert listed - {"allowance-refused"} == {name for name in check_names() if waivable(name)}


def test_the_limits_are_those_of_the_code() -> None:
    said = {row[0]: row[1] for row in rows("Limits")}
    assert said == {
        "a source file": f"{SIZE_MAX // 10**6} MB",
        "a trap file": f"{BYTES_MAX // 10**6} MB",
        "braces and parentheses in one another": str(split.NESTING_MAX),
        "repeats, calls and lanes in one another": str(plan.DEPTH_MAX),
        "steps played by a sequence": str(plan.STEPS_MAX),
        "passes of one `repeat`": str(plan.STEPS_MAX),
        "files that use files": f"{library.DEPTH_MAX} deep",
        "files used by one file": str(library.USES_MAX),
        "one step": "1e7 s",
        "digits of a number": str(DIGITS_MAX),
        "exponent of a number": str(EXPONENT_MAX),
        "operations in one value": str(split.OPERATORS_MAX),
        "characters of a name": str(scan.NAME_LENGTH_MAX),
        "characters of a text": str(scan.STRING_LENGTH_MAX),
    }
    assert DURATION_MAX_s == 10**7


def test_the_figures_in_the_sentences_are_those_of_the_code() -> None:
    switches, depth = section("Edges of switches"), " ".join(section("Depth").split())
    assert f"within {float(WHOLE_EDGE):g} times" in " ".join(switches.split())
    assert "six times `noise`" in depth
    assert NOISE_RMS_TAKEN == 6.0
    assert f"to {EVAPORATION_FLOOR_SHARE:g} U" in depth
    assert depth.count(f"{ENERGY_KEPT_SHARE:g}") == 2
    assert "flatter than 1 mV or a tenth of its depth" in depth
    assert (RIPPLE_V, RIPPLE_SHARE) == (1e-3, 1 / 10)
    assert PATCH_LIMIT.value == 1.0
    assert "A floor below 1 V" in depth.replace("**", "")


# The trap file

LEAST: dict[str, tuple[Any, dict[str, Any]]] = {
    "Heading": (Heading, {"wellseq-trap": 1, "name": "Page"}),
    "`[field]`": (MagneticField, {"uniform": "1 T"}),
    "`[bore]`": (Bore, {}),
    "`[site]`": (Site, {}),
    "`[margins]`": (Margins, {}),
    "`[[margins.pair]]`": (PairMargin, {"between": ["A", "B"], "difference": "1 V"}),
    "`[[electrode]]`": (
        Electrode,
        {"name": "A", "from": "0 m", "to": "1 m", "radius": "1 m", "output": "a"},
    ),
    "`[[output]]`, a converter": (
        Converter,
        {"name": "a", "range": ["0 V", "9 V"], "slew": "1 V/s", "bits": 8, "clock": "1 s"},
    ),
    "`[[output]]`, a switch": (
        Switch,
        {"kind": "switch", "name": "a", "levels": ["0 V", "9 V"], "edge": "1 s", "clock": "1 s"},
    ),
    "`[[line]]`": (Line, {"name": "a", "states": ["on", "off"], "initial": "on", "clock": "1 s"}),
    "`[[trigger]]`": (Trigger, {"name": "a"}),
}
"""Heading in the manual → the model of that table, and the least that it can be read from."""


def unlike_the_model(heading: str, page: str = PAGE) -> list[str]:
    """Keys, units and defaults of one table that are not those of its model."""
    model, least = LEAST[heading]
    fields = {info.alias or name: info for name, info in model.model_fields.items()}
    table = {CODE.findall(row[0])[0]: row[1:] for row in rows(heading, page)}
    wrong = sorted(set(table) ^ set(fields))
    for key in table.keys() & fields.keys():
        meaning, unit, default = table[key]
        info = fields[key]
        if not meaning:
            wrong.append(f"{key}: no meaning")
        if unit and not _reads(model, {**least, key: f"1 {unit}"}):
            wrong.append(f"{key}: not in {unit}")
        if default == "needed":
            if not info.is_required():
                wrong.append(f"{key}: not needed")
        elif default == "not stated":
            if info.is_required() or info.default is not None:
                wrong.append(f"{key}: has a default")
        elif not _is_default(model, least, key, default):
            wrong.append(f"{key}: the default is not {default}")
    return wrong


def _reads(model: Any, table: dict[str, Any]) -> bool:
    if model is MagneticField:
        table = {key: table[key] for key in ("uniform",)}
    try:
        model.model_validate(table, context=WRITTEN)
    except ValueError:
        return False
    return True


def _is_default(model: Any, least: dict[str, Any], key: str, default: str) -> bool:
    written = CODE.findall(default)
    if len(written) != 1:
        return False
    if written[0] == "[]":
        return bool(model.model_fields[_field(model, key)].default == ())
    value: Any = {"true": True, "false": False}.get(written[0])
    if value is None:
        value = written[0].strip('"') if written[0].startswith('"') else int(written[0])
    bare = {name: given for name, given in least.items() if name != key or name == "kind"}
    stated = model.model_validate({**bare, key: value}, context=WRITTEN)
    return bool(stated == model.model_validate(bare, context=WRITTEN))


def _field(model: Any, key: str) -> str:
    fields: dict[str, Any] = model.model_fields
    return next(name for name, info in fields.items() if key in (name, info.alias))


@pytest.mark.parametrize("heading", LEAST)
def test_the_keys_of_the_trap_file_are_those_of_the_models(heading: str) -> None:
    assert unlike_the_model(heading) == []


@pytest.mark.parametrize(
    ("heading", "before", "after"),
    [
        ("`[bore]`", "| `patch` |", "| `path` |"),
        ("`[bore]`", "surfaces, at most | V |", "surfaces, at most | K |"),
        ("`[margins]`", '`"20 mV"`', '`"30 mV"`'),
        ("`[[trigger]]`", "| `jitter` | of the latency, either way | s |", "| `shake` | of it | |"),
        ("`[[electrode]]`", "inner radius, the same for all | m | needed", "r | m | not stated"),
    ],
)
def test_a_key_that_was_changed_in_the_page_alone_is_seen(
    heading: str, before: str, after: str
) -> None:
    assert before in PAGE
    assert unlike_the_model(heading, PAGE.replace(before, after))


def test_the_trap_that_is_shown_is_sound() -> None:
    shown = re.search(r"^```toml\n(.*?)^```$", section("The trap file"), re.M | re.S)
    assert shown is not None
    trap, mistakes = trap_from(shown[1], "three.trap.toml")
    assert mistakes == ()
    assert trap is not None
    assert trap_from(shown[1].replace("48 mm", "46 mm"), "three.trap.toml")[1]
