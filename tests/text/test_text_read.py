"""Files: what is read, and what is refused without an exception."""

from __future__ import annotations

import codecs
import os
import stat
from pathlib import Path

import pytest

from wellseq.base.finding import Mistake
from wellseq.text.parse import SIZE_MAX, parse
from wellseq.text.read import decode, read_bytes, read_source
from wellseq.text.tree import Tree

TEXT = "let wall = 90 V\n  hold for 20 µs\n"


@pytest.fixture
def written(tmp_path):
    """Writes bytes to a file and reads it as a source that is shown as run.well."""

    def write_and_read(data):
        path = tmp_path / "x.well"
        path.write_bytes(data)
        return read_source(path, "run.well")

    return write_and_read


def test_a_file_becomes_a_tree(written):
    tree = written(TEXT.encode())
    assert isinstance(tree, Tree)
    assert tree == parse(TEXT, "run.well")
    assert tree.statements[1].place.file == "run.well"


def test_a_byte_order_mark_counts_no_column(written):
    tree = written(codecs.BOM_UTF8 + b"hold for $")
    assert tree.mistakes[0].place.column == 10
    assert tree.source == "hold for $"
    assert parse("\ufeffhold for $", "run.well") == tree


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_line_ends_are_kept_as_they_are(written, end):
    tree = written(TEXT.replace("\n", end).encode())
    assert [item.place.line for item in tree.statements] == [1, 2]
    assert tree.source == TEXT.replace("\n", end)


@pytest.mark.parametrize("encoding", ["utf-16", "utf-16-le", "utf-16-be", "utf-32"])
def test_utf16_is_recognised(written, encoding):
    mistake = written(TEXT.encode(encoding))
    assert isinstance(mistake, Mistake)
    assert mistake.name == "unreadable-file"
    assert "UTF-16" in mistake.message
    assert mistake.hint == "save the file as UTF-8"


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_latin1_is_recognised_and_pointed_at(written, end):
    mistake = written(TEXT.replace("\n", end).encode("latin-1"))
    assert isinstance(mistake, Mistake)
    place = mistake.place
    assert (place.line, place.column, place.end_column) == (2, 15, 16)
    assert "0xb5" in mistake.message
    assert "'µ'" in mistake.message


@pytest.mark.parametrize("data", [b"a \xc3", b"\xed\xa0\x80", b"\xc0\xaf", b"ok\n\x80", b"\xf8"])
def test_utf8_is_strict(written, data):
    assert written(data).name == "unreadable-file"


def test_an_empty_file_is_an_empty_tree(written):
    assert written(b"") == Tree("run.well", "", (), ())


def test_what_is_no_file_is_a_mistake(tmp_path):
    missing = read_source(tmp_path / "none.well", "none.well")
    folder = read_source(tmp_path, "night")
    device = read_source(Path(os.devnull), "null")
    assert "no file 'none.well'" in missing.message
    assert "a folder" in folder.message
    assert "a device" in device.message
    assert {missing.name, folder.name, device.name} == {"unreadable-file"}


def test_a_pipe_is_refused_and_not_waited_for(tmp_path):
    os.mkfifo(tmp_path / "pipe.well")
    assert "a pipe" in read_source(tmp_path / "pipe.well", "pipe.well").message


def test_a_path_that_becomes_a_folder_while_it_is_opened(tmp_path, monkeypatch):
    (tmp_path / "x.well").write_bytes(b"")
    honest = os.stat(tmp_path / "x.well")
    monkeypatch.setattr(os, "stat", lambda path: honest)
    mistake = read_bytes(tmp_path, "x.well")
    assert isinstance(mistake, Mistake)
    assert mistake.name == "unreadable-file"


@pytest.mark.parametrize("error", [PermissionError, OSError, ValueError])
def test_no_error_of_the_system_goes_through(tmp_path, monkeypatch, error):
    def refuse(path):
        raise error

    monkeypatch.setattr(os, "stat", refuse)
    mistake = read_source(tmp_path / "x.well", "x.well")
    assert (mistake.name, mistake.place.line) == ("unreadable-file", 1)


def test_a_strange_path_is_a_mistake():
    assert read_source(Path("a\0b"), "a\x1bb").name == "unreadable-file"
    assert "\x1b" not in read_source(Path("a\0b"), "a\x1bb").message


def test_the_size_has_a_limit(tmp_path):
    path = tmp_path / "x.well"
    path.write_bytes(b"#" * SIZE_MAX)
    assert isinstance(read_source(path, "x.well"), Tree)
    path.write_bytes(b"#" * (SIZE_MAX + 1))
    mistake = read_source(path, "x.well")
    assert isinstance(mistake, Mistake)
    assert mistake.name == "too-large"
    assert parse("#" * (SIZE_MAX + 1), "x.well").mistakes[0].name == "too-large"


def test_bytes_and_text_can_be_had_one_by_one(tmp_path):
    path = tmp_path / "x.well"
    path.write_bytes(codecs.BOM_UTF8 + TEXT.encode())
    data = read_bytes(path, "x.well")
    assert data == path.read_bytes()
    assert decode(data, "x.well") == TEXT
    assert stat.S_ISREG(path.stat().st_mode)
