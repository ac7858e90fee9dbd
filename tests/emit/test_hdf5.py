"""The HDF5 file of a block: what was shipped, read by h5py; scale and words as attributes."""

from __future__ import annotations

import io
import time
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import replace

import h5py
import made_case
import numpy as np
import pytest

from wellseq.checks.judging import clear
from wellseq.emit import contents
from wellseq.emit.also import hdf5
from wellseq.emit.content import content_id
from wellseq.emit.keys import Key
from wellseq.timeline.shipped import Shipped


def shipped() -> Shipped:
    found = made_case.case().shipped
    assert found is not None
    return found


def files(key: Key | None = None) -> dict[str, bytes]:
    made = hdf5.write(key or made_case.cleared())
    return {name: b"".join(pieces) for name, pieces in made}


@contextmanager
def opened(content: bytes) -> Iterator[h5py.File]:
    with h5py.File(io.BytesIO(content), "r") as file:
        yield file


def test_every_number_is_what_was_shipped() -> None:
    whole = shipped()
    for block, content in zip(whole.blocks, files().values(), strict=True):
        with opened(content) as file:
            assert (file["tick"][:] == block.ticks).all()
            for at, name in enumerate(whole.converters):
                assert (file["codes"][name][:] == block.codes[:, at]).all()
            assert (file["levels/hv"][:] == block.levels[:, 0]).all()
            for at, name in enumerate(whole.lines):
                assert (file["states"][name][:] == block.states[:, at]).all()


def test_data_sets_are_narrow_chunked_and_compressed() -> None:
    with opened(files()["block-1-run.h5"]) as file:
        kinds = {name: file["codes"][name].dtype for name in file["codes"]}
        assert kinds == {"lv1": np.uint16, "lv2": np.uint32, "lv3": np.uint16}
        for data in (file["tick"], file["codes/lv1"], file["states/shutter"]):
            assert data.chunks == data.shape
            assert (data.compression, data.shuffle) == ("gzip", True)


def test_scale_range_words_and_id_are_attributes() -> None:
    run, caught = files().values()
    with opened(run) as file, opened(caught) as other:
        lv1, hv = file["codes/lv1"], file["levels/hv"]
        assert (lv1.attrs["units"], lv1.attrs["between_rows"]) == ("V", "hold")
        assert file["codes/lv2"].attrs["between_rows"] == "line"
        assert lv1.attrs["valid_range"].tolist() == [0, 65535]
        volts = lv1[:] * lv1.attrs["scale_factor"] + lv1.attrs["add_offset"]
        assert abs(volts[-1] - 100.0) < 280 / 65535 / 2 * 1.001
        assert hv.attrs["flag_meanings"] == "lv3 -900.0_V"
        assert hv.attrs["flag_values"].tolist() == [0, 1]
        assert [file["codes"][name].attrs["column"] for name in file["codes"]] == [0, 1, 2]
        assert file["tick"].attrs["scale_factor"] == 1e-8
        assert file["tick"].attrs["exact_s"] == "1/100000000"
        assert file["drives"][0, 0] == b"R3"
        assert "drives" not in other
        assert file.attrs["content_id"] == other.attrs["content_id"] == content_id(shipped())
        assert (file.attrs["trigger"], other.attrs["trigger"]) == ("", "bunch")


def test_the_bytes_repeat_whatever_the_clock_says() -> None:
    before = files()
    time.sleep(1.1)  # HDF5 can keep whole seconds beside its objects
    assert files() == before


def test_more_than_one_chunk_and_a_last_one_that_is_not_full() -> None:
    whole = shipped()
    block = whole.blocks[0]
    rows = 2 * 65536 + 17
    random = np.random.default_rng(5)
    codes = np.stack([random.integers(0, 2**bits, rows) for bits in (16, 18, 12)], axis=1)
    codes[:, 2] = 7  # a chunk that stands still is deflated once
    long = replace(
        block,
        ticks=np.cumsum(random.integers(1, 10**6, rows)),
        codes=codes,
        levels=np.zeros((rows, 1), np.int64),
        states=np.zeros((rows, 2), np.int64),
    )
    key = clear(replace(made_case.case(), shipped=replace(whole, blocks=(long,))))
    assert key is not None
    with opened(files(key)["block-1-run.h5"]) as file:
        assert (file["tick"][:] == long.ticks).all()
        for at, name in enumerate(whole.converters):
            assert (file["codes"][name][:] == codes[:, at]).all()
        assert file["codes/lv1"].chunks == (65536,)


def test_without_the_library_the_form_says_what_to_install(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr(hdf5, "find_spec", lambda name: None)
    assert "pip install 'wellseq[hdf5]'" in contents.missing(["npz", "hdf5"])
    monkeypatch.undo()
    assert contents.missing(["npz", "hdf5"]) == ""
    assert "is no form" in contents.missing(["parchment"])
