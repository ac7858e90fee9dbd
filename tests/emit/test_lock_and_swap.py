"""The two tools of the publisher by themselves."""

from __future__ import annotations

import multiprocessing
from pathlib import Path

import pytest

from wellseq.emit import lock, swap


def folder(path: Path, text: str) -> Path:
    path.mkdir()
    (path / "file").write_text(text)
    return path


def test_a_lock_is_held_by_one_and_gone_afterwards(tmp_path: Path) -> None:
    path = tmp_path / "lock"
    with lock.sole_writer(path):
        assert path.exists()
        with pytest.raises(BlockingIOError), lock.sole_writer(path):
            pytest.fail("two hold it")
    assert not path.exists()
    with lock.sole_writer(path):
        pass


def test_a_lock_file_left_by_a_killed_process_does_not_block(tmp_path: Path) -> None:
    (tmp_path / "lock").write_text("")
    with lock.sole_writer(tmp_path / "lock"):
        pass


def test_without_file_locks_an_exclusive_file_serves(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(lock, "fcntl", None)
    with (
        lock.sole_writer(tmp_path / "lock"),
        pytest.raises(BlockingIOError),
        lock.sole_writer(tmp_path / "lock"),
    ):
        pytest.fail("two hold it")
    assert not (tmp_path / "lock").exists()


def test_a_lock_is_no_link(tmp_path: Path) -> None:
    (tmp_path / "kept").write_text("kept")
    (tmp_path / "lock").symlink_to(tmp_path / "kept")
    with pytest.raises(OSError, match="symbolic"), lock.sole_writer(tmp_path / "lock"):
        pytest.fail("a link was followed")
    assert (tmp_path / "kept").read_text() == "kept"


def _hold(path: Path, ready: object, end: object) -> None:
    with lock.sole_writer(path):
        ready.set()  # type: ignore[attr-defined]
        end.wait(30)  # type: ignore[attr-defined]


def test_another_process_is_kept_out_and_its_death_frees_the_lock(tmp_path: Path) -> None:
    context = multiprocessing.get_context("spawn")
    ready, end = context.Event(), context.Event()
    process = context.Process(target=_hold, args=(tmp_path / "lock", ready, end))
    process.start()
    assert ready.wait(30)
    with pytest.raises(BlockingIOError), lock.sole_writer(tmp_path / "lock"):
        pytest.fail("two hold it")
    process.kill()
    process.join()
    with lock.sole_writer(tmp_path / "lock"):
        pass


def test_exchange_swaps_two_folders_where_the_system_can(tmp_path: Path) -> None:
    one, other = folder(tmp_path / "one", "1"), folder(tmp_path / "other", "2")
    if swap.exchange(one, other):
        assert (one / "file").read_text() == "2"
        assert (other / "file").read_text() == "1"
    else:
        assert (one / "file").read_text() == "1"


def test_restore_brings_back_only_what_is_missing(tmp_path: Path) -> None:
    aside = folder(tmp_path / "aside", "old")
    swap.restore(tmp_path / "target", aside)
    assert (tmp_path / "target" / "file").read_text() == "old"
    again = folder(tmp_path / "aside", "older")
    swap.restore(tmp_path / "target", again)
    assert (tmp_path / "target" / "file").read_text() == "old"


def test_remove_takes_a_link_and_not_what_it_points_to(tmp_path: Path) -> None:
    kept = folder(tmp_path / "kept", "kept")
    (tmp_path / "link").symlink_to(kept)
    swap.remove(tmp_path / "link")
    swap.remove(tmp_path / "nothing")
    assert (kept / "file").read_text() == "kept"
    assert not (tmp_path / "link").exists()
