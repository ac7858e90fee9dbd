"""The NPZ of a block: what was shipped, read by numpy without unpickling; bytes that repeat."""

from __future__ import annotations

import io
import time
import zipfile
from dataclasses import replace

import made_case
import numpy as np
import pytest

from wellseq.checks.judging import clear
from wellseq.emit.also import npz
from wellseq.emit.content import content_id
from wellseq.emit.keys import Key
from wellseq.timeline.shipped import Shipped


def shipped() -> Shipped:
    found = made_case.case().shipped
    assert found is not None
    return found


def archives(key: Key | None = None) -> dict[str, bytes]:
    made = npz.write(key or made_case.cleared())
    return {name: b"".join(pieces) for name, pieces in made}


def loaded() -> list[dict[str, np.ndarray]]:
    found = []
    for content in archives().values():
        with np.load(io.BytesIO(content), allow_pickle=False) as held:
            found.append({name: held[name] for name in held.files})
    return found


def test_one_archive_a_block_beside_its_table() -> None:
    assert list(archives()) == ["block-1-run.npz", "block-2-bunch.npz"]


def test_every_number_is_what_was_shipped() -> None:
    for block, held in zip(shipped().blocks, loaded(), strict=True):
        assert held["tick"].dtype == np.int64
        assert (held["tick"] == block.ticks).all()
        assert held["codes"].dtype == np.uint32  # 18 bits do not fit into 16
        for kind, numbers in (("codes", block.codes), ("levels", block.levels)):
            assert held[kind].shape == numbers.shape
            assert (held[kind] == numbers).all()
        assert held["states"].dtype == np.uint8
        assert (held["states"] == block.states).all()


def test_names_words_scale_and_id_stand_beside_the_numbers() -> None:
    run, caught = loaded()
    assert run["converters"].tolist() == ["lv1", "lv2", "lv3"]
    assert run["switches"].tolist() == ["hv"]
    assert run["lines"].tolist() == ["shutter", "vacuum_ok"]
    assert run["level_words"].tolist() == [["lv3", "-900.0_V"]]
    assert run["state_words"].tolist() == [["closed", "open"], ["on", "off"]]
    assert run["drives"][0, :3].tolist() == ["R3", "0.001", "0.003"]
    assert caught["drives"].shape == (0,)
    assert float(run["tick_s"]) == 1e-8
    assert str(run["tick_exact_s"]) == "1/100000000"
    assert (str(run["trigger"]), str(caught["trigger"])) == ("", "bunch")
    assert str(run["content_id"]) == str(caught["content_id"]) == content_id(shipped())
    volts = run["codes"] * run["scale_factor"] + run["add_offset"]
    assert abs(volts[0, 2] - 20.0) <= 150 / 4095 / 2 * 1.001
    assert abs(volts[-1, 0] - 100.0) < 280 / 65535 / 2 * 1.001


def test_nothing_is_pickled_compressed_or_dated() -> None:
    for content in archives().values():
        assert b"pickle" not in content
        with zipfile.ZipFile(io.BytesIO(content)) as archive:
            assert archive.testzip() is None
            for entry in archive.infolist():
                assert entry.compress_type == zipfile.ZIP_STORED
                assert entry.date_time == (1980, 1, 1, 0, 0, 0)


def test_the_bytes_repeat_whatever_the_clock_says(monkeypatch: pytest.MonkeyPatch) -> None:
    before = archives()
    monkeypatch.setattr(time, "time", lambda: 2e9)
    assert archives() == before


def test_an_array_too_long_for_the_form_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(npz, "BYTES_MAX", 1000)
    with pytest.raises(OSError, match="too long for an NPZ"):
        archives()


def test_a_code_that_its_column_cannot_hold_is_never_written() -> None:
    key = made_case.cleared()
    whole = shipped()
    codes = whole.blocks[0].codes.copy()
    codes[3, 2] = 4096
    bent = replace(whole, blocks=(replace(whole.blocks[0], codes=codes), whole.blocks[1]))
    wrong = clear(replace(key.case, shipped=bent))
    assert wrong is not None
    with pytest.raises(ValueError, match="lv3"):
        archives(wrong)
