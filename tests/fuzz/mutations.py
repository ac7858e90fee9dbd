"""A number → a damaged file: what tired fingers, broken disks and ill will make of a good one."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path
from random import Random

BENCH = Path(__file__).with_name("bench.trap.toml").read_bytes()
SEQUENCES = tuple(
    text.encode()
    for text in (
        """wellseq 1
trap "bench.trap.toml"
let wall = 40 V
cloud pool is electron { number 6e7 ± 10 %; radius 0.8 mm; temperature 300 K }
pattern cradle { C1, C3 = -wall; C2 = 10 V }
sequence fill {
  begin with pool in cradle at C2
  ramp { C1..C2 = -wall / 2; others keep } over 20 ms smoothly  # slow
  hold for 1 s
}
""",
        """wellseq 1
trap "bench.trap.toml"
cloud pool is electron { number 6e7 }
procedure lift(height, pause) { ramp { C1 = height } over pause; hold for pause * 2 }
sequence twice {
  load pool at C2 for 1 s
  repeat 3 { do lift(5 V, 20 ms) }
  each step of 1 V, 2 V { ramp { C2 = step } over 10 ms }
  cool pool for 2 s
  rotate pool on C3 from 0.1 MHz to 0.3 MHz at 0.5 V for 2 s backwards
  release pool through C1 to 0 V over 5 ms
}
""",
        """wellseq 1
trap "bench.trap.toml"
sequence gates {
  "shut" throw G1 to -2 kV
  await arrival within 5 s
  set valve open; expect valve open
  throw G1 to a3
  alongside {
    lane { ramp { C1 = 5 V } over 5 ms }
    lane { hold for (1 / 200 Hz) + 3 µs }
  }
  require time after "shut" below 60 s
}
""",
        """wellseq 1
trap "bench.trap.toml"
use "good.well"
cloud a is positron { number 1e6 ± 5 % }
cloud b is antiproton { number 1e4; energy 5 keV ± 2 keV }
sequence nests {
  load a at C2 for 100 ms
  load b at C1 for 1 s
  nest b around a using shared over 200 ms
  require depth of a above 1 V allow well-too-shallow because "a test"
  assume temperature of a 140 K ± 40 K because "log 3"
  evaporate a through C1 to 60 mV over 4 s
  kick a through C3 to 0 V for 3 us keeping b
}
""",
    )
)
GOOD = b"""wellseq 1
let high = 12 V
pattern shared { C1 = high; C3 = -high }
procedure settle(time) { hold for time }
"""
HOSTILE = (
    *(b"1e400 V", b"1e-400 V", b"1e40 V", b"9" * 5000, b"0" * 3000 + b"1 V", b"1e999999999"),
    *(
        b"(" * 2000,
        b"{" * 300,
        b"}" * 300,
        b"[" * 2000,
        b"{ lane " * 70,
        b"- " * 500,
        b"5 V + " * 400,
    ),
    *(b"repeat 1000000000 {", b"repeat 1e12 { repeat 1e12 {", b"repeat 99999 { repeat 99999 {"),
    *(
        b"repeat 0 {",
        b"repeat -3 {",
        b"repeat 2.5 {",
        b"each x of 1 V {",
        b"alongside {",
        b"lane {",
    ),
    *(b"\0", b"\xed\xa0\x80", b"\xff", b"\xc3", b"\xef\xbb\xbf", b"\xf4\x90\x80\x80", b"\x1b[31m"),
    *("\u202e".encode(), "\u2028".encode(), "\u0085".encode(), b"\x0c", b"\x0b", b"\r", b"\n\n\n"),
    *("٣".encode(), "１２ V".encode(), "e\u0301".encode(), "\u00b5s".encode(), "\u03bcs".encode()),
    *(b"a" * 10_000, "ä".encode() * 300, b"1_000 V", b"1,5 V", b"0x10 V", b"nan", b"inf", b"5 Vs"),
    *(b"5 volt", b"5 kv", b"3 usec", b"4 V/sec", b"2 m/s/s", b"1 / 0", b"0 V", b"0 s", b"-5 s"),
    *(
        b'"',
        b'""',
        b"#",
        b"..",
        b"C3..C1",
        b"C1..",
        b"= =",
        b"others",
        b"keep",
        b"+- 3 V",
        b"\xb1 3 V",
    ),
    *(b'use "good.well"', b'use "../x.well"', b'use "/dev/zero"', b'trap "/dev/zero"', b'trap "."'),
    *(b'use "run.well"', b'trap "good.well"', b'use "missing.well"', b'use "bench.trap.toml"'),
    *(
        b"do settle(1 s)",
        b"do lift(lift)",
        b"do lift",
        b"procedure p() { do p() }",
        b"sequence x {",
    ),
    *(b"allow lag-too-long", b"because", b"is", b"let s = 5 V", b"let C1 = 5 V", b"wellseq 2"),
    *(b"const", b"hold for 1e9 s", b"hold for 1 fs", b"ramp {} over 1 s", b"set valve wide"),
    *(b"[[electrode]]", b"[bore]", b"a." * 400 + b"b = 1", b"x = 1979-05-27T07:32:00Z", b"= true"),
    *(
        b'"""',
        b"'''",
        b"{ a = 1 }",
        b"= [1, [2, [3]]]",
        b"= nan",
        b"= 1e999",
        b"= -0x1p3",
        b'= "5"',
    ),
    *(
        b'name = "C1"',
        b'output = "nobody"',
        b"sectors = 5",
        b'range = ["5 V", "-5 V"]',
        b"bits = 99",
    ),
    *(b'clock = "1e-30 s"', b'slew = "0 V/us"', b'from = "NaN mm"', b'levels = ["a1", "a1"]'),
)
"""Things that have no place in a good file, or not there."""
_TOKEN = re.compile(rb"\w+|[^\w\s]|\s+")


