"""Answers kept on the disk: the same bytes again, and nothing believed that was altered."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from wellseq.clouds.memory import Memory


@pytest.fixture(autouse=True)
def place(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.setenv("WELLSEQ_CACHE", str(tmp_path))
    return tmp_path


def ask(memory: Memory, question: object, answer: object) -> object:
    return memory.answer(["model", question], lambda: answer)


def test_an_answer_comes_back_to_the_last_bit(place: Path) -> None:
    memory = Memory("a")
    first = ask(memory, 0.1, {"x": [0.1 + 0.2, math.inf, None, "why"]})
    memory.keep()
    again = ask(Memory("a"), 0.1, "not asked")
    assert again == first == {"x": [0.1 + 0.2, math.inf, None, "why"]}
    assert ask(Memory("a"), 0.1 + 1e-18, "the same float") == first
    assert ask(Memory("a"), 0.1 + 1e-16, "another") == "another"
    assert ask(Memory("b"), 0.1, "another thing") == "another thing"
    assert len(list(place.glob("*.answers"))) == 1


@pytest.mark.parametrize("cut", [0, 40, 80, -1])
def test_an_altered_file_is_worked_out_anew(place: Path, cut: int) -> None:
    memory = Memory("a")
    ask(memory, 1, "old")
    memory.keep()
    (path,) = place.glob("*.answers")
    content = path.read_bytes()
    path.write_bytes(content[:cut])
    assert ask(Memory("a"), 1, "new") == "new"
    path.write_bytes(content.replace(b"old", b"bad"))
    assert ask(Memory("a"), 1, "new") == "new"
    path.write_bytes(content)
    assert ask(Memory("a"), 1, "new") == "old"


def test_a_folder_that_cannot_be_written_is_no_cache(
    place: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (place / "file").write_text("no folder")
    monkeypatch.setenv("WELLSEQ_CACHE", str(place / "file"))
    memory = Memory("a")
    assert ask(memory, 1, "answer") == "answer"
    memory.keep()
