"""Rules that make no sense for a trap, whatever is played: those that can never apply, and pairs
that cannot both be kept.

What can be true at once is judged by what one line, one electrode, one species can be: a line is in
one state, a voltage within what its output can give, a value on one side of a bound.  Windows are
not measured, so that nothing is called senseless that is not.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field
from itertools import product

from wellseq.model import rulebook as book
from wellseq.model.trap import Converter, Trap

CHOICES_MAX = 256
"""Ways of choosing among alternatives that are looked at; beyond, all is taken for possible."""
PAIRS_MAX = 50_000
"""Pairs of rules that are compared in one rulebook."""
Literal = tuple[book.Atom, bool]


def never_applies(rule: book.Rule, trap: Trap) -> str:
    """Why a rule can never be broken on this trap, as a sentence; empty when it can be."""
    match rule.sentence:
        case book.Always(trigger, wanted):
            if trigger is not None and not _possible(trigger, trap):
                return "what it watches for can never be true"
            if not _possible(rule.sentence.breaking, trap):
                return "what it demands is always so"
        case book.Around(_, event, wanted):
            if not _possible(event, trap):
                return "what it watches for can never be true"
            if not _possible(book.negation(wanted), trap):
                return "what it demands is always so"
        case book.AtEnd(wanted):
            if not _possible(book.negation(wanted), trap, at_end=True):
                return "what it demands is always so"
        case book.Counted(event):
            if not _possible(event, trap):
                return "what it counts can never be true"
    return ""


def contradictions(rules: Sequence[book.Rule], trap: Trap) -> Iterator[tuple[book.Rule, book.Rule]]:
    """Pairs of rules that cannot both be kept once what they watch for is true."""
    standing = [rule for rule in rules if isinstance(rule.sentence, book.Always)]
    unconditional = [rule for rule in standing if _trigger(rule) is None]
    compared = 0
    by_trigger: dict[book.Condition | None, list[book.Rule]] = {}
    for rule in standing:
        trigger = _trigger(rule)
        earlier = by_trigger.setdefault(trigger, [])
        others = earlier if trigger is None else [*earlier, *unconditional]
        for other in others:
            compared += 1
            if compared > PAIRS_MAX:
                return
            if _share(rule, other) and _contradict(rule, other, trap):
                first, second = sorted((other, rule), key=rules.index)
                yield first, second
        earlier.append(rule)


def _trigger(rule: book.Rule) -> book.Condition | None:
    assert isinstance(rule.sentence, book.Always)
    return rule.sentence.trigger


def _share(one: book.Rule, other: book.Rule) -> bool:
    """Whether two rules demand something of the same thing; others cannot contradict each other."""
    things = []
    for rule in (one, other):
        assert isinstance(rule.sentence, book.Always)
        things.append({_thing(atom) for atom in book.atoms_in(rule.sentence.wanted)})
    return bool(things[0] & things[1])


def _thing(atom: book.Atom) -> object:
    match atom:
        case book.LineIn(line):
            return line
        case book.Comparison(quantity):
            return quantity
        case _:
            return atom


def _contradict(one: book.Rule, other: book.Rule, trap: Trap) -> bool:
    assert isinstance(one.sentence, book.Always)
    assert isinstance(other.sentence, book.Always)
    triggers = tuple(part for part in (_trigger(one), _trigger(other)) if part is not None)
    wanted = one.sentence.wanted, other.sentence.wanted
    alone = [book.all_of((*triggers, part)) for part in wanted]
    return all(_possible(part, trap) for part in alone) and not _possible(
        book.all_of((*triggers, *wanted)), trap
    )


# what can be true at once


def _possible(condition: book.Condition, trap: Trap, at_end: bool = False) -> bool:
    """Whether a condition can be true at some instant, as far as single things can tell."""
    ways = list(_ways(condition))
    if len(ways) > CHOICES_MAX:
        return True
    return any(_Together(trap, at_end).admit(way) for way in ways)


def _ways(condition: book.Condition, true: bool = True) -> Iterator[tuple[Literal, ...]]:
    """The ways of making a condition true (or false): lists of atoms and how each turns out.

    At most CHOICES_MAX and one more.
    """
    match condition:
        case book.Not(part):
            yield from _ways(part, not true)
        case book.AllOf(parts) | book.AnyOf(parts):
            if isinstance(condition, book.AllOf) is true:
                yield from _joined([list(_ways(part, true)) for part in parts])
            else:
                for part in parts:
                    yield from _ways(part, true)
        case book.Held(part) | book.Recent(part):
            # A window that ends now says something of now only if all of it counts.
            if isinstance(condition, book.Held) is true:
                yield from _ways(part, true)
            elif any(True for _ in _ways(part, true)):
                yield ()
        case _:
            yield ((condition, true),)


def _joined(choices: list[list[tuple[Literal, ...]]]) -> Iterator[tuple[Literal, ...]]:
    for count, way in enumerate(product(*choices)):
        if count > CHOICES_MAX:
            return
        yield tuple(literal for part in way for literal in part)


@dataclass(slots=True)
class _Together:
    """What a list of atoms leaves possible, thing by thing."""

    trap: Trap
    at_end: bool
    states: dict[str, set[str]] = field(default_factory=dict)
    values: dict[book.Quantity, _Range] = field(default_factory=dict)
    others: dict[book.Atom, bool] = field(default_factory=dict)

    def admit(self, literals: Iterable[Literal]) -> bool:
        """Whether all of them can turn out so at once."""
        return all(self._admit(atom, true) for atom, true in literals)

    def _admit(self, atom: book.Atom, true: bool) -> bool:
        match atom:
            case book.LineIn(line, state):
                left = self.states.setdefault(line, set(self.trap.line(line).states))
                left &= {state} if true else left - {state}
                return bool(left)
            case book.Comparison(quantity):
                found = self.values.setdefault(quantity, _able(quantity, self.trap))
                return found.cut(atom, true)
            case book.Playing() | book.Driven() | book.Awaiting() if self.at_end and true:
                return False
            case _:
                return self.others.setdefault(atom, true) is true


@dataclass(slots=True)
class _Range:
    """The values that a quantity can still have: from low to high, each end taken in or not."""

    low: float
    high: float
    low_in: bool = True
    high_in: bool = True
    outside: float = -1.0
    """Values no larger in size than this are out, too."""

    def cut(self, atom: book.Comparison, true: bool) -> bool:
        """Leave only what makes a comparison turn out so; False when nothing is left."""
        low = -math.inf if atom.low is None else float(atom.low)
        high = math.inf if atom.high is None else float(atom.high)
        match atom.relation, true:
            case ("above", True) | ("below", False):
                bound, taken = (low, False) if true else (high, True)
                self._from(bound, taken)
            case ("below", True) | ("above", False):
                bound, taken = (high, False) if true else (low, True)
                self._to(bound, taken)
            case "beyond", True:
                self.outside = max(self.outside, low)
            case "beyond", False:
                self._from(-low, True)
                self._to(low, True)
            case "between", True:
                self._from(low, True)
                self._to(high, True)
        return self._some()

    def _from(self, bound: float, taken: bool) -> None:
        if (bound, not taken) > (self.low, not self.low_in):
            self.low, self.low_in = bound, taken

    def _to(self, bound: float, taken: bool) -> None:
        if (-bound, not taken) > (-self.high, not self.high_in):
            self.high, self.high_in = bound, taken

    def _some(self) -> bool:
        if self.low > self.high or (self.low == self.high and not (self.low_in and self.high_in)):
            return False
        return self.outside < 0 or self.high > self.outside or self.low < -self.outside


def _able(quantity: book.Quantity, trap: Trap) -> _Range:
    """What a quantity can be at all, by the trap file."""
    match quantity:
        case book.Voltage(electrode):
            return _Range(*_reach_V(electrode, trap))
        case book.Difference(one, other):
            first, away = _reach_V(one, trap), _reach_V(other, trap)
            return _Range(first[0] - away[1], first[1] - away[0])
        case book.OfClouds("position"):
            return _Range(-math.inf, math.inf)
        case book.OfClouds():
            return _Range(0.0, math.inf)
        case _:
            return _Range(-math.inf, math.inf)


def _reach_V(electrode: str, trap: Trap) -> tuple[float, float]:
    """The lowest and highest voltage that an electrode can have, spreads included."""
    output = trap.output_of(electrode)
    if isinstance(output, Converter):
        return _converter_V(output)
    ends: list[float] = []
    for level in output.levels:
        if isinstance(level, str):
            behind = trap.output(level)
            assert isinstance(behind, Converter)
            ends += _converter_V(behind)
        else:
            ends += [level - output.spread_V, level + output.spread_V]
    return min(ends), max(ends)


def _converter_V(converter: Converter) -> tuple[float, float]:
    low, high = converter.reach_V
    size = max(abs(converter.low_V), abs(converter.high_V))
    error = size * converter.gain_spread + converter.offset_spread_V
    return low - error, high + error
