"""Whole files: nothing raises, every place is in the text, planted mistakes are found."""

from __future__ import annotations

import random
import re

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.base.names import RESERVED
from wellseq.base.quantity import UNITS
from wellseq.text.parse import parse
from wellseq.text.tree import Assignment, Block

NIGHT = """\
wellseq 1
trap "saltmarsh.trap.toml"
use "common/gates.well"
let wall = 90 V
let hv = 4.5 kV
cloud coolant is electron { number 6e7 ± 10 %; radius 0.8 mm; temperature 300 K }
cloud bunch is antiproton { number 8e4 ± 30 %; energy 5 keV ± 2 keV; duration 150 ns }
pattern cradle {
  C3, C9 = -wall
  C4..C8 = 10 V
  others = 0 V
}
pattern poised { C4..C8 = -25 V; others keep }
procedure lift(height) {
  ramp { C13, C19 = height } over 20 ms
}
sequence evening_mixing {
  begin with coolant in cradle at C6
  throw G2 to -hv
  do lift(60 V)
  "take the bunch"
  catch bunch {
    between G1 and G2
    at -hv
    closing 620 ns after bunch_arrival
  }
  cool bunch with coolant for 60 s until 150 K
  assume temperature of bunch 140 K ± 40 K because "measured on 12 May, log 311"
  require temperature of bunch below 200 K
  throw G1, G2 to lv20
  require depth of bunch above 40 V
  alongside {
    lane { rotate coolant on R6 from 0.2 MHz to 1.6 MHz at 0.5 V for 20 s }
    lane { ramp { C24..C26 = 2 V } over 5 s }
  }
  ramp poised over 50 ms smoothly
  kick coolant through C3 to 0 V for 300 ns keeping bunch
  evaporate bunch through C9 to 60 mV over 40 s
  load positrons at C16 for 20 s
  nest bunch around positrons using mixing over 200 ms
  hold for 1 s
  set mcp_bias off
  expect valve closed
  repeat 4 { hold for 10 s; ramp mixing over 50 ms smoothly }
  each depth of 10 V, 20 V { do lift(depth / 2 + 1 V) }
  await bunch_arrival within 130 s
  release bunch through C12 to 0 V over 10 ms
    allow ramp-not-adiabatic because "the cloud is dumped next"
}
"""


def flat(tree):
    """Every statement of a tree as (line, outline without inner blocks), depth told by none."""
    found, waiting = [], list(tree.statements)
    while waiting:
        item = waiting.pop()
        found.append(item)
        for operand in getattr(item, "operands", ()):
            if isinstance(operand, Block):
                waiting.extend(operand.items)
    return sorted(found, key=lambda item: (item.place.line, item.place.column))


def marks(item):
    """What is left of a statement when its place and its blocks are taken away."""
    text = re.sub(r"Place\([^)]*\)", "", repr(item))
    while "Block(" in text:
        start = text.rindex("Block(")
        depth, end = 1, start + len("Block(")
        while depth:
            depth += {"(": 1, ")": -1}.get(text[end], 0)
            end += 1
        text = text[:start] + text[end:]
    return text


def first_name(item):
    """The first name of a statement or an assignment."""
    if isinstance(item, Assignment):
        return item.targets[0]
    return item.verb or item.clauses[0].word


def test_the_night_has_every_statement_at_its_line():
    tree = parse(NIGHT, "run.well")
    assert tree.mistakes == ()
    assert len(flat(tree)) == 55
    lines = NIGHT.split("\n")
    for item in flat(tree):
        place = first_name(item).place
        written = lines[place.line - 1][place.column - 1 : place.end_column - 1]
        assert written.split("..")[0] in marks(item)


SNIPPETS = st.one_of(
    st.sampled_from([*sorted(RESERVED), *UNITS, *'{}();,=+-*/"#±.%\n\r\t', "..", "+-", "\r\n"]),
    st.sampled_from(
        ["C4", "hold", "ramp-not", "1.5", "20 sec", "1,5 V", '"a"', " ", "\u2028", "٣"]
    ),
    st.text(max_size=4),
)


