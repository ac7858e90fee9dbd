"""A whole source text → Tree: scan, split at the ends of statements, read each on its own."""

from __future__ import annotations

import gc
from collections.abc import Iterator
from contextlib import contextmanager

from wellseq.base.place import Place
from wellseq.text.braces import Repairs, repairs_by_layout
from wellseq.text.grammar import Unexpected, statement_parser
from wellseq.text.hints import explain
from wellseq.text.mistakes import Mistakes, ReadingStops
from wellseq.text.scan import scan
from wellseq.text.split import Item, Splitter
from wellseq.text.tokens import Token
from wellseq.text.tree import Block, Statement, Tree

SIZE_MAX = 10_000_000
"""Most bytes, and most characters, of one source."""


def parse(source: str, file: str) -> Tree:
    """Read a text to its end, whatever is in it; `file` is the name that places bear.

    Never raises for what the text holds: each mistake is in `mistakes` and leaves its statement
    out.  Only a unit that can be guessed keeps its statement, with the unit as it was meant.
    """
    source = source.removeprefix("\ufeff")
    if len(source) > SIZE_MAX:
        mistakes = Mistakes(file)
        mistakes.add("too-large", Place(file), f"the text has more than {SIZE_MAX} characters")
        return Tree(file, "", (), mistakes.listed())
    with _quiet_collector():
        splitter, mistakes = _read(source, file, Repairs())
        if splitter.unbalanced:
            splitter, mistakes = _read(source, file, repairs_by_layout(source))
    items, unread = tuple(splitter.items), frozenset(splitter.unread)
    return Tree(file, source, items, mistakes.listed(), unread)


def _read(source: str, file: str, repairs: Repairs) -> tuple[Splitter, Mistakes]:
    """The statements of a text, and its mistakes."""
    mistakes = Mistakes(file)
    parser = statement_parser()

    def read_statement(tokens: list[Token]) -> Item | None:
        _settle_words(tokens)
        try:
            item = parser.parse(tokens)
        except Unexpected as error:
            place, message, hint = explain(tokens, error, source)
            mistakes.add("syntax", place, message, hint)
            return None
        if isinstance(item, Statement) and _lacks_its_sign(item):
            place = item.operands[1].place
            mistakes.add("syntax", place, "'=' is missing before this value", "let NAME = VALUE")
            return None
        return item

    splitter = Splitter(read_statement, mistakes, repairs)
    try:
        splitter.run(scan(source, mistakes))
    except ReadingStops:
        splitter.unbalanced = False
    return splitter, mistakes


def _settle_words(tokens: list[Token]) -> None:
    """Tell the two words that are no names: `keep`, and the state of a line (`set mcp_bias on`)."""
    first = 1 if tokens[0].type == "STRING" and len(tokens) > 1 else 0
    if tokens[first].value == "others" and len(tokens) == 2 and tokens[1].value == "keep":
        tokens[1].type = "KEEP"
    if tokens[first].value in ("set", "expect") and len(tokens) > first + 2:
        state = tokens[first + 2]
        if state.type == "CLAUSE":
            state.type = "NAME"


def _lacks_its_sign(item: Statement) -> bool:
    """`let wall 90 V`: a shape that a statement may have, but never this one."""
    return (
        item.verb is not None
        and item.verb.text == "let"
        and item.value is None
        and len(item.operands) == 2
        and not isinstance(item.operands[1], Block)
    )


@contextmanager
def _quiet_collector() -> Iterator[None]:
    """No garbage collection meanwhile: a tree is no garbage, and looking makes time quadratic."""
    was_on = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was_on:
            gc.enable()