def _place(data: bytes, rng: Random) -> int:
    return rng.randint(0, len(data))


def _stretch(data: bytes, rng: Random, most: int) -> tuple[int, int]:
    start = _place(data, rng)
    return start, min(len(data), start + rng.randint(1, most))


def _flip(data: bytes, rng: Random) -> bytes:
    if not data:
        return data
    at = rng.randrange(len(data))
    return data[:at] + bytes([data[at] ^ (1 << rng.randrange(8))]) + data[at + 1 :]


def _delete(data: bytes, rng: Random) -> bytes:
    start, end = _stretch(data, rng, rng.choice([1, 3, 30, 200]))
    return data[:start] + data[end:]


def _duplicate(data: bytes, rng: Random) -> bytes:
    start, end = _stretch(data, rng, 80)
    return data[:end] + data[start:end] * rng.choice([1, 1, 2, 20]) + data[end:]


def _move(data: bytes, rng: Random) -> bytes:
    start, end = _stretch(data, rng, 60)
    rest = data[:start] + data[end:]
    at = _place(rest, rng)
    return rest[:at] + data[start:end] + rest[at:]


def _swap(data: bytes, rng: Random) -> bytes:
    tokens = _TOKEN.findall(data)
    if len(tokens) < 2:
        return data
    one, other = rng.randrange(len(tokens)), rng.randrange(len(tokens))
    tokens[one], tokens[other] = tokens[other], tokens[one]
    return b"".join(tokens)


def _replace(data: bytes, rng: Random) -> bytes:
    tokens = _TOKEN.findall(data)
    if not tokens:
        return data
    tokens[rng.randrange(len(tokens))] = rng.choice(HOSTILE)
    return b"".join(tokens)


def _insert(data: bytes, rng: Random) -> bytes:
    ends = [match.end() for match in _TOKEN.finditer(data)] or [0]
    at = rng.choice(ends)
    blank = rng.choice([b"", b" ", b"\n"])
    return data[:at] + blank + rng.choice(HOSTILE) + blank + data[at:]


def _noise(data: bytes, rng: Random) -> bytes:
    at = _place(data, rng)
    return data[:at] + rng.randbytes(rng.choice([1, 2, 40])) + data[at:]


def _misspell(data: bytes, rng: Random) -> bytes:
    words = [match for match in re.finditer(rb"[A-Za-z]+", data) if len(match[0]) > 1]
    if not words:
        return data
    match = rng.choice(words)
    word = bytearray(match[0])
    at = rng.randrange(len(word) - 1)
    word[at], word[at + 1] = word[at + 1], word[at]
    wrong = rng.choice([bytes(word), match[0].swapcase(), match[0] + b"s", match[0][:-1]])
    return data[: match.start()] + wrong + data[match.end() :]


def _truncate(data: bytes, rng: Random) -> bytes:
    return data[: _place(data, rng)]


def _encode(data: bytes, rng: Random) -> bytes:
    text = data.decode("utf-8", "replace")
    way = rng.choice(["utf-16", "utf-16-le", "latin-1", "utf-8-sig", "cp1252", "utf-7"])
    return text.encode(way, "replace")


def _line_ends(data: bytes, rng: Random) -> bytes:
    return data.replace(b"\n", rng.choice([b"\r\n", b"\r", b"\n\r", b" ", b";"]))


COMMON: tuple[Callable[[bytes, Random], bytes], ...] = (
    *(_flip, _delete, _duplicate, _move, _swap, _replace, _insert, _noise, _misspell),
)
RARE: tuple[Callable[[bytes, Random], bytes], ...] = (_truncate, _encode, _line_ends)


def mutated(number: int, bases: tuple[bytes, ...]) -> bytes:
    """The damaged file of a number: one to four damages to one of the bases."""
    rng = Random(f"damage {number}")
    data = rng.choice(bases)
    for _ in range(rng.choice([1, 1, 1, 2, 2, 3, 4])):
        data = rng.choice(COMMON if rng.random() < 0.93 else RARE)(data, rng)
    return data
