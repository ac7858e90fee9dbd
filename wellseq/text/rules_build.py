"""What the grammar of rules has matched → the nodes of a rules file.

Each method bears the name of a rule or of an alternative in `grammar/rules.lark` and gets what that
has matched, in order.  Lark calls it when the rule is complete: children come first.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Literal

from wellseq.base.names import normal
from wellseq.text.rules_tree import (
    Compared,
    Condition,
    Electrodes,
    EverySafe,
    Form,
    Happening,
    Happens,
    InState,
    Joined,
    Lasting,
    Negated,
    Quantity,
    Sentence,
    Value,
)
from wellseq.text.tokens import Token
from wellseq.text.tree import Name, Span


def _name(token: Token) -> Name:
    return Name(normal(token.value), token.place)


@dataclass(frozen=True, slots=True)
class Parsed:
    """A rule as the grammar knows it: without its text and comment."""

    name: Name
    never_waivable: bool
    sentence: Sentence


class RuleBuilder:
    """Stateless: what it returns depends on nothing but the children."""

    def start(self, children: list[Any]) -> Parsed:
        """Name, the word `never_waivable` or nothing, the sentence."""
        return Parsed(_name(children[0]), len(children) == 3, children[-1])

    # sentences

    def while_require(self, children: list[Any]) -> Sentence:
        """`while A, require B`."""
        return _sentence("while_require", children)

    def while_forbid(self, children: list[Any]) -> Sentence:
        """`while A, forbid B`."""
        return _sentence("while_forbid", children)

    def require(self, children: list[Any]) -> Sentence:
        """`require B`."""
        return _sentence("require", children)

    def forbid(self, children: list[Any]) -> Sentence:
        """`forbid B`, `never B`."""
        return _sentence("forbid", children)

    def forbid_while(self, children: list[Any]) -> Sentence:
        """`forbid B while A`."""
        return _sentence("forbid_while", children)

    def before(self, children: list[Any]) -> Sentence:
        """`before A, require B`."""
        return _sentence("before", children)

    def after(self, children: list[Any]) -> Sentence:
        """`after A, require B`."""
        return _sentence("after", children)

    def at_end_require(self, children: list[Any]) -> Sentence:
        """`at end, require B`."""
        return _sentence("at_end_require", children)

    def at_end_forbid(self, children: list[Any]) -> Sentence:
        """`at end, forbid B`."""
        return _sentence("at_end_forbid", children)

    def counted(self, children: list[Any]) -> Sentence:
        """`A at most N times`, with `within T` or without."""
        window = children[-1].value if len(children) == 4 else None
        return Sentence("counted", (children[0],), children[1].value, window)

    # conditions

    def either(self, children: list[Any]) -> Condition:
        """Two conditions with `or` between them."""
        return _joined("or", children)

    def both(self, children: list[Any]) -> Condition:
        """Two conditions with `and` between them."""
        return _joined("and", children)

    def negated(self, children: list[Any]) -> Condition:
        """`not` and a condition; two of them leave it as it is."""
        word, condition = children
        if isinstance(condition, Negated):
            return condition.condition
        return Negated(condition, word.place.to(condition.place))

    def lasting(self, children: list[Any]) -> Lasting:
        """A condition, `for` or `within`, a time."""
        condition, word, number = children
        place = condition.place.to(number.place)
        return Lasting(condition, word.value, number.value, place)

    def group(self, children: list[Any]) -> Condition:
        """What stands in parentheses."""
        condition: Condition = children[1]
        return condition

    def compared(self, children: list[Any]) -> Compared:
        """A quantity, the word of the relation, one value or two with `and` between them."""
        quantity, word, *rest = children
        values = tuple(item for item in rest if isinstance(item, Value))
        return Compared(quantity, word.value, values, quantity.place.to(values[-1].place))

    def in_state(self, children: list[Any]) -> InState:
        """A line and its state."""
        line, state = children
        return InState(
            _name(line), _name(state), state.type == "STRING", line.place.to(state.place)
        )

    def state(self, children: list[Token]) -> Token:
        """The word of a state."""
        return children[0]

    def every_safe(self, children: list[Token]) -> EverySafe:
        """`every ROLE safe`."""
        return EverySafe(_name(children[1]), children[0].place.to(children[2].place))

    # what happens

    def step(self, children: list[Token]) -> Happens:
        """A verb."""
        return _happens("step", children[0], children[0])

    def label(self, children: list[Token]) -> Happens:
        """The label of a step, a text."""
        return _happens("label", children[0], children[0])

    def drive(self, children: list[Token]) -> Happens:
        """`drive`, `drive on RING`."""
        return _happens("drive", children[0], children[-1] if len(children) > 1 else None)

    def awaiting(self, children: list[Token]) -> Happens:
        """`awaiting`, `awaiting TRIGGER`."""
        return _happens("awaiting", children[0], children[1] if len(children) > 1 else None)

    def block(self, children: list[Token]) -> Happens:
        """`block NAME`."""
        return _happens("block", children[0], children[1])

    # quantities

    def voltage(self, children: list[Electrodes]) -> Quantity:
        """Electrodes alone mean their voltage."""
        return Quantity("voltage", children[0].place, electrodes=children[0])

    def slew(self, children: list[Any]) -> Quantity:
        """`slew of` electrodes."""
        word, electrodes = children
        return Quantity("slew", word.place.to(electrodes.place), electrodes=electrodes)

    def difference(self, children: list[Token]) -> Quantity:
        """`difference of A from B`."""
        word, one, other = children
        place = word.place.to(other.place)
        return Quantity("difference", place, name=_name(one), other=_name(other))

    def cloud(self, children: list[Token]) -> Quantity:
        """`number`, `depth of electron`."""
        word, *species = children
        name = _name(species[0]) if species else None
        place = word.place.to(name.place) if name else word.place
        return Quantity(word.value, place, name=name)

    def electrodes(self, children: list[Any]) -> Electrodes:
        """One electrode, `any of` or `all of` several, `any hazardous`."""
        first = children[0]
        if first.type == "NAME":
            return Electrodes("one", (_name(first),), first.place)
        if isinstance(children[1], Token):
            return Electrodes("hazardous", (), first.place.to(children[1].place))
        how: Literal["any", "all"] = "any" if first.type == "ANY" else "all"
        return Electrodes(how, tuple(children[1:]), first.place.to(children[-1].place))

    def name(self, children: list[Token]) -> Name:
        """One electrode of a list."""
        return _name(children[0])

    def span(self, children: list[Token]) -> Span:
        """From one electrode to another."""
        first, last = _name(children[0]), _name(children[1])
        return Span(first, last, first.place.to(last.place))

    def value(self, children: list[Token]) -> Value:
        """A number with its sign."""
        number = children[-1].value
        return Value(number, children[0].type == "MINUS", children[0].place.to(number.place))


def _sentence(form: Form, conditions: list[Condition]) -> Sentence:
    return Sentence(form, tuple(conditions))


def _joined(word: Literal["and", "or"], children: list[Any]) -> Joined:
    """One node for a run of the same word, so that a long run is no deep tree."""
    left, _, right = children
    before = left.parts if isinstance(left, Joined) and left.word == word else (left,)
    return Joined(word, (*before, right), left.place.to(right.place))


def _happens(kind: Happening, first: Token, name: Token | None) -> Happens:
    place = first.place if name is None else first.place.to(name.place)
    return Happens(kind, None if name is None else _name(name), place)
