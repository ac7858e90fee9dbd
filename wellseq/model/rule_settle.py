"""A rule as written → the rule with its names, states and units settled for one trap.

What a rule of the house speaks of and the trap does not have makes it not applicable, and its
`lacking` says what.  In a rule of the laboratory the same is a mistake.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from fractions import Fraction
from typing import NoReturn

from wellseq.base.finding import Mistake
from wellseq.base.names import nearest, printable
from wellseq.base.place import Place
from wellseq.base.quantity import QuantityError, kind_name, kind_of, unit_of
from wellseq.model import rulebook as book
from wellseq.model.hardware import ROLES
from wellseq.model.operands import DURATION_MAX_s
from wellseq.model.species import SPECIES
from wellseq.model.steps import verbs
from wellseq.model.trap import Trap
from wellseq.text import rules_tree as tree
from wellseq.text.tree import Name, Number, Span

UNIT_OF = {"voltage": "V", "difference": "V", "slew": "V/s", **book.UNITS}
SAMPLE = {"V": "500 V", "V/s": "5 V/us", "K": "20 K", "m": "30 mm", "": "1e6"}
COUNT_MAX = 10**6


class Lacking(Exception):
    """The trap has not what a rule of the house speaks of; the sentence says what."""


class _Wrong(Exception):
    """A rule cannot be settled; its mistake is on the list.  Never leaves this file."""


def settle_rule(text: tree.RuleText, trap: Trap, house: bool, mistakes: list[Mistake]) -> book.Rule:
    """The settled rule; its sentence is None where it does not apply or has a mistake."""
    sentence, lacking = None, ""
    try:
        sentence = _Settling(trap, house, mistakes).sentence(text.sentence)
    except Lacking as why:
        lacking = str(why)
    except _Wrong:
        pass
    return book.Rule(
        text.name.text,
        sentence,
        text.never_waivable,
        house,
        text.text,
        text.comment,
        text.place,
        lacking,
    )


@dataclass(slots=True)
class _Settling:
    """One rule while it is settled."""

    trap: Trap
    house: bool
    mistakes: list[Mistake]

    def sentence(self, said: tree.Sentence) -> book.Sentence:
        """The sentence with its conditions settled; all of them are looked at."""
        settled = self._all(said.conditions)
        form = said.form
        if form == "while_require":
            return book.Always(*settled)
        if form == "while_forbid":
            return book.Always(settled[0], book.negation(settled[1]))
        if form == "forbid_while":
            return book.Always(settled[1], book.negation(settled[0]))
        if form == "require":
            return book.Always(None, settled[0])
        if form == "forbid":
            return book.Always(None, book.negation(settled[0]))
        if form == "before" or form == "after":
            return book.Around(form, *settled)
        if form == "at_end_require":
            return book.AtEnd(settled[0])
        if form == "at_end_forbid":
            return book.AtEnd(book.negation(settled[0]))
        return self._counted(said, settled[0])

    def _counted(self, said: tree.Sentence, event: book.Condition) -> book.Counted:
        assert said.count is not None
        count = said.count
        if count.unit or count.value.denominator != 1 or count.value > COUNT_MAX:
            hint = f"a whole number from 0 to {COUNT_MAX}, without a unit"
            self._wrong("unit-mismatch", count.place, "this is not a number of times", hint)
        window = None if said.window is None else self._duration(said.window)
        return book.Counted(event, int(count.value), window)

    def _all(self, conditions: Iterable[tree.Condition]) -> tuple[book.Condition, ...]:
        """Several conditions; what is wrong or lacking in one does not hide that of the others."""
        settled: list[book.Condition] = []
        lacking: list[str] = []
        wrong = False
        for condition in conditions:
            try:
                settled.append(self.condition(condition))
            except Lacking as why:
                lacking.append(str(why))
            except _Wrong:
                wrong = True
        if wrong:
            raise _Wrong
        if lacking:
            raise Lacking("; ".join(dict.fromkeys(lacking)))
        return tuple(settled)

    def condition(self, said: tree.Condition) -> book.Condition:
        """A condition of any kind; as deep as the parentheses of the text."""
        match said:
            case tree.Compared():
                return self._comparison(said)
            case tree.InState(line, state, quoted, _):
                return self._line(line, state, quoted)
            case tree.EverySafe(role, _):
                return self._role(role)
            case tree.Happens():
                return self._happening(said)
            case tree.Negated(inner, _):
                return book.negation(self.condition(inner))
            case tree.Joined(word, parts, _):
                join = book.all_of if word == "and" else book.any_of
                return join(self._all(parts))
            case tree.Lasting(inner, word, duration, _):
                (settled,) = self._all((inner,))
                window_s = self._duration(duration)
                kind = book.Held if word == "for" else book.Recent
                return kind(settled, window_s)

    # values

    def _comparison(self, said: tree.Compared) -> book.Condition:
        unit = UNIT_OF[said.quantity.kind]
        values = [self._value(value, unit) for value in said.values]
        written = " and ".join(_shown(value) for value in said.values)
        relation = said.relation
        low: Fraction | None
        high: Fraction | None
        low, high = values[0], values[-1]
        if relation == "beyond" and low < 0:
            message = "'beyond' compares the size of a value, which has no sign"
            self._wrong("syntax", said.values[0].place, message, "write it without its sign")
        if relation == "below":
            low = None
        elif relation != "between":
            high = None
        how, quantities = self._quantities(said.quantity)
        comparisons: tuple[book.Condition, ...] = tuple(
            book.Comparison(one, relation, low, high, unit, f"{name} {relation} {written}")
            for one, name in quantities
        )
        return book.all_of(comparisons) if how == "all" else book.any_of(comparisons)

    def _value(self, value: tree.Value, unit: str) -> Fraction:
        number = value.number
        factor, kind = self._unit(number)
        if kind != kind_of(unit):
            needed = kind_name(kind_of(unit))
            message = f"'{_shown(value)}' is in {kind_name(kind)}, {needed} is needed"
            self._wrong("unit-mismatch", value.place, message, f"as in '{SAMPLE[unit]}'")
        size = number.value * factor
        return -size if value.negative else size

    def _duration(self, number: Number) -> Fraction:
        factor, kind = self._unit(number)
        if kind != kind_of("s"):
            message = f"'{_plain(number)}' is in {kind_name(kind)}, a time is needed"
            self._wrong("unit-mismatch", number.place, message, "as in '2 s'")
        window_s = number.value * factor
        if not 0 < window_s <= DURATION_MAX_s:
            hint = f"above 0 s, at most {float(DURATION_MAX_s):g} s"
            self._wrong("too-large", number.place, f"'{_plain(number)}' is out of range", hint)
        return window_s

    def _unit(self, number: Number) -> tuple[Fraction, tuple[int, ...]]:
        try:
            return unit_of(number.unit)
        except QuantityError as error:
            return self._wrong("unit-mismatch", number.place, str(error), error.hint)

    # quantities

    def _quantities(self, said: tree.Quantity) -> tuple[str, list[tuple[book.Quantity, str]]]:
        """How several quantities count, and each with the words for it."""
        if said.kind == "difference":
            assert said.name is not None
            assert said.other is not None
            one, other = self._electrode(said.name), self._electrode(said.other)
            return "any", [(book.Difference(one, other), f"difference of {one} from {other}")]
        if said.electrodes is None:
            return "any", [self._clouds(said)]
        names = self._electrodes(said.electrodes)
        if said.kind == "slew":
            return said.electrodes.how, [(book.Slew(name), f"slew of {name}") for name in names]
        return said.electrodes.how, [(book.Voltage(name), name) for name in names]

    def _clouds(self, said: tree.Quantity) -> tuple[book.Quantity, str]:
        species = ""
        if said.name is not None:
            species = said.name.text
            known = (*SPECIES, "ion")
            if species not in known:
                self._unknown(said.name, f"'{printable(species)}' is no species", known, "species")
        quantity = book.OfClouds(said.kind, species)
        return quantity, f"{said.kind} of {species}" if species else said.kind

    def _electrodes(self, said: tree.Electrodes) -> tuple[str, ...]:
        if said.how == "hazardous":
            return self._hazardous(said.place)
        found: list[str] = []
        for name in said.names:
            if isinstance(name, Span):
                first, last = self._electrode(name.first), self._electrode(name.last)
                between = self.trap.between(first, last)
                if not between:
                    message = f"{first} stands behind {last} on the axis"
                    self._wrong("syntax", name.place, message, f"write {last}..{first}")
                found += between
            else:
                found.append(self._electrode(name))
        return tuple(dict.fromkeys(found))

    def _hazardous(self, place: Place) -> tuple[str, ...]:
        found = tuple(e.name for e in self.trap.electrodes if self.trap.output(e.output).hazardous)
        if not found:
            said = "no output of the trap file with an electrode is marked hazardous"
            if self.house:
                raise Lacking(said)
            self._wrong("unknown-name", place, said, "mark an output with hazardous = true")
        return found

    def _electrode(self, name: Name) -> str:
        known = tuple(electrode.name for electrode in self.trap.electrodes)
        if name.text not in known:
            message = f"'{printable(name.text)}' is no electrode of this trap"
            self._unknown(name, message, known, "electrodes")
        return name.text

    # states and happenings

    def _line(self, name: Name, state: Name, quoted: bool) -> book.Condition:
        known = tuple(line.name for line in self.trap.lines)
        if name.text not in known:
            message = f"'{printable(name.text)}' is no digital line of this trap"
            self._unknown(name, message, known, "digital lines")
        line = self.trap.line(name.text)
        word = state.text
        if word == "safe" and not quoted and word not in line.states and line.safe:
            word = line.safe
        if word not in line.states:
            message = f"the line '{line.name}' has no state '{printable(word)}'"
            self._unknown(state, message, line.states, "states")
        return book.LineIn(line.name, word, f"{line.name} {word}")

    def _role(self, name: Name) -> book.Condition:
        if name.text not in ROLES:
            message = f"'{printable(name.text)}' is no role of a digital line"
            self._unknown(name, message, ROLES, "roles")
        lines = [line for line in self.trap.lines if line.role == name.text]
        if not lines:
            said = f"no line of the trap file has the role '{name.text}'"
            if self.house:
                raise Lacking(said)
            self._wrong("unknown-name", name.place, said, f'write role = "{name.text}" at one')
        return book.all_of(
            tuple(
                book.LineIn(line.name, line.safe, f"{line.name} {line.safe}")
                for line in lines
                if line.safe is not None
            )
        )

    def _happening(self, said: tree.Happens) -> book.Condition:
        name = said.name
        text = "" if name is None else name.text
        match said.kind:
            case "step":
                assert name is not None
                return self._step(name)
            case "label":
                return book.Playing("", text, f'"{text}"')
            case "drive":
                if name is not None and self.trap.electrode(self._electrode(name)).sectors == 1:
                    rings = tuple(e.name for e in self.trap.electrodes if e.sectors > 1)
                    self._unknown(name, f"'{text}' is no ring that is driven", rings, "rings")
                return book.Driven(text, f"drive on {text}" if text else "drive")
            case "awaiting":
                if name is not None:
                    self._trigger(name, ())
                return book.Awaiting(text, f"awaiting {text}" if text else "awaiting")
            case "block":
                assert name is not None
                self._trigger(name, ("run",))
                return book.InBlock(text, f"block {text}")

    def _step(self, name: Name) -> book.Condition:
        if name.text in self.trap.names:
            hint = f"as in '{name.text} beyond 500 V' for an electrode, 'valve open' for a line"
            message = f"'{name.text}' alone is no condition"
            self._wrong("syntax", name.place, message, hint)
        if name.text not in verbs():
            message = f"'{printable(name.text)}' is no step"
            self._unknown(name, message, verbs(), "steps")
        return book.Playing(name.text, "", name.text)

    def _trigger(self, name: Name, more: tuple[str, ...]) -> None:
        known = (*more, *(trigger.name for trigger in self.trap.triggers))
        if name.text not in known:
            message = f"'{printable(name.text)}' is no trigger of this trap"
            self._unknown(name, message, known, "triggers")

    # mistakes

    def _unknown(self, name: Name, message: str, known: Iterable[str], what: str) -> None:
        self._wrong("unknown-name", name.place, message, nearest(name.text, known, what))

    def _wrong(self, name: str, place: Place, message: str, hint: str = "") -> NoReturn:
        self.mistakes.append(Mistake(name, place, message, hint))
        raise _Wrong


def _shown(value: tree.Value) -> str:
    return ("-" if value.negative else "") + _plain(value.number)


def _plain(number: Number) -> str:
    return f"{float(number.value):.12g} {number.unit}".rstrip()