@settings(max_examples=300, deadline=None)
@given(st.lists(SNIPPETS, max_size=60).map("".join))
def test_no_text_raises_and_every_place_is_in_it(source):
    tree = parse(source, "f")
    lines = list(tree.lines())
    for place in [mistake.place for mistake in tree.mistakes] + [each.place for each in flat(tree)]:
        assert (place.line, place.column) < (place.end_line, place.end_column)
        assert place.end_line <= len(lines)
        assert place.end_column <= len(lines[place.end_line - 1]) + 1
    assert tree == parse(source, "f")


@settings(max_examples=60, deadline=None)
@given(st.text(alphabet=st.characters(), max_size=200))
def test_no_unicode_text_raises(source):
    parse(source, "f")
    parse(f'hold "{source}" for {source}', "f")


@settings(max_examples=80, deadline=None)
@given(st.integers(0, 2**32))
def test_a_shuffled_night_does_not_raise(seed):
    choose = random.Random(seed)
    tokens = re.findall(r"\s+|\w+|.", NIGHT)
    for _ in range(choose.randrange(1, 30)):
        one, other = choose.randrange(len(tokens)), choose.randrange(len(tokens))
        tokens[one], tokens[other] = tokens[other], tokens[one]
    parse("".join(tokens), "f")


def whole_lines():
    """Lines of the night that are a statement of their own: number and text."""
    for number, line in enumerate(NIGHT.split("\n"), start=1):
        text = line.strip()
        alone = parse(text, "f")
        if text and not alone.mistakes and text.split()[0] not in (*RESERVED, '"take'):
            yield number, line


LINES = list(whole_lines())


def spoil(choose, line):
    """Delete one character, or one word, of a line; never its indentation or a brace's twin."""
    spans = [match.span() for match in re.finditer(r"\w+|[^\w\s]", line)]
    start, end = choose.choice(spans)
    if choose.random() < 0.5:
        start = choose.randrange(start, end)
        end = start + 1
    return line[:start] + line[end:]


def balance(line):
    return line.count("{") - line.count("}")


def joins_a_neighbour(line):
    """A lost word may leave a line that goes on with the one above, or is gone on with below."""
    text = line.strip()
    is_label = text.count('"') == 2 and text[0] == text[-1] == '"'
    return is_label or text.endswith((",", "+", "-", "/", "*")) or text.split()[0] in RESERVED


@pytest.mark.parametrize("seed", range(150))
def test_planted_mistakes_are_located_and_the_rest_survives(seed):
    choose = random.Random(seed)
    lines = NIGHT.split("\n")
    planted = {}
    for number, line in choose.sample(LINES, 5):
        broken = spoil(choose, line)
        # Two braces lost in one file can cancel each other: that is another text, not a mistake.
        if balance(broken) == 0 or all(balance(other) == 0 for other in planted.values()):
            planted[number] = lines[number - 1] = broken
    tree = parse("\n".join(lines), "run.well")
    joins = {number for number, line in planted.items() if joins_a_neighbour(line)}
    malformed = {number for number, line in planted.items() if parse(line.strip(), "f").mistakes}
    found = {mistake.place.line for mistake in tree.mistakes}
    touched = joins | {number + step for number in joins for step in (-1, 1)}
    assert malformed - touched <= found <= malformed | touched
    touched |= set(planted)
    before = {marks(item) for item in flat(parse(NIGHT, "f")) if item.place.line not in touched}
    assert before <= {marks(item) for item in flat(tree)}


def test_this_planting_breaks_most_lines_that_it_touches():
    choose = random.Random(0)
    broken = [spoil(choose, line) for _ in range(20) for _, line in LINES]
    share = sum(bool(parse(line.strip(), "f").mistakes) for line in broken) / len(broken)
    assert 0.15 < share < 0.95
