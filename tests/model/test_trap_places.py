"""The places of TOML keys, against a text whose places were counted by hand, and by a law."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.model.toml_places import (
    DOTS_MAX,
    ELEMENTS_MAX,
    NESTING_MAX,
    TOKENS_MAX,
    WORD_MAX,
    locate,
)
from wellseq.model.toml_places import (
    Path as KeyPath,
)

TEXT = '''# a comment with [brackets] = "and" signs
top = 1
"quoted key" = 'x' # [[no]]
  indented.deep . key = """
not = "a key"
[nor a table]"""

[one]
list = [ "a",  # ]
  [1, 2.5], { k = 'v', m.n = [7] } ]
after = 1979-05-27 07:32:00

  [[many]]
name = "first"
[many.inner]
x = 1
[[many]]
name = "µs"; [[many.deep]]
[[many.deep]]
y = '\'' # lone quote
'''
PLACES = {
    ("top",): (2, 1),
    ("quoted key",): (3, 1),
    ("indented",): (4, 3),
    ("indented", "deep", "key"): (4, 3),
    ("one",): (8, 1),
    ("one", "list"): (9, 1),
    ("one", "list", 0): (9, 10),
    ("one", "list", 1): (10, 3),
    ("one", "list", 1, 1): (10, 7),
    ("one", "list", 2): (10, 13),
    ("one", "list", 2, "k"): (10, 15),
    ("one", "list", 2, "m", "n"): (10, 24),
    ("one", "list", 2, "m", "n", 0): (10, 31),
    ("one", "after"): (11, 1),
    ("many",): (13, 3),
    ("many", 0): (13, 3),
    ("many", 0, "name"): (14, 1),
    ("many", 0, "inner"): (15, 1),
    ("many", 0, "inner", "x"): (16, 1),
    ("many", 1): (17, 1),
    ("many", 1, "name"): (18, 1),
    ("many", 1, "deep", 0, "y"): (20, 1),
}


@pytest.mark.parametrize("path", PLACES, ids=str)
@pytest.mark.parametrize("line_end", ["\n", "\r\n"])
def test_places_counted_by_hand(path: KeyPath, line_end: str) -> None:
    place = locate(TEXT.replace("\n", line_end), "f").of(path)
    assert (place.file, place.line, place.column) == ("f", *PLACES[path])


def test_a_place_ends_where_its_key_ends() -> None:
    places = locate(TEXT, "f")
    assert places.of(("top",)).end_column == 4
    assert places.of(("one",)).end_column == 6
    assert places.of(("one", "list", 0)).end_column == 13
    assert places.of(("indented", "deep", "key")).end_column == 22


def test_an_unknown_path_is_at_what_would_hold_it() -> None:
    places = locate(TEXT, "f")
    assert places.of(("many", 1, "nowhere", 3)) == places.of(("many", 1))
    assert str(places.of(("nowhere",))) == "f:1:1"


def test_keys_given_twice() -> None:
    source = "a = 1\n[t]\nb = 2\nb = 3\n"
    places = locate(source, "f")
    assert [str(places.span(*span)) for span in places.repeated] == ["f:4:1"]
    assert locate(TEXT, "f").repeated == []


@pytest.mark.parametrize(
    ("at_limit", "beyond", "said"),
    [
        ("a=" + "[" * NESTING_MAX, "a=" + "[" * (NESTING_MAX + 1), "nested"),
        ("a" + ".a" * DOTS_MAX, "a" + ".a" * (DOTS_MAX + 1), "too many parts"),
        ("a" * WORD_MAX, "a" * (WORD_MAX + 1), "too long"),
        ("\n" * TOKENS_MAX, "\n" * (TOKENS_MAX + 1), "too much"),
    ],
    ids=["nesting", "dots", "word", "tokens"],
)
def test_limits_at_and_one_beyond(at_limit: str, beyond: str, said: str) -> None:
    assert locate(at_limit, "f").excess is None
    excess = locate(beyond, "f").excess
    assert excess is not None
    assert said in excess.message


def test_strings_hold_nothing_that_counts() -> None:
    source = "a = '" + "[" * 200 + "." * 200 + '\'\nb = """' + "[.\n" * 200 + '"""\nc = 1\n'
    places = locate(source, "f")
    assert places.excess is None
    assert places.of(("c",)).line == 203


def test_only_so_many_elements_have_their_own_place() -> None:
    places = locate("a = [" + "1," * (ELEMENTS_MAX + 1) + "]", "f")
    assert places.of(("a", ELEMENTS_MAX - 1)).column == 6 + 2 * (ELEMENTS_MAX - 1)
    assert places.of(("a", ELEMENTS_MAX)) == places.of(("a",))


keys = st.sampled_from(["a", "bb", "c-d", "e_1", '"q k"', "'l.k'"])
scalars = st.sampled_from(['"x"', "'y # ['", "1", "-2.5e3", "true", '"""m\n[n]"""', "1979-05-27"])
values = st.recursive(
    scalars,
    lambda inner: st.lists(inner, max_size=3).map(lambda items: "[ " + ", ".join(items) + "\n]"),
    max_leaves=6,
)


@st.composite
def documents(draw: st.DrawFn) -> str:
    """TOML texts without a repeated key or table."""
    lines = []
    for number in range(draw(st.integers(0, 4))):
        lines.append(draw(st.sampled_from([f"[t{number}]", "[[rows]]", f"[s.u{number}]"])))
        for key in draw(st.lists(keys, unique=True, max_size=4)):
            lines.append(f"{draw(st.sampled_from(['', '  ']))}{key} = {draw(values)} # note")
    return "\n".join(lines)


def leaves(value: object, path: KeyPath = ()) -> list[KeyPath]:
    """Every path at which the standard reader has a key."""
    found: list[KeyPath] = []
    pairs = enumerate(value) if isinstance(value, list) else ()
    for key, inner in value.items() if isinstance(value, dict) else pairs:
        found += [(*path, key), *leaves(inner, (*path, key))]
    return found


@given(documents())
def test_every_key_of_the_standard_reader_has_a_place_where_it_is_written(source: str) -> None:
    places = locate(source, "f")
    lines = source.split("\n")
    for path in leaves(tomllib.loads(source)):
        assert path in places.spans
        place = places.of(path)
        written = lines[place.line - 1][place.column - 1 :]
        key = path[-1]
        if isinstance(key, str):
            header = written.lstrip("[").removeprefix("" if key == "s" else "s.")
            assert header.lstrip("\"'").startswith(key)


@given(st.text(alphabet="ab.=[]{}\"'#\\\n\r ,1µ", max_size=60))
def test_anything_at_all_is_located_without_an_error(source: str) -> None:
    places = locate(source, "f")
    for start, end in places.spans.values():
        assert 0 <= start < end <= len(source)


def test_the_shared_trap_is_located_whole() -> None:
    source = Path(__file__).with_name("pool.trap.toml").read_text(encoding="utf-8")
    places = locate(source, "f")
    assert all(path in places.spans for path in leaves(tomllib.loads(source)))
