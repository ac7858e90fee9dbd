"""The tree's own two questions: its lines, a statement's block."""

from __future__ import annotations

from wellseq.text.parse import parse


def test_lines_end_where_the_scanner_ends_them():
    tree = parse("hold\r\nhold # \x0c\rhold\n", "f")
    assert list(tree.lines()) == ["hold", "hold # \x0c", "hold", ""]
    assert [item.place.line for item in tree.statements] == [1, 2, 3]


def test_a_statement_knows_its_block():
    with_block, without = parse("repeat 2 { hold }\nhold", "f").statements
    assert with_block.block() is with_block.operands[1]
    assert without.block() is None
