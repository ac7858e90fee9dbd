"""The bytes of a ZIP → its members, where nothing is compressed and nothing lies in between.

Members stand one after the other from the first byte, each stored and followed by its checksum;
then the list of them, then the end: a ZIP that could unfold, overlap or hide anything is refused.
Source: APPNOTE.TXT, .ZIP File Format Specification 6.3.10, sec. 4.3.
"""

from __future__ import annotations

import struct
import zlib

from wellseq.reread.reading import Unsound

LOCAL = struct.Struct("<4sHHHHHLLLHH")
AFTER = struct.Struct("<4sLLL")
LISTED = struct.Struct("<4sHHHHHHLLLHHHHHLL")
END = struct.Struct("<4sHHHHLLH")
STORED = 0
SIZES_FOLLOW = 0x08
EARLIEST = (0, 0x21)
"""Time and date of every member: 1 January 1980, the form's zero."""


def members(content: bytes, file: str, name: str) -> dict[str, memoryview]:
    """Member → its bytes, in order; raises Unsound (`name`, `file`) for any other kind of ZIP."""
    whole = memoryview(content)

    def wrong(what: str) -> Unsound:
        return Unsound(name, file, f"this is no archive as wellseq writes it: {what}")

    if len(content) < END.size:
        raise wrong("it is cut off")
    end = END.unpack(whole[-END.size :])
    count, size, start = end[3], end[5], end[6]
    listed_to = len(content) - END.size
    if end != (b"PK\x05\x06", 0, 0, count, count, size, start, 0) or start + size != listed_to:
        raise wrong("its end is not where it should be")
    found: dict[str, memoryview] = {}
    at, entry = 0, start
    for _ in range(count):
        if entry + LISTED.size > listed_to:
            raise wrong("its list of members is cut off")
        head = LISTED.unpack(whole[entry : entry + LISTED.size])
        crc, packed, plain, length = head[7:11]
        title = bytes(whole[entry + LISTED.size : entry + LISTED.size + length])
        expected = (
            *(b"PK\x01\x02", head[1], 20, SIZES_FOLLOW, STORED, *EARLIEST, crc, packed, packed),
            *(length, 0, 0, 0, 0, head[15], at),
        )
        if head != expected or packed != plain or not title.isascii():
            raise wrong("a member is not plainly stored")
        body = at + LOCAL.size + length
        if body + packed + AFTER.size > start:
            raise wrong("a member reaches beyond its place")
        local = (b"PK\x03\x04", 20, SIZES_FOLLOW, STORED, *EARLIEST, 0, 0, 0, length, 0)
        same_title = bytes(whole[at + LOCAL.size : body]) == title
        if LOCAL.unpack(whole[at : at + LOCAL.size]) != local or not same_title:
            raise wrong("a member and the list of members do not agree")
        data = whole[body : body + packed]
        after = (b"PK\x07\x08", crc, packed, packed)
        if AFTER.unpack(whole[body + packed : body + packed + AFTER.size]) != after:
            raise wrong("a member's size is not the one that is listed")
        if zlib.crc32(data) != crc:
            raise wrong("a member's checksum differs")
        if title.decode() in found:
            raise wrong("two members have one name")
        found[title.decode()] = data
        at, entry = body + packed + AFTER.size, entry + LISTED.size + length
    if at != start or entry != listed_to:
        raise wrong("there is something between its members")
    return found
