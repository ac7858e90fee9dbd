"""Further forms of a table under the second reader: whatever is not the table's is refused.

Every forged file is sealed again with hashes that fit, so that only what it says is wrong.
"""

from __future__ import annotations

import io
import shutil
import zipfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

import h5py
import made_case
import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from resealing import reseal

from wellseq.emit.publish import write_folder
from wellseq.reread.folder import CHECKS, verify

NPZ, HDF5 = "block-1-run.npz", "block-1-run.h5"
Arrays = dict[str, np.ndarray]


@pytest.fixture(scope="module")
def whole(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("forms") / "out"
    write_folder(made_case.cleared(), folder, verify, ("hdf5", "npz"))
    return folder


@pytest.fixture
def folder(whole: Path, tmp_path: Path) -> Path:
    return Path(shutil.copytree(whole, tmp_path / "out"))


def names(folder: Path) -> set[str]:
    return {finding.name for finding in verify(folder)}


def messages(folder: Path) -> str:
    return "; ".join(finding.message for finding in verify(folder))


def test_a_folder_with_all_forms_is_sound_and_so_it_is_resealed(folder: Path) -> None:
    assert verify(folder) == ()
    reseal(folder)
    assert verify(folder) == ()


# NPZ


def repack(folder: Path, change: Callable[[Arrays], None], **how: Any) -> None:
    """Write the archive anew the way numpy does, and seal the folder."""
    with np.load(folder / NPZ, allow_pickle=False) as held:
        arrays = {name: held[name] for name in held.files}
    change(arrays)
    save = np.savez_compressed if how.get("compressed") else np.savez
    with open(folder / NPZ, "wb") as stream:
        save(stream, **arrays)
    reseal(folder)


def rewrite(folder: Path, change: Callable[[dict[str, bytes]], None]) -> None:
    """Write the archive anew byte by byte as wellseq does, and seal the folder."""
    from wellseq.emit.also import npz

    with zipfile.ZipFile(folder / NPZ) as archive:
        held = {entry.filename: archive.read(entry) for entry in archive.infolist()}
    change(held)
    sink = npz._Sink()
    with zipfile.ZipFile(sink, "w") as archive:  # type: ignore[call-overload]
        for name, content in held.items():
            entry = zipfile.ZipInfo(name, npz.STAMP)
            entry.create_system, entry.external_attr = 3, 0o644 << 16
            with archive.open(entry, "w") as stream:
                stream.write(content)
    (folder / NPZ).write_bytes(b"".join(sink.taken()))
    reseal(folder)


def test_an_archive_written_anew_byte_by_byte_is_sound(folder: Path) -> None:
    # Companion of every test that rewrites: the tool alone leaves nothing to find.
    before = (folder / NPZ).read_bytes()
    rewrite(folder, lambda held: None)
    assert (folder / NPZ).read_bytes() == before


def _in(held: dict[str, bytes], name: str, at: int, new: bytes) -> None:
    content = held[name]
    at %= len(content)
    held[name] = content[:at] + new + content[at + len(new) :]


NAN = np.array([np.nan]).tobytes()
NPZ_FORGERIES: dict[str, Callable[[dict[str, bytes]], object]] = {
    "a NaN for a scale": lambda held: _in(held, "scale_factor.npy", -24, NAN),
    "a NaN for an offset": lambda held: _in(held, "add_offset.npy", -8, NAN),
    "another code": lambda held: _in(held, "codes.npy", -12, b"\x01\x02"),
    "another level": lambda held: _in(held, "levels.npy", -1, b"\x01"),
    "another state": lambda held: _in(held, "states.npy", -1, b"\x01"),
    "another tick": lambda held: _in(held, "tick.npy", -8, b"\x01"),
    "another name": lambda held: _in(held, "converters.npy", -4, b"9"),
    "another word": lambda held: _in(held, "state_words.npy", -4, b"x"),
    "another id": lambda held: _in(held, "content_id.npy", -4, b"x"),
    "another drive": lambda held: _in(held, "drives.npy", -4, b"7"),
    "another time": lambda held: _in(held, "tick_s.npy", -1, b"\x3f"),
    "signed numbers": lambda held: _in(held, "tick.npy", 22, b"<u8"),
    "big-endian numbers": lambda held: _in(held, "tick.npy", 22, b">i8"),
    "columns first": lambda held: _in(held, "codes.npy", 46, b"True, "),
    "objects": lambda held: _in(held, "tick.npy", 22, b"|O "),
    "a row too few": lambda held: held.update({"tick.npy": held["tick.npy"][:-8]}),
    "a row too many": lambda held: held.update({"tick.npy": held["tick.npy"] + b"\0" * 8}),
    "nothing": lambda held: held.update({"tick.npy": b""}),
    "an array too many": lambda held: held.update({"extra.npy": held["tick.npy"]}),
    "an array too few": lambda held: held.pop("drives.npy"),
    "another order": lambda held: held.update({"tick.npy": held.pop("tick.npy")}),
}


@pytest.mark.parametrize("how", NPZ_FORGERIES)
def test_a_forged_archive_is_found(folder: Path, how: str) -> None:
    rewrite(folder, NPZ_FORGERIES[how])
    assert names(folder) == {"form-unsound"}, how


def test_other_types_that_numpy_would_take_are_refused(folder: Path) -> None:
    def floats(arrays: Arrays) -> None:
        arrays["codes"] = arrays["codes"].astype(float)
        arrays["codes"][0, 0] = np.nan

    repack(folder, floats)
    assert names(folder) == {"form-unsound"}


def test_a_compressed_archive_is_refused_unread(folder: Path) -> None:
    repack(folder, lambda arrays: None, compressed=True)
    assert "is not plainly stored" in messages(folder)


def test_an_archive_that_would_unfold_without_end_is_refused(folder: Path) -> None:
    """A member of 40 kB that says it is 40 MB: neither read nor unfolded."""
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED) as archive:
        for name in ("tick.npy", "codes.npy"):
            archive.writestr(name, b"\0" * (40 * 2**20))
    (folder / NPZ).write_bytes(buffer.getvalue())
    reseal(folder)
    assert names(folder) == {"form-unsound"}


