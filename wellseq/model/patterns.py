"""Patterns: a block of assignments, or the name of one → volts per electrode."""

from __future__ import annotations

from wellseq.base.names import printable
from wellseq.base.quantity import Quantity, kind_of
from wellseq.model.scope import OTHERS, Defined, Names
from wellseq.model.step import PatternVolts
from wellseq.model.values import UNKNOWN, Unknown, evaluate, needs
from wellseq.text.tree import Assignment, Block, Name, Operand, Span

_VOLTS = kind_of("V")


def read_pattern(operand: Operand, names: Names) -> PatternVolts | Unknown:
    """A pattern written in place, or by its name; UNKNOWN when a mistake was reported."""
    if isinstance(operand, Block):
        return settle(operand, names)
    found = names.thing(operand, "pattern")
    return found if isinstance(found, Unknown) else settled(found)


def settled(pattern: Defined) -> PatternVolts | Unknown:
    """A named pattern, settled once among the names of its own file."""
    if pattern.settled is None:
        pattern.settled = settle(pattern.block, Names(pattern.scope)) if pattern.block else UNKNOWN
    return pattern.settled


def settle(block: Block, names: Names) -> PatternVolts | Unknown:
    """The assignments of a block; every mistake in it is reported."""
    volts: dict[str, float] = {}
    others: list[float | None] = []
    sound = True
    for item in block.items:
        if not isinstance(item, Assignment):
            names.report(
                "syntax",
                item.place,
                "a pattern holds assignments only",
                "write for example 'C3, C9 = -90 V' or 'others = 0 V'",
            )
            sound = False
            continue
        sound &= _assign(item, names, volts, others)
    if sound and not volts and not others:
        if not names.scope.is_spoilt(block.place):
            hint = "'others = 0 V', for example"
            names.report("syntax", block.place, "this pattern is empty", hint)
        return UNKNOWN
    return PatternVolts(volts, others[0] if others else None) if sound else UNKNOWN


def _assign(
    item: Assignment, names: Names, volts: dict[str, float], others: list[float | None]
) -> bool:
    value = _value(item, names)
    sound = value is not UNKNOWN
    for target in item.targets:
        if isinstance(target, Name) and target.text == OTHERS:
            if others:
                names.report("name-reused", target.place, "`others` is given twice in this pattern")
                sound = False
            others.append(None if isinstance(value, Unknown) else value)
            continue
        if item.value is None:
            names.report(
                "syntax",
                target.place,
                f"only `{OTHERS}` take `keep`",
                "an electrode that the pattern does not name keeps what it has",
            )
            sound = False
        found = electrodes(target, names)
        sound &= found is not None
        for name in found or ():
            if name in volts:
                names.report(
                    "name-reused", target.place, f"'{name}' is given twice in this pattern"
                )
                sound = False
            volts[name] = value if isinstance(value, float) else 0.0
    return sound


def _value(item: Assignment, names: Names) -> float | Unknown | None:
    if item.value is None:
        return None
    value = evaluate(item.value, names)
    if isinstance(value, Unknown):
        return UNKNOWN
    if not isinstance(value, Quantity):
        return names.report("unit-mismatch", item.value.place, "a voltage here has no ±")
    if not needs(value, _VOLTS, "any", item.value.place, "an electrode", names):
        return UNKNOWN
    return float(value.value)


def electrodes(operand: Operand, names: Names) -> tuple[str, ...] | None:
    """One electrode, or all of a span in order along the axis; None when a mistake was reported."""
    if not isinstance(operand, Span):
        found = names.thing(operand, "electrode")
        return None if isinstance(found, Unknown) else (found.name,)
    ends = [names.thing(end, "electrode") for end in (operand.first, operand.last)]
    trap = names.trap
    if trap is None or any(isinstance(end, Unknown) for end in ends):
        return None
    first, last = (end.name for end in ends if isinstance(end, Defined))
    span = trap.between(first, last)
    if not span:
        names.report(
            "unknown-name",
            operand.place,
            f"'{printable(last)}' stands before '{printable(first)}' along the axis",
            f"write {last}..{first}",
        )
        return None
    return span
