"""A brace too few or too many is found where the layout says that it is."""

from __future__ import annotations

import pytest

from wellseq.text.braces import repairs_by_layout
from wellseq.text.parse import parse

GOOD = """\
pattern cradle {
  C1 = 1 V
}
procedure lift(height) { repeat 2 { ramp p } }
sequence night {
  begin with coolant in cradle at C1
  repeat 4 {
    hold for 1 s
    alongside {
      lane { hold for 2 s }
      lane { hold for 3 s }
    }
    hold for 4 s
  }
  hold for 5 s
}
let wall = 90 V
"""


def brace_spots(text):
    """Every brace of a text: offset, line, column."""
    for offset, char in enumerate(text):
        if char in "{}":
            line_start = text.rfind("\n", 0, offset) + 1
            yield offset, text.count("\n", 0, offset) + 1, offset - line_start + 1


SPOTS = list(brace_spots(GOOD))
PARTNERS = {}
_open = []
for _spot in SPOTS:
    if GOOD[_spot[0]] == "{":
        _open.append(_spot)
    else:
        PARTNERS[_spot] = _open.pop()


def survivors(tree):
    """The verbs and values of all statements in a tree, at whatever depth they stand."""
    found, waiting = [], list(tree.statements)
    while waiting:
        item = waiting.pop()
        if hasattr(item, "operands"):
            found.append(item.verb.text)
            if item.block():
                waiting.extend(item.block().items)
    return sorted(found)


@pytest.mark.parametrize("spot", PARTNERS, ids=str)
def test_a_missing_closing_brace_points_to_the_one_that_is_open(spot):
    offset = spot[0]
    tree = parse(GOOD[:offset] + GOOD[offset + 1 :], "run.well")
    (mistake,) = tree.mistakes
    _, line, column = PARTNERS[spot]
    assert mistake.place.line == line
    # Of two blocks on one line no layout tells which it was; the outer one is open at the end.
    assert mistake.place.column == column or GOOD.split("\n")[line - 1].count("{") > 1
    assert mistake.message == "this '{' has no '}'"
    assert survivors(tree) == survivors(parse(GOOD, "run.well"))


@pytest.mark.parametrize("spot", SPOTS, ids=str)
def test_a_second_closing_brace_is_pointed_at(spot):
    offset, line, column = spot
    if GOOD[offset] == "{":
        return
    tree = parse(GOOD[:offset] + "}" + GOOD[offset:], "run.well")
    (mistake,) = tree.mistakes
    assert mistake.place.line == line
    assert mistake.place.column in (column, column + 1) or GOOD.split("\n")[line - 1].count("}") > 1
    assert "closes nothing" in mistake.message
    assert survivors(tree) == survivors(parse(GOOD, "run.well"))


def test_layout_decides_nothing_when_the_braces_match(read_clean):
    crooked = "\n".join(
        " " * (7 * number % 5) + line.strip() for number, line in enumerate(GOOD.split("\n"))
    )
    assert read_clean(crooked) == read_clean(GOOD)


def test_without_indentation_the_braces_are_counted():
    flat = "\n".join(line.strip() for line in GOOD.split("\n"))
    assert len(parse(flat + "}", "run.well").mistakes) == 1
    assert len(parse(flat.replace("}\nlet", "let"), "run.well").mistakes) == 1


def test_a_layout_that_explains_too_much_is_not_believed():
    flat = "a {\nb {\nc {\n}\n}\nd {\n}\n"
    assert repairs_by_layout(flat).closes == {}
    (mistake,) = parse(flat, "run.well").mistakes
    assert mistake.place.line == 1


def test_braces_in_texts_and_comments_are_none(read_clean):
    assert read_clean('sequence s { # }\n assume x of b 1 because "}" }')


@pytest.mark.parametrize("source", ["}", "}}}}", "} } }\n}", "}" * 10_000])
def test_a_row_of_closing_braces_is_one_mistake(only_mistake, source):
    mistake = only_mistake(source)
    assert (mistake.place.line, mistake.place.column) == (1, 1)


def test_one_too_many_and_one_too_few_are_both_found():
    tree = parse("a { }\n}\nlet x = 1 V\nb {\n hold", "run.well")
    assert [mistake.place.line for mistake in tree.mistakes] == [2, 4]
    assert len(tree.statements) == 3
