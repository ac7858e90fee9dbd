"""A small case with every kind of output, compiled and made by hand, and its view."""

from __future__ import annotations

import shutil
import sys
from pathlib import Path

import pytest

from wellseq.base.data import data_folder
from wellseq.checks.case import Case
from wellseq.emit.pictures.view import View, view
from wellseq.pipeline import compile_file

sys.path.append(str(Path(__file__).resolve().parents[1] / "emit"))


@pytest.fixture(scope="session")
def first(tmp_path_factory: pytest.TempPathFactory) -> Case:
    """The sequence that `wellseq new` writes, compiled."""
    folder = tmp_path_factory.mktemp("first") / "start"
    shutil.copytree(data_folder("grammar") / "start", folder)
    return compile_file(folder / "first.well", shown="first.well")


@pytest.fixture(scope="session")
def first_view(first: Case) -> View:
    """What the pictures of it show."""
    return view(first)
