"""Which names a text mentions, and which statements it holds."""

from __future__ import annotations

from wellseq.model.usage import names_in, statements_in
from wellseq.text.parse import parse

TEXT = """
let wall = base * 2 + -(lift) ± slack
pattern cradle { C3, A1..A5 = wall; others keep }
procedure go(height) { ramp { C9 = height } over span smoothly }
sequence night { repeat many { do go(argument) ; set valve open } }
cloud bunch is antiproton { number count }
"""


def test_all_mentions_count_but_the_definitions_themselves():
    tree = parse(TEXT, "x")
    assert tree.mistakes == ()
    used = names_in(tree.statements)
    assert {"base", "lift", "slack", "C3", "A1", "A5", "wall", "C9", "height", "span"} <= used
    assert {"many", "go", "argument", "valve", "open", "count", "antiproton"} <= used
    assert not {"cradle", "night", "bunch"} & used


def test_statements_in_blocks_are_found():
    verbs = {s.verb.text for s in statements_in(parse(TEXT, "x").statements) if s.verb}
    assert {"let", "ramp", "repeat", "do", "set", "number"} <= verbs