@pytest.mark.parametrize("content", [b"", b"PK", b"PK\x05\x06" + b"\0" * 18, b"\0" * 500])
def test_what_is_no_archive_is_found(folder: Path, content: bytes) -> None:
    (folder / NPZ).write_bytes(content)
    reseal(folder)
    assert names(folder) == {"form-unsound"}


@pytest.mark.parametrize("where", ["before", "between", "after"])
def test_nothing_may_hide_in_an_archive(folder: Path, where: str) -> None:
    content = (folder / NPZ).read_bytes()
    middle = content.index(b"PK\x01\x02")
    at = {"before": 0, "between": middle, "after": len(content)}[where]
    (folder / NPZ).write_bytes(content[:at] + b"hidden" + content[at:])
    reseal(folder)
    assert names(folder) == {"form-unsound"}


# HDF5


def edited(folder: Path, change: Callable[[h5py.File], None]) -> None:
    """Change the file with h5py, and seal the folder."""
    with h5py.File(folder / HDF5, "r+") as file:
        change(file)
    reseal(folder)


def _retyped(file: h5py.File, name: str, dtype: str, **more: Any) -> None:
    """The same numbers and attributes in another type or layout."""
    data = file[name]
    kept, attributes = data[:], dict(data.attrs)
    del file[name]
    options = {"chunks": data.shape, "compression": 1, "shuffle": True} | more
    new = file.create_dataset(name, data=kept.astype(dtype), **options)
    for key, value in attributes.items():
        new.attrs[key] = value


def _set(file: h5py.File, name: str, at: int, value: int) -> None:
    file[name][at] = value


def _attribute(file: h5py.File, name: str, key: str, value: object) -> None:
    file[name].attrs[key] = value


def _linked(file: h5py.File, name: str) -> None:
    del file[name]
    file[name] = h5py.SoftLink("/tick")


