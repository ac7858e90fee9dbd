"""Every write, flush and rename fails in turn: the old folder stands, and it ends with 73."""

from __future__ import annotations

import errno
import io
import os
import resource
import signal
from collections.abc import Callable
from pathlib import Path
from typing import Any

import made_case
import pytest

from wellseq.emit import single, swap
from wellseq.emit.also import hdf5
from wellseq.emit.publish import CannotPublish, write_folder
from wellseq.emit.single import write_whole
from wellseq.reread.folder import verify

FORMS = ("hdf5", "npz")


def everything(folder: Path) -> dict[str, bytes]:
    found = sorted(path for path in folder.rglob("*") if path.is_file())
    return {path.relative_to(folder).as_posix(): path.read_bytes() for path in found}


class Counting:
    """Calls to a kind of system call; the n-th fails."""

    def __init__(self, fails_at: int, number: int) -> None:
        self.left, self.number = fails_at, number

    def count(self) -> None:
        self.left -= 1
        if self.left == 0:
            raise OSError(self.number, os.strerror(self.number))

    def around(self, real: Callable[..., Any]) -> Callable[..., Any]:
        def called(*arguments: Any, **named: Any) -> Any:
            self.count()
            return real(*arguments, **named)

        return called


class FailingFile(io.RawIOBase):
    """A raw file whose writes are counted: each is one system call."""

    def __init__(self, descriptor: int, counting: Counting) -> None:
        super().__init__()
        self.descriptor, self.counting = descriptor, counting

    def writable(self) -> bool:
        return True

    def write(self, piece: Any) -> int:
        self.counting.count()
        return os.write(self.descriptor, piece)

    def fileno(self) -> int:
        return self.descriptor

    def close(self) -> None:
        if not self.closed:
            os.close(self.descriptor)
        super().close()


def _failing(patch: pytest.MonkeyPatch, call: str, counting: Counting) -> None:
    if call == "write":
        real = os.fdopen

        def fdopen(descriptor: int, mode: str, *rest: Any) -> Any:
            if "w" not in mode:
                return real(descriptor, mode, *rest)
            return io.BufferedWriter(FailingFile(descriptor, counting), 4096)

        patch.setattr(single.os, "fdopen", fdopen)
        return
    owner = swap if call == "exchange" else os
    patch.setattr(owner, call, counting.around(getattr(owner, call)))


@pytest.mark.parametrize("number", [errno.ENOSPC, errno.EIO])
@pytest.mark.parametrize(
    "call", ["open", "mkdir", "write", "fsync", "rename", "exchange", "unlink"]
)
def test_every_failing_call_leaves_the_old_folder(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, call: str, number: int
) -> None:
    target = tmp_path / "out"
    keys = [made_case.cleared(), made_case.cleared(findings=made_case.findings()[:2])]
    write_folder(keys[1], target, verify, FORMS)
    old = everything(target)
    if call == "rename":
        monkeypatch.setattr(swap, "exchange", lambda one, other: False)
    failed = 0
    # The first calls one by one, then with growing strides: the suite's share of the long trial.
    for at in (*range(1, 9), *range(9, 60, 7), *range(60, 400, 61)):
        counting = Counting(at, number)
        with monkeypatch.context() as patch:
            _failing(patch, call, counting)
            try:
                write_folder(keys[0], target, lambda folder: (), FORMS)
            except (CannotPublish, OSError):
                failed += 1
                assert everything(target) == old
                continue
        if counting.left > 0 or call == "unlink":
            # Nothing is unlinked but what is left over once everything is in place.
            break
        # The call came after everything was in place, for tidying up.
        write_folder(keys[1], target, lambda folder: (), FORMS)
        assert everything(target) == old
    assert failed > 0 or call in ("exchange", "unlink")
    write_folder(keys[0], target, verify, FORMS)
    assert sorted(path.name for path in tmp_path.iterdir()) == ["out"]


@pytest.mark.parametrize("limit", [100, 3000, 20_000])
def test_a_full_disk_under_the_scratch_file_is_told(tmp_path: Path, limit: int) -> None:
    """HDF5 grows on a scratch file, which may stand on a disk of its own."""
    soft, hard = resource.getrlimit(resource.RLIMIT_FSIZE)
    ignored = signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
    resource.setrlimit(resource.RLIMIT_FSIZE, (limit, hard))
    try:
        pieces = [piece for _, piece in hdf5.write(made_case.cleared())]
        with pytest.raises(CannotPublish, match="file too large"):
            write_whole(tmp_path / "block.h5", pieces[0])
    finally:
        resource.setrlimit(resource.RLIMIT_FSIZE, (soft, hard))
        signal.signal(signal.SIGXFSZ, ignored)
    assert list(tmp_path.iterdir()) == []
