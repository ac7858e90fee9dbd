"""The manual of rules: its examples are judged, its tables and limits are those of the code.

A ```rules fence is a rules file of the page trap, whose lines get roles; a ```well fence after it
is a piece of a sequence that they are judged on.  Lines that are refused bear `# expect: NAME`.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from pathlib import Path

import pytest
from page_examples import FENCE as ANY_FENCE
from page_examples import HERE, sections, whole

from wellseq.base.data import data_folder
from wellseq.model import operands, rule_files, rule_settle, surroundings
from wellseq.model.hardware import ROLES
from wellseq.model.rule_files import house_trees
from wellseq.model.species import SPECIES
from wellseq.pipeline import compile_file
from wellseq.text import rules

PAGE = (data_folder("grammar") / "RULES.md").read_text("utf-8")
FENCE = re.compile(r"^```(rules|well)( refused)?\n(.*?)^```$", re.MULTILINE | re.DOTALL)
MARK = re.compile(r"#\s*expect:\s*(.+)$")
CODE = re.compile(r"`([^`]+)`")
Marks = set[tuple[str, int, str]]
"""`rules` or `well`, line of the fence, name of the finding."""
LINES = {
    'name = "valve"\n': 'name = "valve"\nrole = "shutter"\nsafe = "closed"\n',
    'name = "door"\n': 'name = "door"\nrole = "door"\nsafe = "shut"\n',
    "[site]\n": '[site]\nrules = ["page.rules"]\n',
}


@dataclass
class Example:
    """A rules file, and the pieces of a sequence that are judged by it."""

    rules: str
    refused: bool
    pieces: list[tuple[str, bool]] = field(default_factory=list)


def examples(page: str = PAGE) -> list[Example]:
    """All rules files of the page in order."""
    found: list[Example] = []
    for kind, refused, body in FENCE.findall(page):
        if kind == "rules":
            found.append(Example(body, bool(refused)))
        else:
            found[-1].pieces.append((body, bool(refused)))
    return found


def marks(text: str, kind: str, before: int = 0) -> Marks:
    """What the marks of a fence promise."""
    return {
        (kind, number, name.strip())
        for number, line in enumerate(text.splitlines(), start=1 + before)
        if (mark := MARK.search(line))
        for name in mark[1].split(",")
    }


def found(rules_text: str, piece: str, folder: Path) -> tuple[Marks, list[str]]:
    """The blocking findings of a piece under rules, and their messages."""
    trap = (HERE / "page.trap.toml").read_text("utf-8")
    for before, after in LINES.items():
        assert before in trap
        trap = trap.replace(before, after)
    (folder / "page.trap.toml").write_text(trap, "utf-8")
    (folder / "page.rules").write_text(rules_text, "utf-8")
    text = whole(piece)
    first_line = f"  {piece.splitlines()[0]}\n"
    text = text.replace(first_line, f"  expect door shut\n{first_line}", 1)
    (folder / "page.well").write_text(text, "utf-8")
    case = compile_file(folder / "page.well")
    first = text.splitlines().index(first_line.rstrip())
    places = {
        (one.place.file.rsplit(".", 1)[1], one.place.line, one.name)
        for one in case.findings
        if one.blocks
    }
    moved = {(kind, line - first if kind == "well" else line, name) for kind, line, name in places}
    return moved, [one.message for one in case.findings if one.blocks]


SITUATIONS = [
    (example, piece, refused)
    for example in examples()
    for piece, refused in (example.pieces or [("hold for 1 s\n", False)])
]


@pytest.mark.parametrize(("example", "piece", "refused"), SITUATIONS)
def test_an_example_does_what_it_says(
    example: Example, piece: str, refused: bool, tmp_path: Path
) -> None:
    promised = marks(example.rules, "rules") | marks(piece, "well")
    assert bool(promised) is (refused or example.refused)
    assert found(example.rules, piece, tmp_path)[0] == promised


def test_an_example_that_does_something_else_is_seen(tmp_path: Path) -> None:
    example = next(one for one in examples() if one.pieces)
    piece, _ = example.pieces[0]
    slower = piece.replace("hold for 20 ms", "hold for 60 ms")
    assert slower != piece
    assert found(example.rules, slower, tmp_path)[0] != marks(piece, "well")


# tables


def rows(heading: str, page: str = PAGE) -> list[list[str]]:
    """The rows of the first table under a heading, cell by cell."""
    lines = [line for line in sections(page)[heading].splitlines() if line.startswith("|")]
    return [[cell.strip() for cell in line.strip("|").split("|")] for line in lines[2:]]


def test_every_word_of_rules_is_listed_and_no_other() -> None:
    listed = CODE.findall(sections(PAGE)["Words"])
    assert sorted(listed) == sorted(rules.KEYWORDS)


def test_the_rules_of_the_house_are_those_of_their_files() -> None:
    house = [
        [f"`{rule.name.text}`", rule.text.partition(":")[2].strip()]
        for _, tree in house_trees()
        for rule in tree.rules
    ]
    assert rows("Rules of the house") == house


def test_every_rule_of_the_house_says_that_it_is_common_practice() -> None:
    comments = [rule.comment for _, tree in house_trees() for rule in tree.rules]
    assert len(comments) >= 7
    assert all("Common practice, no source." in comment for comment in comments)


def test_roles_and_species_are_those_of_the_code() -> None:
    said = " ".join(PAGE.split())
    assert f"`{ROLES[0]}`, `{ROLES[1]}`, `{ROLES[2]}` or `{ROLES[3]}`" in said
    assert ", ".join(f"`{name}`" for name in SPECIES) + " and `ion`" in said


def test_the_limits_are_those_of_the_code() -> None:
    said = {row[0]: row[1] for row in rows("Limits")}
    assert said == {
        "a rules file": f"{rule_files.BYTES_MAX // 10**6} MB",
        "files named by one trap": str(surroundings.RULES_FILES_MAX),
        "rules in all files together": str(rules.RULES_MAX),
        "words and signs in one rule": str(rules.RULE_LENGTH_MAX),
        "parentheses in one another": str(rules.NESTING_MAX),
        "times after `for` and `within` in one rule": str(rules.WINDOWS_MAX),
        "one such time": "1e7 s",
        "a number of times": str(rule_settle.COUNT_MAX),
    }
    assert operands.DURATION_MAX_s == 10**7


def test_every_sentence_of_the_table_can_be_read() -> None:
    for row in rows("Sentences"):
        for words in CODE.findall(row[0]):
            text = words.replace("N times", "3 times").replace("within T", "within 2 s")
            text = re.sub(r"\bA\b", "catch", re.sub(r"\bB\b", "valve open", text))
            tree = rules.parse_rules(f"rule one: {text}", "one.rules")
            assert [one.message for one in tree.mistakes] == [], words


def test_every_condition_of_the_table_can_be_read() -> None:
    found_ = 0
    for row in rows("Conditions"):
        for words in CODE.findall(row[0]):
            text = words.replace("…", "G1 beyond 2 V")
            if text in ("below", "beyond") or text.startswith("between"):
                text = f"C3 {text}" + ("" if text.startswith("between") else " 5 V")
            if text in ("temperature", "depth", "position"):
                text += " above 5 V"
            tree = rules.parse_rules(f"rule one: forbid {text}", "one.rules")
            assert [one.message for one in tree.mistakes] == [], words
            found_ += 1
    assert found_ > 20


def test_the_fences_of_the_page_are_all_of_a_known_kind() -> None:
    kinds = {kind for kind, _ in ANY_FENCE.findall(PAGE.replace(" refused", ""))}
    assert kinds == {"rules", "well", "toml"}
    assert max(map(len, PAGE.splitlines())) <= 110
