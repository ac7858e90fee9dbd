"""`pour`: one block at a fixed rate, in every form, of a folder that verifies and of no other."""

from __future__ import annotations

import io
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

Run = Callable[..., Any]
ROOT = str(Path(wellseq.__file__).parents[1])


@pytest.fixture
def tables(bench: Path, run: Run) -> Path:
    assert run("build", "first.well", "-o", "tables").status == 0
    return bench / "tables"


def poured(run: Run, form: str, *more: str) -> Path:
    done = run("pour", "tables", "--every", "500 us", "--form", form, "-o", f"x.{form}", *more)
    assert done.status == 0, done.err
    return Path(f"x.{form}")


@pytest.mark.usefixtures("tables")
def test_all_forms_say_the_same(run: Run) -> None:
    table = pd.read_csv(poured(run, "csv"))
    array = np.load(poured(run, "npy"), allow_pickle=False)
    raw = np.fromfile(poured(run, "raw"), dtype="<u2").reshape(array.shape)
    assert (array == raw).all()
    assert (table["tick"].diff().dropna() == table["tick"][1]).all()
    names = [title.removesuffix(".code") for title in table if title.endswith(".code")]
    with h5py.File(poured(run, "hdf5")) as file:
        assert file.attrs["samples"] == len(table) == len(array)
        assert file.attrs["sample_s"] == 5e-4
        assert len(str(file.attrs["content_id"])) == 64
        for at, name in enumerate(names):
            data = file[f"codes/{name}"]
            assert (data[:] == table[f"{name}.code"]).all()
            assert (array[:, at] == table[f"{name}.code"]).all()
            volts = data[:] * data.attrs["scale_factor"] + data.attrs["add_offset"]
            assert np.abs(volts - table[f"{name}.V"]).max() < 1e-12
        words = file["states/filament"].attrs["flag_meanings"].split()
        assert [words[at] for at in file["states/filament"][:]] == table["filament"].tolist()


def test_samples_are_the_last_rows_at_or_before_them(tables: Path, run: Run) -> None:
    rows = pd.read_csv(tables / "block-1-run.csv")
    samples = pd.read_csv(poured(run, "csv"))
    at = np.searchsorted(rows["tick"], samples["tick"], side="right") - 1
    expected = rows.iloc[at].reset_index(drop=True)
    expected["tick"] = samples["tick"]
    pd.testing.assert_frame_equal(samples, expected)


@pytest.mark.usefixtures("tables")
def test_columns_may_be_chosen_and_ordered(run: Run) -> None:
    whole = np.load(poured(run, "npy"))
    Path("x.npy").unlink()
    two = np.load(poured(run, "npy", "--only", "lv4,lv2"))
    assert (two == whole[:, [3, 1]]).all()


@pytest.mark.usefixtures("tables")
def test_what_the_rate_does_to_the_rows_is_said(run: Run) -> None:
    done = run("pour", "tables", "--rate", "1 kHz", "-o", "x.csv")
    assert "rows lie between two samples and come late, by up to 0.000" in done.err
    done = run("pour", "tables", "--rate", "1 kHz", "--form", "raw", "-o", "x.raw")
    assert "6 columns of u2, little-endian: lv1, lv2, lv3, lv4, lv5, filament" in done.err


@pytest.mark.parametrize(
    ("words", "says"),
    [
        (("--rate", "7 kHz"), "is no whole number of ticks"),
        (("--rate", "7 mm"), "Hz is needed"),
        (("--rate", "0 Hz"), "not above zero"),
        (("--every", "1 ns"), "is no whole number of ticks"),
        (("--every", "1 ms", "--block", "2"), "there is no block 2"),
        (("--every", "1 ms", "--only", "lv9"), "is no output or line"),
        (("--every", "1 ms", "--only", "lv1,lv1"), "names something twice"),
        ((), "one of the arguments --rate --every is required"),
    ],
)
@pytest.mark.usefixtures("tables")
def test_wrong_words_are_wrong_usage(run: Run, words: tuple[str, ...], says: str) -> None:
    done = run("pour", "tables", *words, "-o", "x.csv")
    assert done.status == 64
    assert says in done.err
    assert not Path("x.csv").exists()


def test_an_altered_folder_is_not_poured(tables: Path, run: Run) -> None:
    table = tables / "block-1-run.csv"
    table.write_bytes(table.read_bytes().replace(b"32767", b"32766", 1))
    done = run("pour", "tables", "--every", "1 ms", "-o", "x.csv")
    assert done.status == 1
    assert "file-altered" in done.err
    assert not Path("x.csv").exists()
    assert run("pour", "nowhere", "--every", "1 ms").status == 66


@pytest.mark.usefixtures("tables")
def test_a_file_that_is_there_is_left_alone(run: Run) -> None:
    Path("x.csv").write_text("years of work")
    done = run("pour", "tables", "--every", "1 ms", "-o", "x.csv")
    assert done.status == 73
    assert Path("x.csv").read_text() == "years of work"


def _piped(*words: str) -> subprocess.CompletedProcess[bytes]:
    return subprocess.run(
        [sys.executable, "-m", "wellseq", "pour", "tables", *words],
        env={**os.environ, "PYTHONPATH": ROOT},
        capture_output=True,
        check=False,
    )


@pytest.mark.usefixtures("tables")
def test_standard_output_gets_the_same_bytes_as_a_file(run: Run) -> None:
    done = _piped("--every", "500 us", "--form", "npy")
    assert done.returncode == 0
    assert done.stdout == poured(run, "npy").read_bytes()
    assert np.load(io.BytesIO(done.stdout)).shape[1] == 6


@pytest.mark.usefixtures("tables")
def test_a_reader_that_goes_away_ends_it_quietly() -> None:
    command = f"{sys.executable} -m wellseq pour tables --every '10 us' --form raw"
    done = subprocess.run(
        ["bash", "-c", f"{command} | head -c 100 > /dev/null; exit ${{PIPESTATUS[0]}}"],
        env={**os.environ, "PYTHONPATH": ROOT},
        capture_output=True,
        check=False,
    )
    assert done.returncode == 73
    assert b"Traceback" not in done.stderr
