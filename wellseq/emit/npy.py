"""The NPY form of an array, version 1.0 or 2.0, written here so that its bytes never vary.

Source: NumPy Enhancement Proposal 1, "A simple file format for NumPy arrays" (2007).
"""

from __future__ import annotations

import struct

MAGIC = b"\x93NUMPY"
ALIGNMENT = 64


def head(dtype: str, shape: tuple[int, ...]) -> bytes:
    """The head of a C-ordered array; its elements follow at once."""
    text = f"{{'descr': {dtype!r}, 'fortran_order': False, 'shape': {shape!r}, }}"
    if len(text) < 65000:
        version, length = b"\x01\x00", "<H"
    else:
        version, length = b"\x02\x00", "<I"
    before = len(MAGIC) + len(version) + struct.calcsize(length)
    fill = -(before + len(text) + 1) % ALIGNMENT
    padded = text.encode("ascii") + b" " * fill + b"\n"
    return MAGIC + version + struct.pack(length, len(padded)) + padded
