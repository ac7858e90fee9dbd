"""The one layout: what it looks like, and that nothing is lost on the way to it."""

from __future__ import annotations

import os
import sys
from itertools import count
from pathlib import Path

import pytest

from wellseq.pipeline import table_hash
from wellseq.text.parse import parse
from wellseq.text.same import same
from wellseq.text.tidy import comments, tidy

sys.path.append(str(Path(__file__).parents[1] / "differential"))
from programs import program

PROGRAMS = int(os.environ.get("WELLSEQ_TIDY_PROGRAMS", "150"))
"""Generated programs, most of two files each; 10,000 of them are more than 19,000 files."""

MORE = count(1)
"""So that a text laid out twice gets longer each time."""
UNTIDY = """\


wellseq   1 ;
trap "a.trap.toml"   # the bench
use   "b.well"; ; # others
let  a=3V;let b =-( a+2*1 V )/3
cloud pool is electron{number 6e7 +- 10%;radius 0.8mm; }


# of the pattern
pattern p {

C3 , C9=−a
   C4 .. C8 = 10V ;others keep

}
procedure lift( h,t ) { ramp {C13,C19=h} over t smoothly }
sequence night {
 "one"
begin with pool in p at C6
"two" hold
  for 20 µs
   catch pool {
     between G1 and G2
      at -4.5kV
      closing 620ns after bunch
  }
  allow off-clock because "why"
  alongside { lane { hold for 1 s } lane {
      do lift( 5 V,
       2 s )
      }}
  # the end
}
# after it"""

TIDY = """\
wellseq 1
trap "a.trap.toml"  # the bench
use "b.well"        # others
let a = 3 V; let b = -(a + 2 * 1 V) / 3
cloud pool is electron { number 6e7 ± 10 %; radius 0.8 mm }

# of the pattern
pattern p {
  C3, C9 = -a
  C4..C8 = 10 V; others keep
}
procedure lift(h, t) { ramp { C13, C19 = h } over t smoothly }
sequence night {
  "one"
  begin with pool in p at C6
  "two" hold
    for 20 us
  catch pool {
    between G1 and G2
    at -4.5 kV
    closing 620 ns after bunch
  }
    allow off-clock because "why"
  alongside { lane { hold for 1 s } lane {
      do lift(5 V,
        2 s)
  } }
  # the end
}
# after it
"""


def test_the_one_layout() -> None:
    assert tidy(UNTIDY) == TIDY
    assert tidy(TIDY) == TIDY


def faults(text: str) -> list[str]:
    """What is wrong with the layout that a text gets."""
    once = tidy(text)
    if once is None:
        return ["no layout"]
    found = []
    if tidy(once) != once:
        found.append("not settled")
    if not same(parse(text, "a"), parse(once, "a")):
        found.append("another tree")
    if comments(text) != comments(once):
        found.append("comments differ")
    return found


def test_generated_files_lose_nothing() -> None:
    files = 0
    for number in range(PROGRAMS):
        one = program(number)
        for text in filter(None, (one.text, one.used)):
            assert faults(text) == [], (number, text)
            files += 1
    assert files > 1.5 * PROGRAMS


def test_generated_files_keep_their_tables(tmp_path: Path) -> None:
    lagoon = Path(__file__).parents[1] / "differential" / "lagoon.trap.toml"
    (tmp_path / lagoon.name).write_bytes(lagoon.read_bytes())
    hashes = []
    for number in range(40):
        one = program(number)
        for lay_out in (lambda text: text, tidy):
            (tmp_path / "a.well").write_bytes((lay_out(one.text) or "").encode())
            (tmp_path / "shared.well").write_bytes((lay_out(one.used or "") or "").encode())
            hashes.append(table_hash(tmp_path / "a.well"))
    assert hashes[::2] == hashes[1::2]
    assert len(set(hashes)) > 35


@pytest.mark.parametrize(
    ("spoil", "said"),
    [
        (lambda text: text.replace("10 V", "11 V"), "another tree"),
        (lambda text: text.replace("# of the pattern", ""), "comments differ"),
        (lambda text: text + "\n" * next(MORE), "not settled"),
    ],
)
def test_a_layout_that_loses_something_is_seen(spoil, said, monkeypatch) -> None:
    monkeypatch.setattr(sys.modules[__name__], "tidy", lambda text: spoil(tidy_as_it_is(text)))
    assert said in faults(UNTIDY)


tidy_as_it_is = tidy


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
@pytest.mark.parametrize("mark", ["", "\ufeff"])
def test_line_ends_and_the_byte_order_mark_are_kept(end: str, mark: str) -> None:
    text = mark + UNTIDY.replace("\n", end)
    assert tidy(text) == mark + TIDY.replace("\n", end)


def test_mixed_line_ends_become_the_most_frequent() -> None:
    assert tidy("wellseq 1\r\nlet a = 1 V\r\nlet b = a\n") == (
        "wellseq 1\r\nlet a = 1 V\r\nlet b = a\r\n"
    )


@pytest.mark.parametrize(
    "text", ["let a 3 V\n", "sequence x {\n", "hold for 5 sec\n", "let a = 1,5 V\n", '"x\n']
)
def test_a_text_with_mistakes_has_no_layout(text: str) -> None:
    assert tidy(text) is None


@pytest.mark.parametrize(
    "text",
    [
        # Without these semicolons the next line would go on with the statement.
        "catch a {\n  between b and c;\n  at 3 V\n}\n",
        "repeat 2 { hold for 1 s };\nover x 3 V\n",
    ],
)
def test_a_semicolon_that_does_something_stays(text: str) -> None:
    once = tidy(text)
    assert once is None or (";" in once and same(parse(text, ""), parse(once, "")))


def test_empty_texts() -> None:
    assert tidy("") == ""
    assert tidy("\n\n ;\n") == ""
    assert tidy("# only a remark") == "# only a remark\n"


def test_same_looks_at_everything_but_places() -> None:
    one = parse("let a = 1 V\n", "a")
    assert same(one, parse("\n\nlet   a = 1 V", "b"))
    for other in ("let b = 1 V", "let a = 2 V", "let a = 1 s", "let a = 1 V; let a = 1 V", ""):
        assert not same(one, parse(other, "a"))
