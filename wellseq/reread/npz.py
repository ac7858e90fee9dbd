"""The bytes of a block's NPZ, compared array by array with what the table says.

Every array is one that wellseq writes, in type, order and shape; so nothing is ever unpickled.
Source of the form: NumPy Enhancement Proposal 1 (2007).
"""

from __future__ import annotations

import struct
from array import array
from collections.abc import Iterator

from wellseq.reread.forms import (
    KINDS,
    UNSOUND,
    Expected,
    differing,
    most,
    scale,
    size,
    whole_numbers,
    words,
)
from wellseq.reread.plan import Line, Switch
from wellseq.reread.reading import Unsound
from wellseq.reread.zipped import members

NAMES = {"codes": "converters", "levels": "switches", "states": "lines"}


def judge_npz(content: bytes, file: str, expected: Expected) -> Iterator[Unsound]:
    """Everything in which an archive differs; raises Unsound where it cannot be read."""
    held = members(content, file, UNSOUND)
    names = [f"{name}.npy" for name in _names()]
    if list(held) != names:
        odd = sorted(set(held) ^ set(names))
        raise Unsound(UNSOUND, file, f"its arrays are not the ones written: {', '.join(odd)}"[:200])
    numbers = _numbers(held, file, expected)
    yield from differing(file, expected, numbers)
    for name, dtype, shape, right in _small(expected):
        if bytes(_elements(held[f"{name}.npy"], file, name, dtype, shape)) != right:
            yield Unsound(UNSOUND, file, f"the array {name} does not say what the manifest says")


def _names() -> list[str]:
    return [
        *("tick", *KINDS, *NAMES.values(), "scale_factor", "add_offset"),
        *("level_words", "state_words", "drives"),
        *("tick_s", "tick_exact_s", "block", "trigger", "content_id"),
    ]


def _numbers(
    held: dict[str, memoryview], file: str, expected: Expected
) -> Iterator[tuple[str, array[int]]]:
    rows = len(expected.table.ticks)
    ticks = _elements(held["tick.npy"], file, "tick", "<i8", (rows,))
    yield "tick", whole_numbers(ticks, 8)
    for kind in KINDS:
        columns = expected.columns(kind)
        each = size(max(map(most, columns), default=0))
        dtype = "u1" if each == 1 else f"<u{each}"
        content = _elements(held[f"{kind}.npy"], file, kind, dtype, (rows, len(columns)))
        table = whole_numbers(content, each)
        for at, column in enumerate(columns):
            yield column.name, table[at :: len(columns)]


def _elements(
    content: memoryview, file: str, name: str, dtype: str, shape: tuple[int, ...]
) -> memoryview:
    """What follows the head of an array, which must be of this type and shape."""
    text = f"{{'descr': '{dtype}', 'fortran_order': False, 'shape': {shape}, }}"
    length = -(-(len(text) + 11) // 64) * 64
    head = b"\x93NUMPY\x01\x00" + struct.pack("<H", length - 10)
    head += text.encode("ascii").ljust(length - 11) + b"\n"
    count = 1
    for extent in shape:
        count *= extent
    each = int(dtype.lstrip("<iufU")) * (4 if "U" in dtype else 1)
    if bytes(content[: len(head)]) != head or len(content) != len(head) + count * each:
        said = bytes(content[10:130]).split(b"\n")[0].decode("ascii", "replace").strip()
        raise Unsound(UNSOUND, file, f"the array {name} is not {dtype} {shape} but {said}")
    return content[len(head) :]


def _small(expected: Expected) -> Iterator[tuple[str, str, tuple[int, ...], bytes]]:
    """(name, type, shape, elements) of every array that does not grow with the rows."""
    block, plan = expected.block, expected.plan
    for kind, name in NAMES.items():
        yield name, *_texts([column.name for column in expected.columns(kind)])
    for at, name in enumerate(("scale_factor", "add_offset")):
        floats = [scale(converter)[at] for converter in plan.converters]
        yield name, "<f8", (len(floats),), struct.pack(f"<{len(floats)}d", *floats)
    for kind, name in (("levels", "level_words"), ("states", "state_words")):
        said = [words(one) for one in expected.columns(kind) if isinstance(one, Switch | Line)]
        width = max(map(len, said), default=0)
        yield name, *_texts([line + [""] * (width - len(line)) for line in said])
    yield "drives", *_texts(expected.padded_drives())
    yield "tick_s", "<f8", (), struct.pack("<d", float(block.tick_s))
    for name, text in (
        ("tick_exact_s", str(block.tick_s)),
        ("block", block.name),
        ("trigger", block.trigger),
        ("content_id", plan.content_id),
    ):
        dtype, _, right = _texts([text])
        yield name, dtype, (), right


def _texts(texts: list[str] | list[list[str]]) -> tuple[str, tuple[int, ...], bytes]:
    """(type, shape, elements) of texts or of lines of texts: UTF-32, all as long as the longest."""
    lines = [[one] if isinstance(one, str) else one for one in texts]
    flat = [text for line in lines for text in line]
    longest = max((len(text) for text in flat), default=0) or 1
    shape: tuple[int, ...] = (len(texts),)
    if texts and not isinstance(texts[0], str):
        shape = (len(texts), len(texts[0]))
    content = b"".join(text.encode("utf-32-le").ljust(4 * longest, b"\0") for text in flat)
    return f"<U{longest}", shape, content
