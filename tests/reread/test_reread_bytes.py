"""Any change of any byte is found, and nothing that stands in a folder makes the reader fail."""

from __future__ import annotations

import ast
import json
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from resealing import reseal

from wellseq import reread
from wellseq.reread.folder import CHECKS, verify


def names(folder: Path) -> list[str]:
    return [finding.name for finding in verify(folder)]


def test_a_folder_as_it_was_written_is_sound(folder: Path) -> None:
    assert verify(folder) == ()


def test_a_resealed_folder_without_changes_is_sound(folder: Path) -> None:
    # Companion of every test that reseals: the forger's tool alone leaves nothing to find.
    before = (folder / "manifest.json").read_bytes()
    reseal(folder)
    assert (folder / "manifest.json").read_bytes() == before
    assert verify(folder) == ()


def test_one_flipped_bit_anywhere_is_found(folder: Path) -> None:
    """Every 23rd byte of the manifest and a hundred bytes spread over each other file."""
    for path in sorted(path for path in folder.rglob("*") if path.is_file()):
        content = path.read_bytes()
        step = 23 if path.name == "manifest.json" else max(1, len(content) // 100)
        for at in range(0, len(content), step):
            bent = bytearray(content)
            bent[at] ^= 1 << (at % 8)
            path.write_bytes(bytes(bent))
            assert names(folder), (path, at)
        path.write_bytes(content)
    assert verify(folder) == ()


@pytest.mark.parametrize("cut", [0, 1, 100])
def test_a_cut_off_file_is_found(folder: Path, cut: int) -> None:
    for path in sorted(path for path in folder.rglob("*") if path.is_file()):
        content = path.read_bytes()
        path.write_bytes(content[: -1 - cut])
        assert names(folder)
        path.write_bytes(content)


def _spoil(folder: Path, how: str) -> None:
    ways: dict[str, Callable[[], object]] = {
        "file-missing": (folder / "claims.json").unlink,
        "file-strange": lambda: (folder / "extra.csv").write_text("tick\r\n"),
        "file-strange folder": (folder / "empty").mkdir,
        "file-strange link": lambda: (folder / "link").symlink_to(folder),
        "file-altered": lambda: (folder / "cautions.md").write_text("all is well\n"),
        "file-altered longer": lambda: _append(folder / "cautions.md"),
        "file-altered link": lambda: _swap_for_link(folder / "cautions.md"),
        "file-altered pipe": lambda: _swap_for_pipe(folder / "cautions.md"),
        "folder-unreadable": (folder / "manifest.json").unlink,
        "folder-unreadable link": lambda: _swap_for_link(folder / "manifest.json"),
    }
    ways[how]()


def _swap_for_link(path: Path) -> None:
    path.rename(path.parent.parent / "moved")
    path.symlink_to(path.parent.parent / "moved")


def _append(path: Path) -> None:
    path.write_text(path.read_text("utf-8") + "\n", "utf-8")


def _swap_for_pipe(path: Path) -> None:
    path.unlink()
    os.mkfifo(path)


@pytest.mark.parametrize(
    "how",
    [
        "file-missing",
        "file-strange",
        "file-strange folder",
        "file-strange link",
        "file-altered",
        "file-altered longer",
        "file-altered link",
        "file-altered pipe",
        "folder-unreadable",
        "folder-unreadable link",
    ],
)
def test_what_is_missing_strange_or_altered_has_its_name(folder: Path, how: str) -> None:
    _spoil(folder, how)
    assert set(names(folder)) == {how.split()[0]}


def test_no_folder_is_a_finding_too(tmp_path: Path) -> None:
    assert names(tmp_path / "nowhere") == ["folder-unreadable"]
    (tmp_path / "file").write_text("x")
    assert names(tmp_path / "file") == ["folder-unreadable"]


@pytest.mark.parametrize(
    "text",
    [
        "",
        "{}",
        "[]",
        "null",
        "[" * 100_000,
        '{"schema": "wellseq/folder", "schema": 1}',
        '{"a": NaN}',
        '{"a": 1e999}',
        '{"a": ' + "9" * 5000 + "}",
        '{"a": "\\ud800"}',
        "\ufeff{}",
        "\x00",
    ],
)
def test_a_manifest_of_nonsense_is_a_finding(folder: Path, text: str) -> None:
    (folder / "manifest.json").write_text(text, "utf-8")
    assert names(folder) == ["manifest-unsound"]


def _paths(value: object, path: tuple[object, ...] = ()) -> list[tuple[object, ...]]:
    found = [path] if path else []
    if isinstance(value, dict):
        for key, inner in value.items():
            found += _paths(inner, (*path, key))
    elif isinstance(value, list):
        for at, inner in enumerate(value):
            found += _paths(inner, (*path, at))
    return found


nonsense = st.sampled_from(
    [None, True, -1, 0, 2**70, 1.5, 1e308, -1e-320, "", "1/0", "1/3", "x", [], {}, [[]], [1]]
)


@settings(
    max_examples=100, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(st.data())
def test_a_resealed_manifest_with_anything_in_it_never_raises(
    folder: Path, data: st.DataObject
) -> None:
    path = folder / "manifest.json"
    before = path.read_bytes()
    document = json.loads(before)
    places = [place for place in _paths(document) if place[0] not in ("files", "digest")]
    place = data.draw(st.sampled_from(places))
    value = data.draw(nonsense)

    def change(manifest: dict[str, object]) -> None:
        inner: object = manifest
        for key in place[:-1]:
            inner = inner[key]  # type: ignore[index]
        inner[place[-1]] = value  # type: ignore[index]

    reseal(folder, change)
    found = verify(folder)
    path.write_bytes(before)
    assert {finding.name for finding in found} <= set(CHECKS)


def test_no_import_of_the_second_reader_reaches_beyond_the_ground_floor() -> None:
    """Also none inside a function, which would only run later."""
    found = set()
    for file in Path(reread.__path__[0]).glob("*.py"):
        for node in ast.walk(ast.parse(file.read_text("utf-8"))):
            if isinstance(node, ast.Import):
                found |= {name.name for name in node.names}
            elif isinstance(node, ast.ImportFrom):
                assert node.level == 0
                found.add(str(node.module))
    ours = {name for name in found if name.partition(".")[0] == "wellseq"}
    assert "wellseq.base.finding" in ours
    assert all(name.startswith(("wellseq.base.", "wellseq.reread.")) for name in ours)
    assert {name.partition(".")[0] for name in found - ours} <= sys.stdlib_module_names
    assert not {"importlib", "pickle", "ctypes"} & {name.partition(".")[0] for name in found}


def test_the_second_reader_shares_no_code_with_the_writer() -> None:
    """It may import of wellseq nothing but the words of the ground floor, and of others nothing."""
    root = str(Path(reread.__path__[0]).parents[1])
    options: dict[str, Any] = {
        "capture_output": True,
        "text": True,
        "check": True,
        "env": {**os.environ, "PYTHONPATH": root},
    }
    code = (
        "import sys; before = set(sys.modules); import wellseq.reread.folder; "
        "print(*sorted(set(sys.modules) - before))"
    )
    run = subprocess.run([sys.executable, "-c", code], **options)
    loaded = run.stdout.split()
    ours = [name for name in loaded if name.startswith("wellseq.")]
    allowed = ("wellseq.base", "wellseq.reread", "wellseq.version")
    assert ours
    assert [name for name in ours if not name.startswith(allowed)] == []
    outside = {name.partition(".")[0] for name in loaded} - set(sys.stdlib_module_names)
    assert outside == {"wellseq"}
    # The yardstick can fail: the writer does load what is forbidden here.
    writer = code.replace("reread.folder", "emit.publish")
    run = subprocess.run([sys.executable, "-c", writer], **options)
    assert "numpy" in run.stdout.split()
