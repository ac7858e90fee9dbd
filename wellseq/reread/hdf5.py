"""A block's HDF5 file, compared set by set and attribute by attribute with what the table says."""

from __future__ import annotations

import struct
import zlib
from array import array
from collections.abc import Iterator, Mapping

from wellseq.reread.forms import (
    KINDS,
    UNSOUND,
    Column,
    Expected,
    differing,
    most,
    scale,
    size,
    whole_numbers,
    words,
)
from wellseq.reread.hdf5_bytes import (
    FILTERS,
    LAYOUT,
    SPACE,
    TYPE,
    Form,
    Hdf5,
    Message,
    Value,
    extents_of,
    kind_of,
)
from wellseq.reread.plan import Converter
from wellseq.reread.reading import Unsound

LAYOUT_NUMBER = 1
CHUNK_ROWS_MAX = 65536
SHUFFLE, DEFLATE = 2, 1
DRIVE_HEAD = ("ring", "start_s", "stop_s", "from_Hz", "to_Hz", "amplitude_V", "order")
Attributes = Mapping[str, Value]


def judge_hdf5(content: bytes, file: str, expected: Expected) -> Iterator[Unsound]:
    """Everything in which a file differs; raises Unsound where it cannot be read."""
    try:
        yield from _Judge(Hdf5(content, file, UNSOUND), file, expected).wrongs()
    except (struct.error, IndexError, UnicodeDecodeError, OverflowError, zlib.error) as error:
        raise Unsound(UNSOUND, file, f"this HDF5 file is damaged: {error}") from error


