"""Only `Cleared` opens the writer of tables to play; a draft says everywhere that it is one."""

from __future__ import annotations

import ast
import json
from dataclasses import replace
from functools import cache
from pathlib import Path

import made_case
import pytest

from wellseq import emit
from wellseq.base.finding import Verdict
from wellseq.checks.case import Case
from wellseq.checks.judging import Cleared, clear
from wellseq.emit.keys import Draft, opens
from wellseq.emit.publish import CannotPublish, write_folder
from wellseq.reread.folder import verify, verify_draft

DOORS = ("contents", "write_folder", "lines", "Poured", "Cleared", "Draft", "write_new")


def blocked() -> Case:
    """The made case with a finding against it."""
    failing = replace(made_case.findings()[1], verdict=Verdict.FAIL)
    return made_case.case(findings=(failing,))


def test_a_case_with_findings_opens_nothing_but_a_draft() -> None:
    assert clear(blocked()) is None
    assert opens(Draft(blocked()))
    assert not opens(blocked())
    assert not opens(None)
    forged = object.__new__(Cleared)
    object.__setattr__(forged, "case", blocked())
    assert not opens(forged)


def test_a_case_without_tables_has_no_draft() -> None:
    with pytest.raises(ValueError, match="without tables"):
        Draft(made_case.case(shipped=None))


@pytest.fixture
def draft(tmp_path: Path) -> Path:
    folder = tmp_path / "night-draft"
    write_folder(Draft(blocked()), folder, verify_draft)
    return folder


def test_a_draft_says_what_it_is_and_what_stands_against_it(draft: Path) -> None:
    document = json.loads((draft / "manifest.json").read_bytes())
    assert document["schema"] == "wellseq/draft"
    assert document["verdicts"]["fail"] == 1
    (against,) = document["stands_against_it"]
    assert (against["name"], against["verdict"]) == ("well-too-shallow", "fail")
    assert (against["file"], against["line"]) == ("night.well", 5)


def test_verify_refuses_a_draft(draft: Path) -> None:
    (finding,) = verify(draft)
    assert finding.name == "folder-is-draft"
    assert "well-too-shallow" in finding.message


def test_a_draft_renamed_is_still_refused(draft: Path) -> None:
    draft.rename(draft.with_name("night"))
    assert [one.name for one in verify(draft.with_name("night"))] == ["folder-is-draft"]


def test_a_clear_case_may_be_drafted_and_is_refused_all_the_same(tmp_path: Path) -> None:
    write_folder(Draft(made_case.case()), tmp_path / "x-draft", verify_draft)
    assert [one.name for one in verify(tmp_path / "x-draft")] == ["folder-is-draft"]


def test_the_name_of_a_draft_s_folder_must_say_so(tmp_path: Path) -> None:
    with pytest.raises(CannotPublish, match="ends in -draft"):
        write_folder(Draft(blocked()), tmp_path / "night", verify_draft)
    assert list(tmp_path.iterdir()) == []


def test_a_draft_is_replaced_by_the_next_one(draft: Path) -> None:
    write_folder(Draft(blocked()), draft, verify_draft)
    assert [path.name for path in draft.parent.iterdir()] == ["night-draft"]


def test_bytes_of_a_draft_are_read_back_before_it_is_there(draft: Path) -> None:
    (draft / "cautions.md").write_bytes(b"all is well\n")
    assert [one.name for one in verify_draft(draft)] == ["file-altered"]


@cache
def _index() -> dict[str, set[str]]:
    """Name → the files of the package in which it is called."""
    package = Path(emit.__path__[0]).parent
    found: dict[str, set[str]] = {}
    for path in package.rglob("*.py"):
        text = path.read_text("utf-8")
        if not any(f"{name}(" in text for name in DOORS):
            continue
        for node in ast.walk(ast.parse(text)):
            if isinstance(node, ast.Call):
                name = getattr(node.func, "id", "") or getattr(node.func, "attr", "")
                found.setdefault(name, set()).add(path.relative_to(package).as_posix())
    return found


def _calls(name: str) -> set[str]:
    return _index().get(name, set())


def test_there_is_no_other_path_to_a_table() -> None:
    """Whatever makes table bytes is called by the writer of folders alone, and that by its door.

    Rows are made into text by `lines` in two places: behind a key, and behind a folder that
    verified, which only a key can have made.
    """
    assert _calls("contents") == {"emit/publish.py"}
    assert _calls("write_folder") == {"pipeline.py"}
    tables = {"emit/files/table_csv.py", "emit/pour/csv.py"}
    assert tables <= _calls("lines")
    assert {path for path in _calls("lines") if path.startswith("emit/")} <= tables
    assert _calls("Poured") == {"pipeline.py"}
    assert _calls("Cleared") == {"checks/judging.py"}
    # Model and timeline have drafts of their own, which are no keys.
    drafts = {path for path in _calls("Draft") if not path.startswith(("model/", "timeline/"))}
    assert drafts == {"pipeline.py"}


def test_the_search_for_calls_finds_what_is_there() -> None:
    assert "emit/publish.py" in _calls("write_new")
    assert _calls("nobody_calls_this") == set()
