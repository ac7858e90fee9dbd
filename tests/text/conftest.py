"""Helpers for the tests of the text floor: a tree written as plain tuples and short texts."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest

from wellseq.base.finding import Mistake
from wellseq.text.parse import parse
from wellseq.text.tree import (
    Assignment,
    Binary,
    Block,
    Call,
    Name,
    Negative,
    Number,
    Span,
    Spreading,
    Statement,
    String,
)


def _value(node: Any) -> Any:
    """An operand in a short notation in which every grouping is visible."""
    match node:
        case Number():
            return f"{node.value} {node.unit}".rstrip()
        case Name():
            return node.text
        case String():
            return f'"{node.text}"'
        case Negative():
            return f"-{_value(node.operand)}"
        case Binary():
            return f"({_value(node.left)} {node.op} {_value(node.right)})"
        case Spreading():
            return f"{_value(node.value)} ± {_value(node.spread)}"
        case Span():
            return f"{node.first.text}..{node.last.text}"
        case Call():
            return f"{node.name.text}({', '.join(_value(item) for item in node.arguments)})"
        case Block():
            return [_item(item) for item in node.items]
    raise AssertionError(node)


def _item(node: Statement | Assignment) -> dict[str, Any]:
    """A statement without its places and without what it does not have."""
    if isinstance(node, Assignment):
        kept = "keep" if node.value is None else _value(node.value)
        return {"set": [_value(target) for target in node.targets], "to": kept}
    parts: dict[str, Any] = {
        "label": node.label and node.label.text,
        "verb": node.verb and node.verb.text,
        "operands": [_value(item) for item in node.operands],
        "value": node.value and _value(node.value),
        "clauses": [
            [clause.word.text, *(_value(item) for item in clause.operands)]
            for clause in node.clauses
        ],
        "words": [word.text for word in node.words],
        "allow": [[item.name.text, item.reason.text] for item in node.allowances],
    }
    return {key: part for key, part in parts.items() if part}


@pytest.fixture(scope="session")
def outline() -> Callable[[Any], Any]:
    """Turns a statement, an assignment or an operand into plain data."""

    def outlined(node: Any) -> Any:
        return _item(node) if isinstance(node, Statement | Assignment) else _value(node)

    return outlined


@pytest.fixture(scope="session")
def read_clean(outline: Callable[[Any], Any]) -> Callable[[str], list[Any]]:
    """Reads a text that must hold no mistake: the outline of each of its statements."""

    def read(source: str) -> list[Any]:
        tree = parse(source, "run.well")
        assert tree.mistakes == ()
        return [outline(item) for item in tree.statements]

    return read


@pytest.fixture(scope="session")
def only_mistake() -> Callable[[str], Mistake]:
    """Reads a text that must hold exactly one mistake, which it returns."""

    def read(source: str) -> Mistake:
        (mistake,) = parse(source, "run.well").mistakes
        return mistake

    return read
