"""The files to start from in a folder of their own, and a server for all tests of a module."""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from pathlib import Path

import pytest
from lsp_client import Client

from wellseq.base.data import data_folder


@pytest.fixture(scope="module")
def client() -> Iterator[Client]:
    """A server over real pipes."""
    with Client() as one:
        yield one


@pytest.fixture
def bench(tmp_path: Path) -> Path:
    """A copy of the files to start from."""
    folder = tmp_path / "bench"
    shutil.copytree(data_folder("grammar") / "start", folder)
    return folder


@pytest.fixture
def first(bench: Path) -> Path:
    """The sequence among them."""
    return bench / "first.well"
