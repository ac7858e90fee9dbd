"""Files that are large or deep on purpose: name → (whether it is a trap file, its bytes)."""

from __future__ import annotations

from mutations import BENCH

MEGABYTE = 2**20
_HEAD = b'wellseq 1\ntrap "bench.trap.toml"\n'


def _filled(piece: bytes, size: int = MEGABYTE) -> bytes:
    return piece * (size // len(piece))


def _let(value: bytes) -> bytes:
    return _HEAD + b"let x = " + value + b"\nsequence run { hold for x }\n"


def _body(piece: bytes, size: int = MEGABYTE) -> bytes:
    return _HEAD + b"sequence run {\n" + _filled(piece, size) + b"\n}\n"


def monsters() -> dict[str, tuple[bool, bytes]]:
    """All of them; the texts are made when asked for."""
    sequences = {
        "ten megabytes of round brackets": _filled(b"(", 10_000_000),
        "ten megabytes of braces": _filled(b"{", 10_000_000),
        "ten megabytes of closing braces": _filled(b"}", 10_000_000),
        "more than ten megabytes": _filled(b"# nothing\n", 11_000_000),
        "NULs": _filled(b"\0"),
        "blanks": _filled(b" "),
        "empty lines": _filled(b"\n"),
        "carriage returns": _filled(b"\r"),
        "semicolons": _filled(b";"),
        "quotation marks": _filled(b'"'),
        "texts": _filled(b'"x" '),
        "one endless name": _let(_filled(b"a")),
        "one endless number": _let(_filled(b"9")),
        "one endless fraction": _let(b"0." + _filled(b"9") + b" s"),
        "one endless hyphenation": _let(_filled(b"a-")),
        "one endless comment": _HEAD + b"#" + _filled(b"x"),
        "a long sum": _let(_filled(b"1 s + ") + b"1 s"),
        "a long product": _let(b"1 s" + _filled(b" * 9e30")),
        "minus after minus": _let(_filled(b"- ") + b"1 s"),
        "deep parentheses": _let(_filled(b"(", 500_000) + b"1 s" + _filled(b")", 500_000)),
        "names nobody knows": _body(b"hold for unknown\n", 200_000),
        "verbs nobody knows": _body(b"holt for 1 s\n", 200_000),
        "wrong units": _body(b"hold for 1 volts;", 200_000),
        "lanes in lanes": _body(b"alongside { lane { ", 200_000),
        "repeats in repeats": _body(b"repeat 1000 { ", 600) + b"hold for 1 s" + b"}" * 43,
        "a long list of values": _HEAD
        + b"sequence run { each v of "
        + _filled(b"1 V, ")
        + b"1 V {} }",
        "many targets": _body(b"ramp { " + b"C1, " * 5000 + b"C1 = 1 V } over 1 s\n", 200_000),
        "empty file": b"",
        "only a byte order mark": b"\xef\xbb\xbf",
        "doubling procedures": _HEAD + _doubling() + b"sequence run { do p40() }\n",
        "doubling lets": _HEAD + _powers() + b"sequence run { hold for x60 }\n",
    }
    traps = {
        "deep arrays": b"x = " + _filled(b"[", 900_000),
        "deep tables": b"x = " + _filled(b"{a=", 900_000),
        "a dotted key": _filled(b"a.", 900_000) + b"a = 1",
        "a dotted header": b"[" + _filled(b"a.", 900_000) + b"a]",
        "headers": _filled(b"[[electrode]]\n", 900_000),
        "keys": b"".join(b"key%d = 1\n" % number for number in range(60_000)),
        "rests": BENCH + b"".join(b"x%d = '1 V'\n" % number for number in range(40_000)),
        "an endless integer": b"wellseq-trap = " + _filled(b"1", 900_000),
        "an endless text": b'name = "' + _filled(b"x", 900_000) + b'"',
        "quotation marks": _filled(b'"', 900_000),
        "brackets": _filled(b"[", 900_000),
        "too long": _filled(b"# x\n", 2_000_000),
        "two megabytes of nothing": _filled(b"\n", 2_000_000),
    }
    return {
        **{name: (False, data) for name, data in sequences.items()},
        **{f"trap: {name}": (True, data) for name, data in traps.items()},
    }


def _doubling() -> bytes:
    """Each procedure calls the one before it twice."""
    first = b"procedure p0() { hold for 1 s }\n"
    return first + b"".join(
        b"procedure p%d() { do p%d(); do p%d() }\n" % (n, n - 1, n - 1) for n in range(1, 41)
    )


def _powers() -> bytes:
    """Each let is the square of the one before it."""
    return b"let x0 = 7\n" + b"".join(
        b"let x%d = x%d * x%d\n" % (n, n - 1, n - 1) for n in range(1, 61)
    )
