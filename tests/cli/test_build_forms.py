"""`build --also` and `build --draft`: further forms, and tables that say they are a draft."""

from __future__ import annotations

import io
import json
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import h5py
import numpy as np
import pandas as pd
import pytest

import wellseq
from wellseq.emit.also import hdf5

Run = Callable[..., Any]
BUILD = ("build", "first.well", "-o", "tables")


def test_all_forms_are_written_and_verified(bench: Path, run: Run) -> None:
    assert run(*BUILD, "--also", "npz,hdf5").status == 0
    assert {"block-1-run.csv", "block-1-run.npz", "block-1-run.h5"} <= {
        path.name for path in (bench / "tables").iterdir()
    }
    done = run("verify", "tables")
    assert done.status == 0
    assert "depth worked out again at " in done.err


def test_pandas_h5py_and_numpy_read_the_same_block_to_the_code(bench: Path, run: Run) -> None:
    run(*BUILD, "--also", "npz,hdf5")
    table = pd.read_csv(bench / "tables" / "block-1-run.csv")
    with (
        np.load(bench / "tables" / "block-1-run.npz", allow_pickle=False) as held,
        h5py.File(bench / "tables" / "block-1-run.h5") as file,
    ):
        assert (held["tick"] == table["tick"].to_numpy()).all()
        assert (file["tick"][:] == table["tick"].to_numpy()).all()
        for at, name in enumerate(held["converters"]):
            codes = table[f"{name}.code"].to_numpy()
            data = file[f"codes/{name}"]
            assert (held["codes"][:, at] == codes).all()
            assert (data[:] == codes).all()
            volts = data[:] * data.attrs["scale_factor"] + data.attrs["add_offset"]
            assert np.abs(volts - table[f"{name}.V"]).max() < 1e-12
        identities = {str(held["content_id"]), file.attrs["content_id"]}
    manifest = json.loads((bench / "tables" / "manifest.json").read_bytes())
    described = json.loads((bench / "tables" / "block-1-run.csv-metadata.json").read_bytes())
    assert identities == {manifest["content_id"], described["dcterms:identifier"]}


@pytest.mark.parametrize("forms", ["parchment", "npz,", "NPZ", ""])
def test_a_form_that_is_none_is_wrong_usage(bench: Path, run: Run, forms: str) -> None:
    done = run(*BUILD, "--also", forms)
    assert done.status == 64
    assert "is none of hdf5, npz" in done.err
    assert not (bench / "tables").exists()


def test_without_its_library_a_form_is_refused_and_nothing_written(
    bench: Path, run: Run, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(hdf5, "find_spec", lambda name: None)
    done = run(*BUILD, "--also", "hdf5")
    assert done.status == 73
    assert "wellseq[hdf5]" in done.err
    assert not (bench / "tables").exists()


# drafts


@pytest.fixture
def tired(bench: Path) -> None:
    """A sequence that opens the well while electrons are in it."""
    path = bench / "first.well"
    text = path.read_text("utf-8").replace(
        '  "wait"\n', "  ramp { E4 = 20 V; E5 = 40 V } over 20 ms\n"
    )
    path.write_text(text, "utf-8")


@pytest.mark.usefixtures("tired")
def test_tables_with_findings_are_written_as_a_draft_only(bench: Path, run: Run) -> None:
    assert run(*BUILD).status == 1
    assert sorted(path.name for path in bench.iterdir()) == ["bench.trap.toml", "first.well"]
    done = run(*BUILD, "--draft", "--also", "npz")
    assert done.status == 1
    assert "tables-draft: written" in done.err
    assert "a DRAFT, not to be played" in done.err
    assert not (bench / "tables").exists()
    manifest = json.loads((bench / "tables-draft" / "manifest.json").read_bytes())
    assert manifest["schema"] == "wellseq/draft"
    assert manifest["stands_against_it"]
    assert (bench / "tables-draft" / "block-1-run.npz").exists()


@pytest.mark.usefixtures("tired")
def test_verify_and_pour_refuse_a_draft(bench: Path, run: Run) -> None:
    run(*BUILD, "--draft")
    done = run("verify", "tables-draft")
    assert done.status == 1
    assert "folder-is-draft" in done.out
    done = run("pour", "tables-draft", "--every", "1 ms", "-o", "x.csv")
    assert done.status == 1
    assert "nothing was poured" in done.err
    assert not (bench / "x.csv").exists()


def test_a_clear_sequence_drafted_is_still_a_draft(bench: Path, run: Run) -> None:
    assert run("build", "first.well", "-o", "x-draft", "--draft").status == 0
    assert run("verify", "x-draft").status == 1


def test_a_text_without_tables_has_no_draft(bench: Path, run: Run) -> None:
    path = bench / "first.well"
    path.write_text(path.read_text("utf-8").replace("hold for 1 s", "hold for"), "utf-8")
    done = run(*BUILD, "--draft")
    assert done.status == 1
    assert "no tables to draft" in done.err
    assert sorted(path.name for path in bench.iterdir()) == ["bench.trap.toml", "first.well"]


# the same bytes everywhere

ALSO = ("--also", "npz,hdf5")
ELSEWHERE = [
    {"PYTHONHASHSEED": "0", "TZ": "UTC"},
    {"PYTHONHASHSEED": "1", "TZ": "Pacific/Apia", "LC_ALL": "tr_TR.UTF-8"},
    {"PYTHONHASHSEED": "random", "LC_ALL": "de_DE", "LANG": "C", "COLUMNS": "40"},
    {"PYTHONUTF8": "0", "LC_ALL": "C", "HOME": "/nonexistent", "SOURCE_DATE_EPOCH": "1"},
]


def test_no_seed_zone_locale_umask_or_folder_changes_a_byte(bench: Path, tmp_path: Path) -> None:
    root = str(Path(wellseq.__file__).parents[1])
    trees = []
    for number, changed in enumerate(ELSEWHERE):
        place = tmp_path / f"place {number}"
        place.mkdir()
        for name in ("first.well", "bench.trap.toml"):
            (place / name).write_bytes((bench / name).read_bytes())
        where = [place, tmp_path, place, tmp_path][number]
        file = os.path.relpath(place / "first.well", where)
        old = os.umask([0o022, 0o077, 0o002, 0o000][number])
        try:
            subprocess.run(
                [sys.executable, "-m", "wellseq", "build", file, "-o", str(place / "out"), *ALSO],
                cwd=where,
                env={**os.environ, "PYTHONPATH": root, **changed},
                capture_output=True,
                check=True,
            )
        finally:
            os.umask(old)
        found = sorted(path for path in (place / "out").rglob("*") if path.is_file())
        trees.append({path.relative_to(place).as_posix(): path.read_bytes() for path in found})
    assert len(trees[0]) > 12
    for tree in trees[1:]:
        assert tree == trees[0]


def test_the_comparison_of_trees_can_fail(bench: Path, run: Run) -> None:
    run(*BUILD)
    before = io.BytesIO((bench / "tables" / "manifest.json").read_bytes())
    run(*BUILD, "--let", "wall=51 V")
    assert (bench / "tables" / "manifest.json").read_bytes() != before.getvalue()
