"""The bytes of an HDF5 file in its oldest form → groups, data sets and attributes.

Only what wellseq writes is read: version 0 of the superblock, groups with symbol tables, whole
numbers, floats and texts, chunks that were shuffled and deflated.  Everything else is refused.
Source: HDF5 File Format Specification Version 3.0, sections II to IV.
"""

from __future__ import annotations

import struct
from collections.abc import Iterator
from dataclasses import dataclass

from wellseq.reread.reading import Unsound

SIGNATURE = b"\x89HDF\r\n\x1a\n"
UNDEFINED = 2**64 - 1
NODES_MAX = 200_000
"""More headers, nodes and heaps than any file of ours has; a loop of addresses ends here."""
SPACE, TYPE, FILL_OLD, FILL, LAYOUT, FILTERS = 0x01, 0x03, 0x04, 0x05, 0x08, 0x0B
ATTRIBUTE, CONTINUED, TABLE, NIL, CHANGED = 0x0C, 0x10, 0x11, 0x00, 0x12
Message = tuple[int, memoryview]
Value = int | float | str | list[int] | list[float]


class Hdf5:
    """One file; `name` and `file` are what complaints about it say."""

    def __init__(self, content: bytes, file: str, name: str) -> None:
        self.content, self.file, self.name = memoryview(content), file, name
        self.nodes = 0
        head = self.take(0, 96)
        fixed = SIGNATURE + bytes((0, 0, 0, 0, 0, 8, 8, 0))
        base, _, end, _ = struct.unpack("<QQQQ", head[24:56])
        if bytes(head[:16]) != fixed or base != 0 or end != len(content):
            raise self.wrong("it is not in the oldest form, or cut off")
        self.root: int = struct.unpack("<Q", head[64:72])[0]

    def wrong(self, what: str) -> Unsound:
        """The complaint that the file is not as wellseq writes it."""
        return Unsound(self.name, self.file, f"this is no HDF5 file as wellseq writes it: {what}")

    def take(self, at: int, length: int) -> memoryview:
        """So many bytes from an address; raises Unsound beyond the end."""
        if at < 0 or length < 0 or at + length > len(self.content):
            raise self.wrong("an address is outside the file")
        return self.content[at : at + length]

    def unpack(self, form: str, at: int) -> tuple[int, ...]:
        """Numbers at an address, little-endian."""
        return struct.unpack(f"<{form}", self.take(at, struct.calcsize(f"<{form}")))

    def _visit(self) -> None:
        self.nodes += 1
        if self.nodes > NODES_MAX:
            raise self.wrong("its addresses run in circles")

    def _signed(self, at: int, signature: bytes) -> None:
        """Count a node, which must begin with its four letters."""
        self._visit()
        if self.take(at, 4) != signature:
            raise self.wrong(f"there is no {signature.decode()} where one should be")

    # objects

    def messages(self, at: int) -> list[Message]:
        """The messages of the object header at an address, continuations included."""
        self._visit()
        version, _, count, _, size = self.unpack("BBHII", at)
        if version != 1:
            raise self.wrong("an object header is not of version 1")
        found: list[Message] = []
        stretches = [(at + 16, size)]
        for start, length in stretches:
            self._visit()
            place = start
            while place + 8 <= start + length and len(found) < count:
                kind, extent, flags = self.unpack("HHB", place)
                if flags & ~1:
                    raise self.wrong("a message is shared or unknown")
                data = self.take(place + 8, extent)
                if kind == CONTINUED:
                    stretches.append(struct.unpack("<QQ", data[:16]))
                found.append((kind, data))
                place += 8 + extent
        return found

    def entries(self, messages: list[Message]) -> dict[str, int]:
        """Name → address of everything in a group."""
        tables = [data for kind, data in messages if kind == TABLE]
        if len(tables) != 1:
            raise self.wrong("a group has no table of names")
        tree, heap = struct.unpack("<QQ", tables[0][:16])
        self._signed(heap, b"HEAP")
        size, _, texts = self.unpack("QQQ", heap + 8)
        names = bytes(self.take(texts, size))
        found: dict[str, int] = {}
        for node in self._leaves(tree, 0, 8):
            self._signed(node, b"SNOD")
            count = self.unpack("H", node + 6)[0]
            for number in range(count):
                offset, address, kind = self.unpack("QQI", node + 8 + 40 * number)
                name = names[offset:].split(b"\0")[0].decode("utf-8", "strict")
                if name in found or kind > 1:
                    raise self.wrong("a name is given twice, or is a link")
                found[name] = address
        return found

    def chunks(self, tree: int, dimensions: int) -> Iterator[tuple[int, int, memoryview]]:
        """(first element, filter mask, packed bytes) of every chunk of a one-dimensional set."""
        key = 8 + 8 * dimensions
        for at, leaf in self._keyed(tree, 1, key):
            size, mask, first = self.unpack("IIQ", at)
            yield first, mask, self.take(leaf, size)

    def _leaves(self, tree: int, kind: int, key: int) -> Iterator[int]:
        for _, leaf in self._keyed(tree, kind, key):
            yield leaf

    def _keyed(self, tree: int, kind: int, key: int) -> Iterator[tuple[int, int]]:
        """(address of the key, child) of every leaf of a tree, in order; its depth is bounded."""
        if tree == UNDEFINED:
            return
        waiting = [(tree, -1)]
        while waiting:
            node, expected = waiting.pop()
            self._signed(node, b"TREE")
            sort, level, used = self.unpack("BBH", node + 4)
            if sort != kind or level > 8 or expected not in (-1, level):
                raise self.wrong("a tree of addresses is damaged")
            places = [node + 24 + number * (key + 8) for number in range(used)]
            children = [(at, self.unpack("Q", at + key)[0]) for at in places]
            if level:
                waiting += [(child, level - 1) for _, child in reversed(children)]
            else:
                yield from children

    # attributes

    def attributes(self, messages: list[Message]) -> dict[str, Value]:
        """Name → value of every attribute: whole numbers, floats, texts, or lists of numbers."""
        found: dict[str, Value] = {}
        for kind, data in messages:
            if kind != ATTRIBUTE:
                continue
            name, form, space, rest = self._attribute(data)
            if name in found:
                raise self.wrong("an attribute is given twice")
            found[name] = self._value(form, space, rest)
        return found

    def _attribute(self, data: memoryview) -> tuple[str, memoryview, memoryview, memoryview]:
        """Name, type, space and bytes of an attribute message of version 1 or 3."""
        version = data[0]
        if version not in (1, 3):
            raise self.wrong("an attribute is not of version 1 or 3")
        sizes = struct.unpack("<HHH", data[2:8])
        at, parts = (8 if version == 1 else 9), []
        for size in sizes:
            parts.append(data[at : at + size])
            at += -(-size // 8) * 8 if version == 1 else size
        return bytes(parts[0]).rstrip(b"\0").decode("utf-8"), parts[1], parts[2], data[at:]

    def _value(self, form: memoryview, space: memoryview, rest: memoryview) -> Value:
        extents, kind = extents_of(space), kind_of(form)
        count = extents[0] if extents else 1
        if kind is None or len(extents) > 1:
            raise self.wrong("an attribute is of a type that wellseq does not write")
        if kind.text:
            if extents:
                raise self.wrong("an attribute is a list of texts")
            return self._shared_text(rest)
        numbers = list(struct.unpack(f"<{count}{kind.code}", rest[: count * kind.size]))
        return numbers if extents else numbers[0]

    def _shared_text(self, data: memoryview) -> str:
        """A text of any length, which stands in a heap of its own."""
        length, heap, wanted = struct.unpack("<IQI", data[:16])
        if length == 0 and heap in (0, UNDEFINED):
            return ""
        self._signed(heap, b"GCOL")
        size = self.unpack("Q", heap + 8)[0]
        at = heap + 16
        while at + 16 <= heap + size:
            number, _, extent = self.unpack("HH4xQ", at)
            if number == wanted:
                return bytes(self.take(at + 16, extent)[:length]).decode("utf-8")
            if number == 0:
                break
            at += 16 + -(-extent // 8) * 8
        raise self.wrong("a text is missing")


@dataclass(frozen=True, slots=True)
class Form:
    """The type of an element: its code in `struct`, its bytes in `size`; `text` of any length."""

    code: str
    size: int
    text: bool = False


_WHOLE = {(1, 0): "B", (2, 0): "H", (4, 0): "I", (8, 0): "Q", (1, 8): "b", (2, 8): "h"}
_WHOLE |= {(4, 8): "i", (8, 8): "q"}
_DOUBLE = bytes((0x20, 0x3F, 0x00)), bytes((0, 0, 64, 0, 52, 11, 0, 52, 255, 3, 0, 0))


def kind_of(form: memoryview) -> Form | None:
    """Little-endian whole numbers and doubles, texts; None for every other type."""
    sort, version, flags = form[0] & 15, form[0] >> 4, bytes(form[1:4])
    size = struct.unpack("<I", form[4:8])[0]
    if sort == 0 and version == 1 and flags in (b"\0\0\0", b"\x08\0\0"):
        code = _WHOLE.get((size, flags[0]))
        plain = bytes(form[8:12]) == struct.pack("<HH", 0, 8 * size)
        return Form(code, size) if code is not None and plain else None
    if sort == 1 and (flags, bytes(form[8:20])) == _DOUBLE and size == 8:
        return Form("d", 8)
    if sort == 3 and flags[1:] == b"\0\0":
        return Form(f"{size}s", size)
    if sort == 9 and flags[0] & 15 == 1:
        return Form("", 16, text=True)
    return None


def extents_of(space: memoryview) -> tuple[int, ...]:
    """The extents of a data space; none for a single value."""
    version, rank = space[0], space[1]
    start = 8 if version == 1 else 4
    return struct.unpack(f"<{rank}Q", space[start : start + 8 * rank])
