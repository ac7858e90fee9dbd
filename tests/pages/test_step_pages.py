"""The page of every step: headings, words as in its file, an example that does what it says."""

from __future__ import annotations

from pathlib import Path

import pytest
from manual_examples import examples, faults
from page_examples import sections

from wellseq.base.data import data_folder
from wellseq.model.operands import Slot
from wellseq.model.reader import signature
from wellseq.model.steps import step_class, verbs

HEADINGS = [
    "What it says",
    "Words",
    "What is drawn",
    "What is checked",
    "Example",
    "What it leaves out",
]


def page(verb: str) -> str:
    return (data_folder("grammar") / "steps" / f"{verb}.md").read_text("utf-8")


def words_of(text: str) -> dict[str, list[str]]:
    """The table of words: what stands in its first column, and the other cells."""
    lines = [line for line in sections(text)["Words"].splitlines() if line.startswith("|")]
    cells = [[cell.strip() for cell in line.strip("|").split("|")] for line in lines[2:]]
    return {row[0].strip("`"): row[1:] for row in cells}


def unlike_the_code(verb: str, text: str) -> list[str]:
    """What the table of words says otherwise than the step's file."""
    kind = step_class(verb)
    assert kind is not None
    takes = signature(kind)
    said = words_of(text)
    subjects = [word for word in said if word.isupper()]
    wrong = [] if len(subjects) == len(takes.subjects) else [f"{len(subjects)} subjects"]
    known = {**takes.clauses, **takes.words}
    wrong += sorted((set(said) - set(subjects)) ^ set(known))
    pairs = [*zip(subjects, takes.subjects, strict=False), *known.items()]
    for word, slot in pairs:
        if word in said:
            meaning, unit = said[word]
            wrong += (
                [f"{word}: optional or not"] if ("optional" in meaning) is slot.required else []
            )
            wrong += [f"{word}: not in {unit}"] if not _is_unit(unit, slot) else []
    return wrong


def _is_unit(said: str, slot: Slot) -> bool:
    if slot.takes.what not in ("quantity", "spread"):
        return said in ("", "V")  # the volts of a pattern or of a level
    if slot.takes.by:
        return all((unit or "none") in said for _, unit in slot.takes.units)
    return said == slot.takes.unit


@pytest.mark.parametrize("verb", verbs())
def test_a_page_has_its_headings_and_its_name(verb: str) -> None:
    text = page(verb)
    assert text.startswith(f"# {verb}\n")
    assert list(sections(text)) == HEADINGS
    assert all(part.strip() for part in sections(text).values())
    assert max(map(len, text.splitlines())) <= 100


@pytest.mark.parametrize("verb", verbs())
def test_its_examples_do_what_they_say(verb: str, tmp_path: Path) -> None:
    shown = examples(page(verb))
    assert any(f"\n  {verb} " in one.text or one.text.startswith(f"{verb} ") for one in shown)
    for number, example in enumerate(shown):
        folder = tmp_path / str(number)
        folder.mkdir()
        assert faults(example, folder) == []


@pytest.mark.parametrize("verb", verbs())
def test_its_words_are_those_of_the_code(verb: str) -> None:
    assert unlike_the_code(verb, page(verb)) == []


def test_no_page_is_left_over() -> None:
    pages = {path.stem for path in (data_folder("grammar") / "steps").glob("*.md")}
    assert pages == set(verbs())


# That these yardsticks can fail


@pytest.mark.parametrize(
    ("before", "after"),
    [
        ("| `over` |", "| `across` |"),
        ("half-cosine instead of a straight line, optional", "half-cosine"),
        ("how long it takes | s |", "how long it takes | V |"),
        ("| `smoothly` |", "| `SMOOTHLY` |"),
    ],
)
def test_a_word_that_was_changed_in_the_page_alone_is_seen(before: str, after: str) -> None:
    text = page("ramp")
    assert before in text
    assert unlike_the_code("ramp", text.replace(before, after))
