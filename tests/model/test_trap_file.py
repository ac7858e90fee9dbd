"""The trap file as a file: what cannot be read, what is not TOML, what would cost too much."""

from __future__ import annotations

import os
import time
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from wellseq.base.finding import Mistake
from wellseq.model.text_file import read_text
from wellseq.model.trap import Trap
from wellseq.model.trap_draft import TABLES_MAX
from wellseq.model.trap_file import BYTES_MAX, read_trap, trap_from

SOURCE = Path(__file__).with_name("pool.trap.toml").read_text(encoding="utf-8")
NAMES = {
    *("unreadable-file", "syntax", "unknown-name", "unit-mismatch"),
    *("name-reused", "name-unused", "too-large", "trap-not-sound"),
}


def only(path: Path) -> Mistake:
    trap, mistakes = read_trap(path, "shown")
    assert trap is None
    assert len(mistakes) == 1
    assert mistakes[0].place.file == "shown"
    return mistakes[0]


def saved(folder: Path, content: bytes) -> Path:
    path = folder / "some.trap.toml"
    path.write_bytes(content)
    return path


def test_missing_folder_pipe_and_link(tmp_path: Path) -> None:
    target = saved(tmp_path, SOURCE.encode())
    link, pipe = tmp_path / "link.toml", tmp_path / "pipe.toml"
    link.symlink_to(target)
    os.mkfifo(pipe)
    said = {
        tmp_path / "nowhere.toml": "there is no such file",
        target / "below.toml": "not a directory",
        tmp_path: "it is a folder",
        link: "it is a symbolic link; name the file itself",
        pipe: "it is a device or a pipe, not a file",
        Path("/dev/null"): "it is a device or a pipe, not a file",
        tmp_path / "a\0b": "this is not a file name",
        tmp_path / ("x" * 5000): "file name too long",
    }
    for path, reason in said.items():
        mistake = only(path)
        assert mistake.name == "unreadable-file"
        assert mistake.message == f"cannot read 'shown': {reason}"


