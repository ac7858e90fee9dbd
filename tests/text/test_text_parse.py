"""Whole files: nothing raises, what is rendered is read back, planted mistakes are found; speed."""

from __future__ import annotations

import gc
import random
import re
import time
from fractions import Fraction

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


# --- what is rendered is read back ---------------------------------------------------------------


class Writer:
    """Writes random valid statements; each method gives the text and its outline."""

    def __init__(self, seed):
        self.random = random.Random(seed)

    def name(self):
        """No reserved word, no unit, none of the words that make another shape."""
        taken = {*RESERVED, *UNITS, "let", "set", "expect", "others"}
        while True:
            rest = "".join(self.random.choices("abcdenosvé_0189", k=self.random.randrange(6)))
            name = self.random.choice("aCGkréл_") + rest
            if name not in taken:
                return name

    def gap(self):
        """What may stand where a line may end without ending the statement."""
        return self.random.choice([" ", "  ", "\n", " # remark {\n\t", "\r\n", "\u00a0"])

    def end(self):
        """An end of a statement."""
        return self.random.choice(["\n", ";", " ;\n", "\r\n\n", ' # "end\n', "\r"])

    def atom(self):
        if self.random.random() < 0.5:
            name = self.name()
            return name, ("name", name)
        digits, value = self.random.choice(
            [
                ("0", 0),
                ("12.5", Fraction(25, 2)),
                ("3e2", 300),
                ("6E-3", Fraction(3, 500)),
                ("7.", 7),
            ]
        )
        unit = self.random.choice(["", *UNITS])
        blank = self.random.choice(["", " "]) if unit else ""
        return digits + blank + unit, ("number", value, unit)

    def value(self, depth=2):
        if depth == 0 or self.random.random() < 0.5:
            return self.atom()
        text, shape = self.value(depth - 1)
        if self.random.random() < 0.2:
            return f"-({text})", ("minus", shape)
        sign, (other, second) = self.random.choice("+-*/"), self.value(depth - 1)
        return f"({text}) {sign}{self.gap()}({other})", (sign, shape, second)

    def spread(self):
        text, shape = self.value()
        if self.random.random() < 0.7:
            return text, shape
        other, second = self.value()
        return f"{text} {self.random.choice(['±', '+-'])} {other}", ("±", shape, second)

    def several(self, make, least, most):
        """A comma-separated list."""
        pairs = [make() for _ in range(self.random.randint(least, most))]
        return ("," + self.gap()).join(text for text, _ in pairs), [shape for _, shape in pairs]

    def assignment(self):
        targets, names = self.several(lambda: (self.name(),) * 2, 1, 3)
        text, shape = self.spread()
        return f"{targets} = {text}", ("=", names, shape)

    def block(self, depth):
        pairs = [self.statement(depth) for _ in range(self.random.randrange(4))]
        inner = "".join(text + self.end() for text, _ in pairs)
        return f"{{{self.gap()}{inner}{self.gap()}}}", ("block", [shape for _, shape in pairs])

    def statement(self, depth=2):
        if self.random.random() < 0.2:
            return self.assignment()
        verb, label = self.name(), self.random.choice([None, "", "a {b} # é;"])
        text = verb if label is None else f'"{label}"{self.gap()}{verb}'
        operands, shapes = self.several(self.spread, 0, 3)
        text += " " + operands
        clauses, words, reasons = [], [], []
        for _ in range(self.random.randrange(3)):
            word = self.random.choice(sorted(RESERVED - {"allow", "because"}))
            inner, inner_shapes = self.several(self.spread, 1, 2)
            text += f"{self.gap()}{word} {inner}"
            clauses.append([word, inner_shapes])
        if (shapes or clauses) and depth and self.random.random() < 0.5:
            inner, shape = self.block(depth - 1)
            text += " " + inner
            shapes.append(shape)
        if (shapes or clauses) and self.random.random() < 0.3:
            words = [self.name() + "ly"]
            text += " " + words[0]
        if self.random.random() < 0.3:
            text += f'{self.gap()}allow well-lost{self.gap()}because "r;{{"'
            reasons = ["r;{"]
        return text, ("step", label, verb, shapes, clauses, words, reasons)


