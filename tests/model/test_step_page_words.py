"""The page of every step: its headings, its words as in the code, an example that is sound."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from wellseq.base.data import data_folder
from wellseq.model.build import build
from wellseq.model.reader import signature
from wellseq.model.steps import step_class, verbs
from wellseq.text.parse import parse

HEADINGS = [
    "What it says",
    "Words",
    "What is drawn",
    "What is checked",
    "Example",
    "What it leaves out",
]
ROW = re.compile(r"^\| `(\w+)` \| (.+?) \| (.*?) ?\|$", re.MULTILINE)
EXAMPLE = re.compile(r"^```well\n(.*?)^```$", re.MULTILINE | re.DOTALL)
TRAP = Path(__file__).parents[1] / "pages" / "page.trap.toml"


def page(verb: str) -> str:
    return (data_folder("grammar") / "steps" / f"{verb}.md").read_text("utf-8")


def unlike_the_code(verb: str, text: str) -> list[str]:
    """The words of a page that are not those of the step, or are said to be of another unit."""
    kind = step_class(verb)
    assert kind is not None
    taken = signature(kind)
    rows = {word: (what, unit) for word, what, unit in ROW.findall(text)}
    slots = {**taken.clauses, **taken.words}
    wrong = [f"{word} is missing" for word in slots if word not in rows]
    wrong += [f"{word} is not taken" for word in rows if word.islower() and word not in slots]
    if sum(word.isupper() for word in rows) != len(taken.subjects):
        wrong.append("not as many subjects as the step has")
    for word, slot in slots.items():
        what, unit = rows.get(word, ("", ""))
        if slot.required == ("optional" in what):
            wrong.append(f"{word} may be left out, or may not")
        if slot.takes.what == "quantity" and slot.takes.unit and unit != slot.takes.unit:
            wrong.append(f"{word} is in {slot.takes.unit}")
    return wrong


@pytest.mark.parametrize("verb", verbs())
def test_a_page_has_its_headings_and_is_short(verb):
    text = page(verb)
    assert text.startswith(f"# {verb}\n")
    assert re.findall(r"^## (.+)$", text, re.MULTILINE) == HEADINGS
    assert len(text.splitlines()) < 60
    assert max(map(len, text.splitlines())) <= 100


@pytest.mark.parametrize("verb", verbs())
def test_a_page_names_the_words_that_the_step_takes(verb):
    assert unlike_the_code(verb, page(verb)) == []


def test_a_page_with_a_word_too_many_or_in_another_unit_is_found_out():
    text = page("hold").replace("| `for` | how long | s |", "| `for` | how long | V |")
    assert unlike_the_code("hold", text) == ["for is in s"]
    text = page("hold").replace("`for` |", "`over` |")
    assert unlike_the_code("hold", text) == ["for is missing", "over is not taken", "for is in s"]


@pytest.mark.parametrize("verb", verbs())
def test_its_example_is_a_whole_file_in_which_nothing_is_wrong(verb, tmp_path):
    (text,) = EXAMPLE.findall(page(verb))
    (tmp_path / "page.trap.toml").write_bytes(TRAP.read_bytes())
    built = build(
        parse(text, "page.well"),
        tmp_path / "page.well",
        known_findings=["lag-too-long"],
    )
    assert built.mistakes == ()
    assert built.sequence is not None
    assert verb in str(built.sequence.items)


def test_every_page_is_of_a_step():
    pages = sorted(path.stem for path in (data_folder("grammar") / "steps").glob("*.md"))
    assert pages == list(verbs())