HDF5_FORGERIES: dict[str, Callable[[h5py.File], object]] = {
    "floats": lambda file: _retyped(file, "codes/lv1", "<f8"),
    "wider numbers": lambda file: _retyped(file, "codes/lv1", "<u4"),
    "signed numbers": lambda file: _retyped(file, "codes/lv1", "<i2"),
    "big-endian numbers": lambda file: _retyped(file, "codes/lv1", ">u2"),
    "narrower ticks": lambda file: _retyped(file, "tick", "<i4"),
    "other chunks": lambda file: _retyped(file, "codes/lv1", "<u2", chunks=(5,)),
    "no shuffling": lambda file: _retyped(file, "codes/lv1", "<u2", shuffle=False),
    "another code": lambda file: _set(file, "codes/lv1", 3, 17),
    "another level": lambda file: _set(file, "levels/hv", 3, 1),
    "another state": lambda file: _set(file, "states/shutter", -1, 0),
    "another tick": lambda file: _set(file, "tick", 3, 17),
    "another scale": lambda file: _attribute(file, "codes/lv1", "scale_factor", 0.004),
    "a NaN for a scale": lambda file: _attribute(file, "codes/lv1", "scale_factor", np.nan),
    "another offset": lambda file: _attribute(file, "codes/lv1", "add_offset", -139.9),
    "another unit": lambda file: _attribute(file, "codes/lv1", "units", "mV"),
    "a whole number for a scale": lambda file: _attribute(file, "tick", "add_offset", 0),
    "other words": lambda file: _attribute(file, "states/shutter", "flag_meanings", "open closed"),
    "another id": lambda file: _attribute(file, "/", "content_id", "0" * 64),
    "an attribute too many": lambda file: _attribute(file, "codes/lv1", "note", "tuned by hand"),
    "an attribute too few": lambda file: file["codes/lv1"].attrs.__delitem__("units"),
    "a set too many": lambda file: file["codes"].create_dataset("lv9", data=[1, 2]),
    "a set too few": lambda file: file["codes"].__delitem__("lv1"),
    "a link": lambda file: _linked(file, "codes/lv1"),
    "other drives": lambda file: file["drives"].__setitem__((0, 1), b"0.002"),
}


@pytest.mark.parametrize("how", HDF5_FORGERIES)
def test_a_forged_hdf5_file_is_found(folder: Path, how: str) -> None:
    edited(folder, HDF5_FORGERIES[how])
    assert names(folder) == {"form-unsound"}, how


def test_a_file_of_the_newest_form_is_refused(folder: Path) -> None:
    old, new = folder / HDF5, folder / "new"
    with h5py.File(old, "r") as one, h5py.File(new, "w", libver="latest") as other:
        for name in one:
            one.copy(name, other)
    new.rename(old)
    reseal(folder)
    assert "not in the oldest form" in messages(folder)


def test_a_chunk_that_would_unfold_without_end_is_refused(folder: Path) -> None:
    import zlib

    def bomb(file: h5py.File) -> None:
        packed = zlib.compress(b"\0" * (100 * 2**20), 9)
        file["codes/lv1"].id.write_direct_chunk((0,), packed)

    edited(folder, bomb)
    assert "does not unfold to its length" in messages(folder)


@settings(
    max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(st.data())
def test_no_damage_makes_the_reader_fail(folder: Path, data: st.DataObject) -> None:
    """Bytes anywhere in either form changed, with seals that fit: never an exception."""
    path = folder / data.draw(st.sampled_from([NPZ, HDF5]))
    before = path.read_bytes()
    bent = bytearray(before)
    for _ in range(data.draw(st.integers(1, 4))):
        at = data.draw(st.integers(0, len(bent) - 1))
        bent[at] = data.draw(st.sampled_from([0, 1, 0x7F, 0xFF, bent[at] ^ 0x10]))
    path.write_bytes(bytes(bent[: data.draw(st.sampled_from([len(bent), len(bent) // 2]))]))
    reseal(folder)
    found = names(folder)
    path.write_bytes(before)
    assert found <= set(CHECKS)
    assert "manifest-unsound" not in found