def shape_of(node):
    """The outline of a tree's node, in the notation of the strategies."""
    name = type(node).__name__
    if name == "Name":
        return ("name", node.text)
    if name == "Number":
        return ("number", node.value, node.unit)
    if name == "Negative":
        return ("minus", shape_of(node.operand))
    if name == "Binary":
        return (node.op, shape_of(node.left), shape_of(node.right))
    if name == "Spreading":
        return ("±", shape_of(node.value), shape_of(node.spread))
    if name == "Block":
        return ("block", [shape_of(item) for item in node.items])
    if isinstance(node, Assignment):
        return ("=", [target.text for target in node.targets], shape_of(node.value))
    return (
        "step",
        node.label and node.label.text,
        node.verb.text,
        [shape_of(item) for item in node.operands],
        [[each.word.text, [shape_of(item) for item in each.operands]] for each in node.clauses],
        [word.text for word in node.words],
        [allowed.reason.text for allowed in node.allowances],
    )


@settings(max_examples=150, deadline=None)
@given(st.integers(0, 2**32))
def test_what_is_rendered_is_read_back(seed):
    writer = Writer(seed)
    pairs = [writer.statement() for _ in range(4)]
    source = "".join(text + writer.end() for text, _ in pairs)
    tree = parse(source, "f")
    assert tree.mistakes == ()
    assert [shape_of(item) for item in tree.statements] == [shape for _, shape in pairs]


# --- planted mistakes ----------------------------------------------------------------------------


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


# --- speed ---------------------------------------------------------------------------------------

SIMPLE = [
    "hold for 10 s",
    "ramp mixing over 50 ms smoothly",
    "throw G1, G2 to lv20",
    "C4..C8 = 10 V",
    "kick coolant through C3 to 0 V for 300 ns keeping bunch",
]


def seconds(work):
    """Processor time of one call."""
    started = time.process_time()
    work()
    return time.process_time() - started


def read_simple(count):
    source = "\n".join(SIMPLE[number % len(SIMPLE)] for number in range(count))
    assert len(parse(source, "f").statements) == count


def test_ten_thousand_statements_are_read_in_a_second_and_growth_is_even():
    parse("hold", "f")
    few = many = reference = float("inf")
    for _ in range(2):
        # The machine may be busy: a loop of arithmetic beside it tells how fast it is just now.
        reference = min(reference, seconds(lambda: sum(n * n % 7 for n in range(1_000_000))))
        few = min(few, *(seconds(lambda: read_simple(1000)) for _ in range(3)))
        many = min(many, seconds(lambda: read_simple(10_000)))
    assert many < 20 * reference  # 0.7 s against 0.06 s, so at most 1.2 s
    assert many < 13 * few  # 10 is even; the collector left at work makes it more


@pytest.mark.parametrize("text", ["{", "(", "[", "}", ")", "[]", "()", "{}", "{(", "([{", "<>"])
def test_ten_megabytes_of_brackets_end_in_one_message(text):
    source = text * (10_000_000 // len(text))
    started = time.process_time()
    tree = parse(source, "f")
    assert time.process_time() - started < 2.0
    assert len({mistake.message for mistake in tree.mistakes}) <= 3
    assert len(tree.mistakes) == 1 or text in ("([{", "{(")


@pytest.mark.parametrize("was_on", [True, False])
def test_the_collector_is_left_as_it_was(was_on):
    before = gc.isenabled()
    try:
        (gc.enable if was_on else gc.disable)()
        parse("hold for\n" * 2000, "f")
        assert gc.isenabled() == was_on
    finally:
        (gc.enable if before else gc.disable)()
