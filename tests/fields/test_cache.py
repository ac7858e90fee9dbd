"""The cache: found by content, never believed blindly, never in the way."""

import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from stacks import pitched

from wellseq.fields import cache
from wellseq.fields.field import Field

ROOT = Path(__file__).resolve().parents[2]
TABLE = np.arange(12.0).reshape(3, 4)
KEY = cache.key_of(["test", 1.0])


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.setenv("WELLSEQ_CACHE", str(tmp_path / "store"))
    return tmp_path / "store"


def remember(key=KEY, shape=TABLE.shape, table=TABLE):
    """The array, and whether it had to be built."""
    built = []

    def build():
        built.append(True)
        return table

    return cache.remembered(key, shape, build), bool(built)


def test_built_once_then_found(folder):
    assert remember()[1]
    found, built = remember()
    assert not built
    np.testing.assert_array_equal(found, TABLE)
    assert [path.name for path in folder.iterdir()] == [f"{KEY}.npy"]


def test_an_entry_is_a_plain_npy_file(folder):
    remember()
    np.testing.assert_array_equal(np.load(folder / f"{KEY}.npy", allow_pickle=False), TABLE)


def test_every_flipped_byte_and_every_cut_is_seen(folder):
    remember()
    path = folder / f"{KEY}.npy"
    sound = path.read_bytes()
    for place in range(len(sound)):
        path.write_bytes(sound[:place] + bytes([sound[place] ^ 1]) + sound[place + 1 :])
        found, built = remember()
        assert built, place
        np.testing.assert_array_equal(found, TABLE)
        assert path.read_bytes() == sound
    for length in (0, 1, 80, len(sound) - 33, len(sound) - 1):
        path.write_bytes(sound[:length])
        assert remember()[1], length
    path.write_bytes(sound + b"x")
    assert remember()[1]


def test_an_entry_under_another_name_or_of_another_shape_is_not_believed(folder):
    remember()
    other = cache.key_of(["test", 2.0])
    (folder / f"{KEY}.npy").rename(folder / f"{other}.npy")
    assert remember(other)[1]
    assert remember(other, (4, 3), TABLE.reshape(4, 3))[1]


def test_a_pickle_is_never_loaded(folder):
    folder.mkdir()
    np.save(folder / f"{KEY}.npy", np.array([{"a": 1}], dtype=object), allow_pickle=True)
    body = (folder / f"{KEY}.npy").read_bytes()
    digest = cache._digest(KEY, memoryview(body))
    (folder / f"{KEY}.npy").write_bytes(body + digest)
    size = (len(body) - 128) // 8
    assert cache._load(folder / f"{KEY}.npy", KEY, (size,)) is None


def test_a_giant_is_not_read(folder, monkeypatch):
    folder.mkdir()
    with (folder / f"{KEY}.npy").open("wb") as file:
        file.truncate(10**9)
    monkeypatch.setattr(cache, "_digest", lambda *_: pytest.fail("the giant was read"))
    assert cache._load(folder / f"{KEY}.npy", KEY, TABLE.shape) is None


def test_a_folder_that_cannot_be_is_no_cache(tmp_path, monkeypatch):
    (tmp_path / "file").write_text("in the way")
    for place in (tmp_path / "file", tmp_path / "file" / "below"):
        monkeypatch.setenv("WELLSEQ_CACHE", str(place))
        assert remember()[1]
        assert remember()[1]
    assert (tmp_path / "file").read_text() == "in the way"


def test_a_full_disk_leaves_nothing_behind(folder, monkeypatch):
    def refuse(*_):
        raise OSError("no space left")

    monkeypatch.setattr(os, "replace", refuse)
    assert remember()[1]
    assert list(folder.iterdir()) == []


def test_the_oldest_go_first(folder, monkeypatch):
    monkeypatch.setattr(cache, "ENTRIES_MAX", 3)
    folder.mkdir()
    (folder / "killed.part").write_bytes(b"half")
    (folder / "note.txt").write_text("not ours")
    os.utime(folder / "killed.part", (1, 1))
    keys = [cache.key_of([f"entry {i}"]) for i in range(4)]
    for age, key in enumerate(keys):
        remember(key)
        os.utime(folder / f"{key}.npy", (10 + age, 10 + age))
    names = {path.name for path in folder.iterdir()}
    assert names == {f"{key}.npy" for key in keys[1:]} | {"note.txt"}


def test_the_key_sees_the_last_bit():
    assert cache.key_of(["a", 1.0]) != cache.key_of(["a", np.nextafter(1.0, 2.0).item()])
    assert cache.key_of(["a", 1.0]) != cache.key_of(["a", 1])
    assert cache.key_of(["ab", "c"]) != cache.key_of(["a", "bc"])


def test_platform_folders(monkeypatch, tmp_path):
    monkeypatch.delenv("WELLSEQ_CACHE")
    monkeypatch.setenv("HOME", str(tmp_path))
    monkeypatch.setenv("XDG_CACHE_HOME", "relative")
    monkeypatch.setattr(sys, "platform", "linux")
    assert cache.folder() == tmp_path / ".cache" / "wellseq"
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path / "xdg"))
    assert cache.folder() == tmp_path / "xdg" / "wellseq"
    monkeypatch.setattr(sys, "platform", "darwin")
    assert cache.folder() == tmp_path / "Library" / "Caches" / "wellseq"
    monkeypatch.setattr(sys, "platform", "win32")
    monkeypatch.setenv("LOCALAPPDATA", str(tmp_path / "local"))
    assert cache.folder() == tmp_path / "local" / "wellseq"


def test_without_a_home_there_is_no_cache(monkeypatch):
    monkeypatch.delenv("WELLSEQ_CACHE")
    monkeypatch.delenv("XDG_CACHE_HOME", raising=False)
    monkeypatch.setattr(sys, "platform", "linux")

    def nowhere():
        raise RuntimeError("no home")

    monkeypatch.setattr(Path, "home", nowhere)
    assert cache.folder() is None
    assert remember()[1]


def test_a_field_from_the_disk_is_the_field_that_was_solved(folder):
    trap = pitched(4)
    solved = Field(trap)
    entries = list(folder.iterdir())
    assert len(entries) == 1
    found = Field(trap)
    np.testing.assert_array_equal(found.phi, solved.phi)
    assert list(folder.iterdir()) == entries
    # A geometry that differs in the last bit is another one.
    Field(pitched(4, radius_m=np.nextafter(0.015, 1.0).item()))
    assert len(list(folder.iterdir())) == 2


def test_two_processes_at_once(folder):
    code = (
        "import hashlib, sys; sys.path.insert(0, sys.argv[1])\n"
        "from stacks import pitched\n"
        "from wellseq.fields.field import Field\n"
        "sums = {hashlib.sha256(Field(pitched(3 + i % 3)).phi.tobytes()).hexdigest()"
        " for i in range(30)}\n"
        "print(sorted(sums))\n"
    )
    command = [sys.executable, "-c", code, str(Path(__file__).parent)]
    environment = {**os.environ, "WELLSEQ_CACHE": str(folder), "PYTHONPATH": str(ROOT)}
    both = [
        subprocess.Popen(command, env=environment, stdout=subprocess.PIPE, text=True)
        for _ in range(2)
    ]
    said = [process.communicate(timeout=60)[0] for process in both]
    assert [process.returncode for process in both] == [0, 0]
    assert said[0] == said[1]
    assert said[0].count("'") == 6
    assert sorted(path.suffix for path in folder.iterdir()) == [".npy"] * 3
