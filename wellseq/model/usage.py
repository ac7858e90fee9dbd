"""Statements → every name that they use, and every statement inside them; walked in a loop."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from wellseq.model.headers import DEFINITIONS
from wellseq.text.tree import (
    Assignment,
    Binary,
    Block,
    Call,
    Name,
    Negative,
    Operand,
    Span,
    Spreading,
    Statement,
)


def statements_in(items: Iterable[Statement | Assignment]) -> Iterator[Statement]:
    """These statements and those in their blocks, in no order that matters."""
    waiting = list(items)
    while waiting:
        item = waiting.pop()
        if isinstance(item, Statement):
            yield item
            for operand in item.operands:
                if isinstance(operand, Block):
                    waiting += operand.items


def names_in(items: Iterable[Statement | Assignment]) -> set[str]:
    """All names that are mentioned, apart from the place where each is defined."""
    used: set[str] = set()
    waiting: list[Operand] = []
    blocks = list(items)
    while blocks or waiting:
        if waiting:
            operand = waiting.pop()
            if isinstance(operand, Name):
                used.add(operand.text)
            elif isinstance(operand, Block):
                blocks += operand.items
            else:
                waiting += _parts(operand)
            continue
        item = blocks.pop()
        if isinstance(item, Assignment):
            waiting += item.targets
        else:
            waiting += _of_statement(item)
        if item.value is not None:
            waiting.append(item.value)
    return used


def _of_statement(item: Statement) -> Iterator[Operand]:
    defines = item.verb is not None and item.verb.text in (*DEFINITIONS, "sequence")
    yield from item.operands[1:] if defines else item.operands
    yield from item.words
    for clause in item.clauses:
        yield from clause.operands


def _parts(operand: Operand) -> tuple[Operand, ...]:
    if isinstance(operand, Binary):
        return operand.left, operand.right
    if isinstance(operand, Negative):
        return (operand.operand,)
    if isinstance(operand, Spreading):
        return operand.value, operand.spread
    if isinstance(operand, Span):
        return operand.first, operand.last
    if isinstance(operand, Call):
        return operand.name, *operand.arguments
    return ()
