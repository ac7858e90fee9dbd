"""What the grammar's rules have matched → the nodes of the tree.

Each method bears the name of a rule or of an alternative in `grammar/statement.lark` and gets what
that rule matched, in order.  Lark calls it when the rule is complete: children come first.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from wellseq.base.names import normal
from wellseq.text.tokens import Token
from wellseq.text.tree import (
    Allowance,
    Assignment,
    Binary,
    Block,
    Call,
    Clause,
    Name,
    Negative,
    Number,
    Operand,
    Span,
    Spreading,
    Statement,
    String,
)

_OPERATORS = {"PLUS": "+", "MINUS": "-", "STAR": "*", "SLASH": "/"}


def _name(token: Token) -> Name:
    text: str = token.value
    return Name(text if text.isascii() else normal(text), token.place)


class Builder:
    """Stateless: what it returns depends on nothing but the children."""

    def step(self, children: list[Any]) -> Statement:
        """Label?, verb, operands?, then clauses, allowances, words and values in any order."""
        return _statement(children, None)

    def definition(self, children: list[Any]) -> Statement:
        """A step with `= value` after its operands."""
        at = 2 if children[0].type == "NAME" else 3
        return _statement(children[:at] + children[at + 1 :], children[at])

    def fragment(self, children: list[Any]) -> Statement:
        """A line of clauses without a verb, as in the block of a `catch`."""
        return _statement(children, None)

    def assignment(self, children: list[Any]) -> Assignment:
        """One or more targets, then the value."""
        *targets, value = children
        return Assignment(tuple(targets), value, targets[0].place.to(value.place))

    def kept(self, children: list[Any]) -> Assignment:
        """`others keep`."""
        name = _name(children[0])
        return Assignment((name,), None, name.place.to(children[1].place))

    def clause(self, children: list[Any]) -> Clause:
        """A reserved word and its operands (a list), or `because` and its text."""
        word = _name(children[0])
        operands = children[1] if isinstance(children[1], list) else [children[1]]
        return Clause(word, tuple(operands), word.place.to(operands[-1].place))

    def allowance(self, children: list[Any]) -> Allowance:
        """The name of the finding, `because`, the reason."""
        name, reason = _name(children[0]), children[2]
        return Allowance(name, reason, name.place.to(reason.place))

    def operands(self, children: list[Operand]) -> list[Operand]:
        """A list stays a list until its clause or statement takes it."""
        return children

    def block(self, children: list[Token]) -> Block:
        """A block was built when its brace closed."""
        block: Block = children[0].value
        return block

    def text(self, children: list[Token]) -> String:
        """A text between quotation marks."""
        return String(children[0].value, children[0].place)

    def span(self, children: list[Token]) -> Span:
        """First and last electrode."""
        first, last = _name(children[0]), _name(children[1])
        return Span(first, last, first.place.to(last.place))

    def call(self, children: list[Any]) -> Call:
        """Name, parenthesis, arguments, parenthesis."""
        name, _, *arguments, end = children
        called = _name(name)
        return Call(called, tuple(arguments), called.place.to(end.place))

    def spreading(self, children: list[Operand]) -> Spreading:
        """Value and spread."""
        value, spread = children
        return Spreading(value, spread, value.place.to(spread.place))

    def binary(self, children: list[Any]) -> Binary:
        """Left, operator token, right."""
        left, operator, right = children
        return Binary(_OPERATORS[operator.type], left, right, left.place.to(right.place))

    def negative(self, children: list[Any]) -> Negative:
        """Sign token and what it stands before."""
        sign, operand = children
        return Negative(operand, sign.place.to(operand.place))

    def positive(self, children: list[Any]) -> Operand:
        """A plus sign changes nothing."""
        operand: Operand = children[1]
        return operand

    def group(self, children: list[Any]) -> Operand:
        """What stands in parentheses, with a place that takes them in."""
        opening, operand, closing = children
        grouped: Operand = replace(operand, place=opening.place.to(closing.place))
        return grouped

    def number(self, children: list[Token]) -> Number:
        """A literal was built by the scanner."""
        number: Number = children[0].value
        return number

    def name(self, children: list[Token]) -> Name:
        """A bare name."""
        return _name(children[0])


def _statement(children: Sequence[Any], value: Operand | None) -> Statement:
    """Sort the parts of a statement into their kinds; a name beside an operand is a word."""
    label: String | None = None
    verb: Name | None = None
    operands: list[Operand] = []
    clauses: list[Clause] = []
    words: list[Name] = []
    allowances: list[Allowance] = []
    for child in children:
        kind = type(child)
        if kind is Token and child.type == "STRING":
            label = String(child.value, child.place)
        elif kind is Token:
            verb = _name(child)
        elif kind is list:
            operands.extend(child)
        elif kind is Clause:
            clauses.append(child)
        elif kind is Allowance:
            allowances.append(child)
        elif kind is Name:
            words.append(child)
        else:
            operands.append(child)
    first = verb or children[0]
    ends = [child[-1] if type(child) is list else child for child in (children[-1], value) if child]
    last = max((end.place for end in ends), key=lambda place: (place.end_line, place.end_column))
    return Statement(
        verb,
        tuple(operands),
        tuple(clauses),
        tuple(words),
        tuple(allowances),
        value,
        label,
        first.place.to(last),
    )
