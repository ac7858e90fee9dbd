"""A folder is published whole or not at all; what stood there stands there until then."""

from __future__ import annotations

import os
import resource
import shutil
import signal
from collections.abc import Callable, Iterator, Sequence
from pathlib import Path

import made_case
import pytest

from wellseq.base.finding import Finding, Verdict
from wellseq.base.place import Place
from wellseq.checks.judging import Cleared
from wellseq.emit import lock, swap
from wellseq.emit.publish import CannotPublish, Miswritten, write_folder
from wellseq.reread.folder import verify

ROOT = str(Path(swap.__file__).parents[2])


def fine(folder: Path) -> Sequence[Finding]:
    return ()


def everything(folder: Path) -> dict[str, bytes]:
    return {
        path.relative_to(folder).as_posix(): path.read_bytes()
        for path in sorted(folder.rglob("*"))
        if path.is_file()
    }


def beside(folder: Path) -> list[str]:
    return sorted(path.name for path in folder.parent.iterdir())


@pytest.fixture
def target(tmp_path: Path) -> Path:
    return tmp_path / "out"


@pytest.fixture
def published(target: Path) -> Path:
    """An older folder, told apart from a new one by one more finding counted in its manifest."""
    older = made_case.cleared(findings=made_case.findings()[:2])
    write_folder(older, target, verify)
    return target


@pytest.mark.parametrize("second_time", [False, True])
def test_a_folder_is_written_and_nothing_is_left_beside_it(target: Path, second_time: bool) -> None:
    write_folder(made_case.cleared(), target, verify)
    if second_time:
        write_folder(made_case.cleared(), target, verify)
    assert beside(target) == ["out"]
    assert verify(target) == ()


def test_two_builds_give_the_same_bytes(tmp_path: Path) -> None:
    write_folder(made_case.cleared(), tmp_path / "one", verify)
    old = os.umask(0o077)
    try:
        write_folder(made_case.cleared(), tmp_path / "two", verify)
    finally:
        os.umask(old)
    assert everything(tmp_path / "one") == everything(tmp_path / "two")


def test_an_older_folder_is_replaced(published: Path) -> None:
    before = everything(published)
    write_folder(made_case.cleared(), published, verify)
    assert everything(published) != before


def test_an_empty_folder_may_be_filled(target: Path) -> None:
    target.mkdir()
    write_folder(made_case.cleared(), target, verify)
    assert verify(target) == ()


@pytest.mark.parametrize("key", [None, "yes", made_case.case()])
def test_only_a_key_opens_the_writer(target: Path, key: object) -> None:
    with pytest.raises(TypeError):
        write_folder(key, target, fine)  # type: ignore[arg-type]
    assert not target.exists()


def test_a_key_cannot_be_made_for_what_is_not_clear(target: Path) -> None:
    blocked = made_case.case(not_run=(("well-lost", "no wells"),), ran=())
    with pytest.raises(ValueError, match="cleared"):
        Cleared(blocked)


def test_a_forged_key_is_refused(target: Path) -> None:
    forged = object.__new__(Cleared)
    object.__setattr__(forged, "case", made_case.case(ran=()))
    with pytest.raises(TypeError):
        write_folder(forged, target, fine)


def _foreign(target: Path) -> Iterator[tuple[str, Callable[[], None]]]:
    elsewhere = target.parent / "elsewhere"

    def link() -> None:
        elsewhere.mkdir()
        target.symlink_to(elsewhere)

    def dangling() -> None:
        target.symlink_to(elsewhere)

    def someone_elses() -> None:
        target.mkdir()
        (target / "thesis.tex").write_text("years of work")

    def with_a_manifest_of_its_own() -> None:
        target.mkdir()
        (target / "manifest.json").write_text('{"files": {"thesis.tex": {}}}')
        (target / "thesis.tex").write_text("years of work")

    def added_to() -> None:
        write_folder(made_case.cleared(), target, fine)
        (target / "notes.txt").write_text("tuned by hand")

    def holds_a_link() -> None:
        write_folder(made_case.cleared(), target, fine)
        (target / "sources" / "home").symlink_to(target.parent)

    yield "link", link
    yield "dangling", dangling
    yield "file", lambda: target.write_text("a file") and None
    yield "someone_elses", someone_elses
    yield "manifest_of_its_own", with_a_manifest_of_its_own
    yield "added_to", added_to
    yield "holds_a_link", holds_a_link


@pytest.mark.parametrize("which", [name for name, _ in _foreign(Path("x"))])
def test_what_is_not_ours_is_left_alone(target: Path, which: str) -> None:
    dict(_foreign(target))[which]()
    before = everything(target.parent)
    with pytest.raises(CannotPublish):
        write_folder(made_case.cleared(), target, fine)
    assert everything(target.parent) == before