def test_a_file_at_the_limit_is_read_and_one_byte_more_is_not(tmp_path: Path) -> None:
    lines = "#" * 999 + "\n"
    full = SOURCE + lines * ((BYTES_MAX - len(SOURCE.encode())) // 1000)
    full += "#" * (BYTES_MAX - len(full.encode()))
    trap, _ = read_trap(saved(tmp_path, full.encode()), "shown")
    assert trap is not None
    mistake = only(saved(tmp_path, full.encode() + b"#"))
    assert (mistake.name, "longer than 1000000 bytes" in mistake.message) == (
        "unreadable-file",
        True,
    )


@pytest.mark.parametrize(
    ("content", "place", "said"),
    [
        ("name = 'é'".encode("latin-1"), "shown:1:9", "byte 0xe9 is not UTF-8"),
        ("µ = 1\r\n  é".encode() + b"\xff", "shown:2:4", "byte 0xff is not UTF-8"),
        (SOURCE.encode("utf-16"), "shown:1:1", "it is UTF-16"),
        (b"\xed\xa0\x80", "shown:1:1", "byte 0xed is not UTF-8"),
    ],
)
def test_what_is_not_utf8(tmp_path: Path, content: bytes, place: str, said: str) -> None:
    mistake = only(saved(tmp_path, content))
    assert (mistake.name, str(mistake.place)) == ("unreadable-file", place)
    assert said in mistake.message


def test_byte_order_mark_and_windows_line_ends(tmp_path: Path) -> None:
    content = b"\xef\xbb\xbf" + SOURCE.replace("\n", "\r\n").encode()
    trap, mistakes = read_trap(saved(tmp_path, content), "shown")
    assert mistakes == ()
    assert trap is not None
    assert trap.source.encode() == content
    assert trap.electrodes == sound().electrodes
    wrong = content.replace(b"bits = 16", b"bits = 99").replace(b"wellseq-trap = 1", b"x = 1")
    _, mistakes = read_trap(saved(tmp_path, wrong), "shown")
    assert [(m.place.line, m.place.column) for m in mistakes] == [(1, 1), (1, 1), (53, 1)]


def sound() -> Trap:
    trap, mistakes = trap_from(SOURCE, "shown")
    assert mistakes == ()
    assert trap is not None
    return trap


def test_reading_text_gives_it_as_stored(tmp_path: Path) -> None:
    path = saved(tmp_path, b"a\r\nb")
    assert read_text(path, "shown", 4) == "a\r\nb"
    assert isinstance(read_text(path, "shown", 3), Mistake)


@pytest.mark.parametrize(
    ("source", "place", "said", "hint"),
    [
        ('x = "abc', "1:9", "unterminated string", ""),
        ('x = "abc\ny = 1', "1:9", "this text has no closing quote on its line", ""),
        ("a = 1\nradius = 15 mm", "2:13", "the line should end here", "quotes"),
        ("radius = mm", "1:10", "a value is expected here", "quotes"),
        ("a = 1\n\na = 2\n", "3:1", "this key is given twice", "one of the two"),
        ("[t]\nb.c = 1\nb = 2\n", "3:1", "this key is given twice", "one of the two"),
        ("[field]\n[field]\n", "2:7", "this table or key is given twice", "[[name]]"),
        ("[[electrode]]\n[electrode]\n", "2:11", "this table or key is given twice", "[[name]]"),
        ("just words\n", "1:6", "expected '='", ""),
        ("a = [1, 2", "1:10", "unclosed array", ""),
        ("é = 1", "1:1", "invalid statement", ""),
        ("a = 1\rb = 2", "1:6", "the line should end here", ""),
        ("a = 2026-13-45", "1:9", "", ""),
        ('a = "\\ud800"', "1:12", "unicode", ""),
        ("\x00", "1:1", "invalid statement", ""),
    ],
)
def test_what_is_not_toml(source: str, place: str, said: str, hint: str) -> None:
    trap, mistakes = trap_from(source, "f")
    assert trap is None
    assert [mistake.name for mistake in mistakes] == ["syntax"]
    assert str(mistakes[0].place) == f"f:{place}", mistakes
    assert said.lower() in mistakes[0].message.lower()
    assert hint in mistakes[0].hint


MANY = 1_000_000
BOMBS = {
    "brackets": "a = " + "[" * 9000,
    "brackets in lines": "a = " + "[\n" * 100_000,
    "headers": "[" * 9000,
    "inline tables": "a = " + "{a=" * 3000,
    "dotted": "a" + ".a" * 4000 + " = 1",
    "dotted header": "[a" + ".a" * 4000 + "]",
    "eight dots": "\n".join(f"k{n}" + ".a" * 8 + " = 1" for n in range(40_000)),
    "long line": "#" * 10_001,
    "long number": "a = " + "9" * 5000,
    "long hexadecimal": "a = 0x" + "f" * 9000,
    "escaped quotes": '"""\n' + '\\"""\n' * (MANY // 5),
    "open quotes": ('a = "' + '\\"' * 4900 + "\n") * 100,
    "lone quotes": '"\n' * (MANY // 2),
    "tables": "[[electrode]]\n" * (MANY // 14),
    "keys": "\n".join(f"k{n} = 1" for n in range(90_000)),
    "elements": "a = [" + "1,\n" * 300_000 + "]",
    "levels": "[[output]]\nkind = 'switch'\nlevels = [" + "'a',\n" * 30_000 + "]",
    "blanks in a quantity": '[bore]\npatch = """' + " \n" * 400_000 + '1"""',
}


@pytest.mark.parametrize("name", BOMBS)
def test_nothing_costs_more_than_two_seconds(name: str) -> None:
    begun = time.process_time()
    trap, mistakes = trap_from(BOMBS[name][:MANY], "f")
    assert time.process_time() - begun < 2.0
    assert trap is None
    assert mistakes
    assert {mistake.name for mistake in mistakes} <= NAMES


def test_a_list_of_tables_at_the_limit_and_one_beyond() -> None:
    triggers = "".join(f'\n[[trigger]]\nname = "t{n}"' for n in range(TABLES_MAX - 1))
    trap, mistakes = trap_from(SOURCE + triggers, "f")
    assert mistakes == ()
    assert trap is not None
    assert len(trap.triggers) == TABLES_MAX
    source = SOURCE + triggers + '\n[[trigger]]\nname = "last"'
    trap, mistakes = trap_from(source, "f")
    assert trap is None
    assert [(mistake.name, mistake.hint) for mistake in mistakes] == [("too-large", "at most 1000")]
    assert mistakes[0].place.line == source.count("\n")


def stack(count: int) -> str:
    """A sound file with that many electrodes, each on its own output."""
    head = 'wellseq-trap = 1\nname = "many"\n[field]\nuniform = "1 T"\n'
    for n in range(count):
        head += f'[[electrode]]\nname = "E{n}"\nfrom = "{n * 10} mm"\nto = "{n * 10 + 9} mm"\n'
        head += f'radius = "10 mm"\noutput = "out{n}"\n'
        head += f'[[output]]\nname = "out{n}"\nrange = ["-1 V", "1 V"]\nslew = "1 V/us"\n'
        head += 'bits = 16\nclock = "1 us"\n'
    return head


def test_more_than_four_hundred_electrodes_are_fine() -> None:
    trap, mistakes = trap_from(stack(450), "f")
    assert mistakes == ()
    assert trap is not None
    assert len(trap.between("E0", "E449")) == 450


KEYS = sorted(
    {line.split(" = ")[0] for line in SOURCE.splitlines() if " = " in line} - {"C1", "G1", "lv20"}
)
HEADERS = sorted({line for line in SOURCE.splitlines() if line.startswith("[")})


def told_once(source: str, written: str, wrong: str, at: int) -> None:
    """Misspell the word at an offset: exactly that must be told, and how it is right."""
    assert source[at:].startswith(written)
    before = source[:at]
    trap, mistakes = trap_from(before + wrong + source[at + len(written) :], "f")
    assert trap is None
    assert [(mistake.name, mistake.hint) for mistake in mistakes] == [
        ("unknown-name", f"did you mean '{written}'?")
    ]
    assert mistakes[0].place.line == before.count("\n") + 1


@given(st.sampled_from(KEYS), st.data())
@settings(max_examples=150, deadline=None)
def test_a_misspelt_key_is_told_once_with_the_right_one(key: str, data: st.DataObject) -> None:
    starts = [n + 1 for n in range(len(SOURCE)) if SOURCE.startswith(f"\n{key} = ", n)]
    at = 0 if key == "wellseq-trap" else data.draw(st.sampled_from(starts))
    cut = data.draw(st.integers(1, len(key) - 1))
    doubled = key[:cut] + key[cut - 1] + key[cut:]
    dropped = key[:cut] + key[cut + 1 :]
    # One letter less of `range` or `offset` may look more like another key; doubling never does.
    wrong = data.draw(st.sampled_from([doubled, dropped] if len(key) > 6 else [doubled]))
    told_once(SOURCE, key, wrong, at)


@pytest.mark.parametrize("header", HEADERS)
def test_a_misspelt_header_is_told_once_with_the_right_one(header: str) -> None:
    key = header.strip("[]")
    wrong = header.replace(key, key + key[-1])
    source = SOURCE.replace(f"{header}\n", f"{wrong}\n")
    trap, mistakes = trap_from(source, "f")
    assert trap is None
    assert [mistake.name for mistake in mistakes] == ["unknown-name"], mistakes
    assert mistakes[0].hint == f"did you mean '{key.rpartition('.')[2]}'?"
    assert mistakes[0].place.line == source[: source.index(wrong)].count("\n") + 1


def test_a_misspelt_key_hides_no_other_fault_of_its_table() -> None:
    source = SOURCE.replace("[[output]]", "[[ouput]]").replace("bits = 16", "bits = 99")
    _, mistakes = trap_from(source.replace("capacitance", "capacity", 1), "f")
    assert [(mistake.name, mistake.place.line) for mistake in mistakes] == [
        ("unknown-name", 49),
        ("trap-not-sound", 53),
        ("unknown-name", 61),
    ]


@given(
    st.lists(st.tuples(st.integers(1, 400), st.integers(0, 200)), min_size=1, max_size=8),
    st.integers(-5000, 5000),
    st.integers(1, 32),
    st.sampled_from(["mm", "cm", "um"]),
    st.sampled_from([1, 4, 6, 8]),
)
@settings(max_examples=60, deadline=None)
def test_every_sound_stack_is_read_back(
    rings: list[tuple[int, int]], begin: int, bits: int, unit: str, sectors: int
) -> None:
    source = 'wellseq-trap = 1\nname = "any"\n[field]\nuniform = "-0.5 T"\n'
    source += f'[[output]]\nname = "a"\nrange = ["-1 V", "1 V"]\nslew = "1 V/us"\nbits = {bits}\n'
    source += 'clock = "1 us"\n'
    z = begin
    for number, (length, gap) in enumerate(rings):
        source += f'[[electrode]]\nname = "E{number}"\nfrom = "{z} {unit}"\n'
        source += f'to = "{z + length} {unit}"\nradius = "100 {unit}"\nsectors = {sectors}\n'
        source += 'output = "a"\n'
        z += length + gap
    trap, mistakes = trap_from(source, "f")
    assert mistakes == ()
    assert trap is not None
    assert [item.name for item in trap.electrodes] == [f"E{n}" for n in range(len(rings))]
    for one, other in zip(trap.electrodes, trap.electrodes[1:], strict=False):
        assert one.from_m < one.to_m <= other.from_m


@given(st.binary(max_size=200))
@settings(max_examples=150, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_any_bytes_give_one_answer_and_no_error(tmp_path: Path, content: bytes) -> None:
    trap, mistakes = read_trap(saved(tmp_path, content), "f")
    assert trap is None
    assert mistakes
    assert {mistake.name for mistake in mistakes} <= NAMES


@given(st.data())
@settings(max_examples=150, deadline=None)
def test_a_sound_file_damaged_anywhere_raises_nothing(data: st.DataObject) -> None:
    source = SOURCE
    for _ in range(data.draw(st.integers(1, 4))):
        start = data.draw(st.integers(0, len(source)))
        end = min(len(source), start + data.draw(st.integers(0, 12)))
        piece = data.draw(st.text(alphabet="[]{}=\".'\n #0-9eVmµ±\x00\ud7ff,T", max_size=6))
        source = source[:start] + piece + source[end:]
    trap, mistakes = trap_from(source, "f")
    assert (trap is None) == bool(mistakes)
    assert {mistake.name for mistake in mistakes} <= NAMES
    lines = source.split("\n")
    for mistake in mistakes:
        assert 1 <= mistake.place.line <= len(lines)
        assert 1 <= mistake.place.column <= len(lines[mistake.place.line - 1]) + 1
