"""Every test of the fields writes to a cache of its own, never to the user's."""

import sys
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).parent))


@pytest.fixture(autouse=True, scope="session")
def _own_cache(tmp_path_factory):
    patch = pytest.MonkeyPatch()
    patch.setenv("WELLSEQ_CACHE", str(tmp_path_factory.mktemp("cache")))
    yield
    patch.undo()