@pytest.mark.parametrize("name", [".", "/", "..", "x/..", "nowhere/out"])
def test_a_target_must_be_a_new_name_in_a_folder(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, name: str
) -> None:
    monkeypatch.chdir(tmp_path)
    with pytest.raises(CannotPublish):
        write_folder(made_case.cleared(), Path(name), fine)
    assert list(tmp_path.iterdir()) == []


def test_what_does_not_read_back_is_not_published(published: Path) -> None:
    before = everything(published)
    wrong = Finding("table-unsound", Verdict.FAIL, "a cell is wrong", Place("block-1-run.csv"))
    with pytest.raises(Miswritten, match="a cell is wrong"):
        write_folder(made_case.cleared(), published, lambda folder: (wrong,))
    assert everything(published) == before
    assert beside(published) == ["out"]


def test_two_writers_at_once_are_told(published: Path) -> None:
    before = everything(published)
    with (
        lock.sole_writer(published.with_name(".out.wellseq-lock")),
        pytest.raises(CannotPublish, match="another wellseq"),
    ):
        write_folder(made_case.cleared(), published, fine)
    assert everything(published) == before


def test_leftovers_of_a_killed_build_are_cleaned(published: Path) -> None:
    leftover = published.with_name(".out.wellseq-new")
    shutil.copytree(published, leftover)
    published.with_name(".out.wellseq-lock").write_text("")
    outside = published.parent / "outside"
    outside.mkdir()
    (outside / "keep.txt").write_text("keep")
    published.with_name(".out.wellseq-old").symlink_to(outside)
    write_folder(made_case.cleared(), published, verify)
    assert beside(published) == ["out", "outside"]
    assert (outside / "keep.txt").read_text() == "keep"


def test_a_folder_put_aside_by_a_killed_build_comes_back(published: Path) -> None:
    before = everything(published)
    published.rename(published.with_name(".out.wellseq-old"))
    with pytest.raises(Miswritten):
        write_folder(made_case.cleared(), published, lambda folder: _one_wrong())
    assert everything(published) == before


def _one_wrong() -> Sequence[Finding]:
    return (Finding("table-unsound", Verdict.FAIL, "", Place("x")),)


class Failing:
    """The n-th call of a function fails as a full or broken disk does."""

    def __init__(self, real: Callable[..., object], nth: int) -> None:
        self.real, self.left = real, nth

    def __call__(self, *arguments: object, **named: object) -> object:
        self.left -= 1
        if self.left == 0:
            raise OSError(28, "No space left on device", str(arguments[0]))
        return self.real(*arguments, **named)


@pytest.mark.parametrize("exchanging", [True, False])
@pytest.mark.parametrize("call", ["mkdir", "open", "fsync", "rename", "exchange"])
def test_every_failing_call_leaves_the_old_folder(
    published: Path, monkeypatch: pytest.MonkeyPatch, call: str, exchanging: bool
) -> None:
    if not exchanging:
        monkeypatch.setattr(swap, "exchange", lambda one, other: False)
    keys = [made_case.cleared(), made_case.cleared(findings=made_case.findings()[:2])]
    standing = everything(published)
    refused, written, told = 0, 0, ""
    for nth in range(1, 200):
        owner = swap if call == "exchange" else os
        failing = Failing(getattr(owner, call), nth)
        with monkeypatch.context() as patch:
            patch.setattr(owner, call, failing)
            try:
                write_folder(keys[written % 2], published, verify)
            except (CannotPublish, Miswritten) as why:
                told = str(why)
                assert everything(published) == standing
                refused += 1
                continue
        assert verify(published) == ()
        assert everything(published) != standing
        standing = everything(published)
        written += 1
        if failing.left > 0:
            break
    else:
        pytest.fail("the writer never got through")
    assert beside(published) == ["out"]
    # With an exchange nothing is renamed.
    assert (refused > 0) is not (call == "rename" and exchanging)
    assert "no space left" in told or not refused


def test_a_full_disk_leaves_the_old_folder(published: Path) -> None:
    before = everything(published)
    soft, hard = resource.getrlimit(resource.RLIMIT_FSIZE)
    ignored = signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
    resource.setrlimit(resource.RLIMIT_FSIZE, (50_000, hard))
    try:
        with pytest.raises(CannotPublish, match="file too large"):
            write_folder(made_case.cleared(), published, fine)
    finally:
        resource.setrlimit(resource.RLIMIT_FSIZE, (soft, hard))
        signal.signal(signal.SIGXFSZ, ignored)
    assert everything(published) == before
    assert beside(published) == ["out"]


def test_the_two_ways_of_swapping_do_the_same(
    published: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    other = tmp_path / "other"
    shutil.copytree(published, other)
    write_folder(made_case.cleared(), published, verify)
    monkeypatch.setattr(swap, "exchange", lambda one, two: False)
    write_folder(made_case.cleared(), other, verify)
    assert everything(published) == everything(other)