class _Judge:
    def __init__(self, hdf5: Hdf5, file: str, expected: Expected) -> None:
        self.hdf5, self.file, self.expected = hdf5, file, expected

    def wrongs(self) -> Iterator[Unsound]:
        hdf5, expected = self.hdf5, self.expected
        root = hdf5.messages(hdf5.root)
        top = hdf5.entries(root)
        wanted = {"tick", *KINDS} | ({"drives"} if expected.drives else set())
        self._only("the file", set(top), wanted)
        yield from self._facts("the file", hdf5.attributes(root), self._root_facts())
        tick = hdf5.messages(top["tick"])
        yield from self._facts("tick", hdf5.attributes(tick), self._tick_facts())
        yield from differing(self.file, expected, iter([("tick", self._numbers("tick", tick, 8))]))
        place = 0
        for kind in KINDS:
            inside = hdf5.entries(hdf5.messages(top[kind]))
            columns = expected.columns(kind)
            self._only(kind, set(inside), {column.name for column in columns})
            for column in columns:
                yield from self._column(column, hdf5.messages(inside[column.name]), place)
                place += 1
        if expected.drives:
            yield from self._drives(hdf5.messages(top["drives"]))

    def _only(self, where: str, found: set[str], wanted: set[str]) -> None:
        if found != wanted:
            odd = ", ".join(sorted(found ^ wanted))[:120]
            raise self.hdf5.wrong(f"{where} has not the parts that it should have: {odd}")

    def _facts(self, where: str, found: Attributes, right: Attributes) -> Iterator[Unsound]:
        for key in sorted(set(found) | set(right)):
            if key not in found or key not in right or not _same(found[key], right[key]):
                message = f"the attribute {key[:40]} of {where} is not what the manifest says"
                yield Unsound(UNSOUND, self.file, message)

    def _root_facts(self) -> Attributes:
        return {
            "block": self.expected.block.name,
            "trigger": self.expected.block.trigger,
            "content_id": self.expected.plan.content_id,
            "wellseq_layout": LAYOUT_NUMBER,
        }

    def _tick_facts(self) -> Attributes:
        tick_s = self.expected.block.tick_s
        facts: dict[str, Value] = {"units": "s", "scale_factor": float(tick_s), "add_offset": 0.0}
        return facts | {"exact_s": str(tick_s)}

    def _column(self, column: Column, messages: list[Message], place: int) -> Iterator[Unsound]:
        facts: dict[str, Value] = {"column": place}
        if isinstance(column, Converter):
            factor, offset = scale(column)
            facts |= {"units": "V", "scale_factor": factor, "add_offset": offset}
            facts["valid_range"] = [0, column.code_max]
            facts["between_rows"] = "hold" if column.holds else "line"
        else:
            said = words(column)
            facts |= {"flag_values": list(range(len(said))), "flag_meanings": " ".join(said)}
        yield from self._facts(column.name, self.hdf5.attributes(messages), facts)
        numbers = self._numbers(column.name, messages, size(most(column)))
        yield from differing(self.file, self.expected, iter([(column.name, numbers)]))

    # numbers

    def _one(self, messages: list[Message], kind: int, where: str) -> memoryview:
        found = [data for sort, data in messages if sort == kind]
        if len(found) != 1:
            raise self.hdf5.wrong(f"{where} is no data set")
        return found[0]

    def _numbers(self, where: str, messages: list[Message], each: int) -> array[int]:
        """The numbers of a data set, which must be of so many bytes; 8 bytes are signed."""
        rows = len(self.expected.table.ticks)
        form = kind_of(self._one(messages, TYPE, where))
        wanted = Form("q", 8) if each == 8 else Form({1: "B", 2: "H", 4: "I"}[each], each)
        if form != wanted or extents_of(self._one(messages, SPACE, where)) != (rows,):
            raise self.hdf5.wrong(f"{where} is not of the type and length of its column")
        layout = self._one(messages, LAYOUT, where)
        version, sort, dimensions, tree, chunk, width = struct.unpack("<BBBQII", layout[:19])
        fine = (version, sort, dimensions, width) == (3, 2, 2, each)
        if not fine or chunk != min(CHUNK_ROWS_MAX, rows):
            raise self.hdf5.wrong(f"{where} is not cut into chunks as it should be")
        if _filters(self._one(messages, FILTERS, where)) != [SHUFFLE, DEFLATE]:
            raise self.hdf5.wrong(f"{where} is not shuffled and deflated")
        found, plain = bytearray(), chunk * each
        for first, mask, packed in self.hdf5.chunks(tree, dimensions):
            if first * each != len(found) or mask or len(found) >= rows * each:
                raise self.hdf5.wrong(f"a chunk of {where} is out of place")
            found += _unshuffled(self._inflated(packed, plain, where), each)
        if len(found) < rows * each:
            raise self.hdf5.wrong(f"{where} is cut off")
        return whole_numbers(memoryview(found)[: rows * each], each)

    def _inflated(self, packed: memoryview, plain: int, where: str) -> bytes:
        """A chunk, never more than its `plain` bytes whatever it would unfold to."""
        inflating = zlib.decompressobj()
        content = inflating.decompress(packed, plain)
        if len(content) != plain or not inflating.eof or inflating.unused_data:
            raise self.hdf5.wrong(f"a chunk of {where} does not unfold to its length")
        return content

    def _drives(self, messages: list[Message]) -> Iterator[Unsound]:
        lines = self.expected.padded_drives()
        phases = [f"phase_{at + 1}_deg" for at in range(self.expected.width - len(DRIVE_HEAD))]
        head = " ".join((*DRIVE_HEAD, *phases))
        yield from self._facts("drives", self.hdf5.attributes(messages), {"columns": head})
        cells = [cell.encode() for line in lines for cell in line]
        longest = max(map(len, cells))
        form = kind_of(self._one(messages, TYPE, "drives"))
        extents = extents_of(self._one(messages, SPACE, "drives"))
        version, sort, at, length = struct.unpack(
            "<BBQQ", self._one(messages, LAYOUT, "drives")[:18]
        )
        right = b"".join(cell.ljust(longest, b"\0") for cell in cells)
        plain = (version, sort, length) == (3, 1, len(right))
        fits = (form, extents) == (Form(f"{longest}s", longest), (len(lines), len(lines[0])))
        if not plain or not fits:
            raise self.hdf5.wrong("drives are not the texts that they should be")
        if bytes(self.hdf5.take(at, length)) != right:
            yield Unsound(UNSOUND, self.file, "the drives are not those of the drive table")


def _same(found: Value, right: Value) -> bool:
    """Equal in kind as well: 1 is not 1.0, and a NaN equals nothing."""
    if isinstance(found, list) and isinstance(right, list):
        return found == right and list(map(type, found)) == list(map(type, right))
    return type(found) is type(right) and found == right


def _filters(data: memoryview) -> list[int]:
    """The filters of a data set, in the order in which they were applied."""
    if data[0] != 1:
        return []
    found, at = [], 8
    for _ in range(data[1]):
        number, name, _, values = struct.unpack("<HHHH", data[at : at + 8])
        found.append(number)
        at += 8 + -(-name // 8) * 8 + 4 * (values + values % 2)
    return found


def _unshuffled(content: bytes, each: int) -> bytes:
    """Elements whose first bytes, second bytes … stood together, put back in order."""
    count = len(content) // each
    found = bytearray(len(content))
    for at in range(each):
        found[at::each] = content[at * count : (at + 1) * count]
    return bytes(found)
