"""`compare` from its words to its exit status: files, folders, published folders, revisions."""

from __future__ import annotations

import json
from pathlib import Path

import pytest


@pytest.fixture
def changed(bench: Path) -> Path:
    """A second sequence beside the first, with a lower wall."""
    text = (bench / "first.well").read_text("utf-8")
    (bench / "second.well").write_text(text.replace("wall = 50 V", "wall = 40 V"), "utf-8")
    return bench


def test_worse_is_1_and_better_is_0(changed: Path, wellseq) -> None:
    code, out, _ = wellseq("compare", "first.well", "second.well")
    assert code == 1
    assert "WORSE" in out
    text = (changed / "first.well").read_text("utf-8")
    (changed / "slower.well").write_text(text.replace("over 20 ms", "over 30 ms"), "utf-8")
    assert wellseq("compare", "first.well", "slower.well")[0] == 0
    assert wellseq("compare", "slower.well", "first.well")[0] == 1
    assert wellseq("compare", "slower.well", "first.well", "--tolerance", "90%")[0] == 0


def test_a_published_folder_is_compared_by_its_own_copies(changed: Path, wellseq) -> None:
    assert wellseq("build", "first.well", "-o", "out", "--let", "wall=45 V")[0] == 0
    _, out, _ = wellseq("compare", "out", "first.well")
    assert "-45 V → -50 V" in out
    assert wellseq("compare", "out", "out")[1].endswith("nothing physical changed\n")


def test_one_value_of_an_each_is_compared_as_it_was_built(changed: Path, wellseq, spoil) -> None:
    spoil("hold for 10 s", "each pause of 1 s, 2 s { hold for pause }")
    assert wellseq("build", "first.well", "-o", "out", "--each")[0] == 0
    _, out, _ = wellseq("compare", "out-1", "out-2")
    assert "duration" in out or "is gone" in out
    assert "content-differs" not in out


def test_a_folder_that_was_changed_is_not_believed(changed: Path, wellseq) -> None:
    wellseq("build", "first.well", "-o", "out")
    (path,) = (changed / "out" / "sources").glob("*.well")
    path.write_text(path.read_text("utf-8").replace("50 V", "40 V"), "utf-8")
    code, out, _ = wellseq("compare", "out", "first.well")
    assert code == 1
    assert "the old side was not examined wholly" in out


def test_revisions(bench: Path, git, wellseq, spoil) -> None:
    spoil("wall = 50 V", "wall = 40 V")
    assert wellseq("compare", "HEAD:first.well", "first.well")[0] == 1
    assert wellseq("compare", "HEAD:first.well", "HEAD:first.well")[0] == 0
    code, out, _ = wellseq("compare", "HEAD:.", ".", "--format", "json")
    assert code == 1
    assert [one["name"] for one in json.loads(out)["sequences"]] == ["first.well"]


def test_folders_are_compared_name_by_name(bench: Path, git, wellseq) -> None:
    (bench / "second.well").write_bytes((bench / "first.well").read_bytes())
    code, out, _ = wellseq("compare", "HEAD:.", ".")
    assert code == 0
    assert "first.well: HEAD:. → .: nothing physical changed" in out
    assert "second.well: HEAD:. → .: it is new, and is clear" in out
    code, out, _ = wellseq("compare", ".", "HEAD:.")
    assert "it is not there any more" in out


@pytest.mark.parametrize(
    ("old", "said"),
    [
        ("nowhere.well", "there is no file or folder 'nowhere.well'"),
        ("no-such:first.well", "there is no git revision 'no-such'"),
        ("HEAD:nowhere.well", "there is no 'nowhere.well' at that revision"),
        ("empty", "no sequence stands in 'empty'"),
    ],
)
def test_nothing_to_compare_with_is_66(bench: Path, git, wellseq, old: str, said: str) -> None:
    (bench / "empty").mkdir()
    code, out, told = wellseq("compare", old, "first.well")
    assert (code, out) == (66, "")
    assert said in told


def test_one_and_several_cannot_be_compared(bench: Path, wellseq) -> None:
    assert wellseq("compare", ".", "first.well")[0] == 64


def test_a_side_with_mistakes_is_no_success(bench: Path, git, wellseq, spoil) -> None:
    spoil("hold for 10 s", "hold for 10 V")
    code, out, _ = wellseq("compare", "HEAD:first.well", "first.well")
    assert code == 1
    assert "the new side was not examined wholly" in out
    assert "[unit-mismatch]" in out


@pytest.mark.parametrize("share", ["-1", "x", "nan", "inf"])
def test_a_tolerance_is_a_share(bench: Path, wellseq, share: str) -> None:
    words = ("compare", "first.well", "first.well", f"--tolerance={share}")
    assert wellseq(*words)[0] == 64
