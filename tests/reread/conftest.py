"""The made case of `tests/emit` and a published folder of it for these tests."""

from __future__ import annotations

import shutil
import sys
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).parent.parent / "emit"))


@pytest.fixture(scope="session")
def made_folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """One published folder, to be copied and not touched."""
    import made_case

    from wellseq.emit.publish import write_folder

    folder = tmp_path_factory.mktemp("made") / "out"
    write_folder(made_case.cleared(), folder, lambda path: ())
    return folder


@pytest.fixture
def folder(made_folder: Path, tmp_path: Path) -> Path:
    """A fresh copy of the published folder."""
    return Path(shutil.copytree(made_folder, tmp_path / "out"))
