"""A plain, slow interpreter of sequences: what every output shall do, in exact block time.

It shares the tree and places with the package and nothing else, so that a misreading of the
language would have to be made twice to stay unseen.

The meaning beyond what the language's manual says:
- a throw lasts until delay + 1.25 × its 10–90 % edge are over, then up to the next multiple of the
  least common multiple of all output clocks; a step after a catch begins likewise;
- the first row of a block comes the trigger's latency after the trigger.
`evaporate` and `kick` are not played here.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from pathlib import Path

import plain_trap
from plain_blocks import Block, Move, Throw, Turn
from plain_trap import PlainTrap, Value, product, quotient, with_unit

from wellseq.text.parse import parse
from wellseq.text.tree import (
    Assignment,
    Binary,
    Call,
    Name,
    Negative,
    Number,
    Span,
    Spreading,
    Statement,
    String,
    Tree,
)
from wellseq.text.tree import Block as Braces

WHOLE_EDGE = Fraction(5, 4)
"""A whole edge, in units of its 10 % to 90 % time."""
CHARGES = {"electron": -1, "antiproton": -1, "positron": 1}


@dataclass
class Procedure:
    """A procedure as written, with the names of its own file."""

    parameters: list[str]
    body: Braces
    names: dict


class Interpreter:
    """Plays one sequence file; `blocks` is what comes out."""

    def __init__(self, tree: Tree, path: Path, trap: PlainTrap) -> None:
        self.trap = trap
        self.path = path
        self.now = Fraction(0)
        self.volts = {name: output.rest for name, output in trap.converters.items()}
        self.levels = {name: output.rest for name, output in trap.switches.items()}
        self.states = {
            name: line.get("initial", line["states"][0]) for name, line in trap.lines.items()
        }
        self.blocks: list[Block] = []
        self.new_block("", Fraction(0), Fraction(0))
        names: dict = {}
        body = self.read_file(tree, names)
        self.play(body, names)
        self.end_block()

    def read_file(self, tree: Tree, names: dict) -> Braces | None:
        """Enter what a file defines; gives the body of its sequence."""
        body = None
        for item in tree.statements:
            verb = item.verb.text
            if verb == "use":
                used = self.path.parent / item.operands[0].text
                theirs: dict = {}
                self.read_file(parse(used.read_text(encoding="utf-8"), used.name), theirs)
                names |= {k: v for k, v in theirs.items() if not isinstance(v, int)}
            elif verb == "let":
                names[item.operands[0].text] = self.value(item.value, names)
            elif verb == "cloud":
                kind = next(c for c in item.clauses if c.word.text == "is").operands[0].text
                names[item.operands[0].text] = CHARGES[kind]
            elif verb == "pattern":
                names[item.operands[0].text] = (item.block(), names)
            elif verb == "procedure":
                call = item.operands[0]
                parameters = [argument.text for argument in call.arguments]
                names[call.name.text] = Procedure(parameters, item.block(), names)
            elif verb == "sequence":
                body = item.block()
        return body

    def value(self, operand: object, names: dict) -> Value:
        """An expression as an exact value; the centre only where it has a spread."""
        if isinstance(operand, Number):
            return with_unit(operand.value, operand.unit)
        if isinstance(operand, Name):
            return names[operand.text]
        if isinstance(operand, Negative):
            inner = self.value(operand.operand, names)
            return Value(-inner.number, inner.powers)
        if isinstance(operand, Spreading):
            return self.value(operand.value, names)
        assert isinstance(operand, Binary)
        left, right = self.value(operand.left, names), self.value(operand.right, names)
        if operand.op == "*":
            return product(left, right)
        if operand.op == "/":
            return quotient(left, right)
        assert left.powers == right.powers
        sign = 1 if operand.op == "+" else -1
        return Value(left.number + sign * right.number, left.powers)

    def number(self, operand: object, unit: str, names: dict) -> Fraction:
        """The exact number of an expression that must be in powers of this unit."""
        value = self.value(operand, names)
        assert value.powers == with_unit(Fraction(1), unit).powers, (value, unit)
        return value.number

    def electrodes(self, operands: tuple, names: dict) -> list[str]:
        """Electrode names out of names and spans."""
        found: list[str] = []
        order = list(self.trap.electrodes)
        for operand in operands:
            if isinstance(operand, Span):
                first, last = self.thing(operand.first, names), self.thing(operand.last, names)
                found += order[order.index(first) : order.index(last) + 1]
            else:
                found.append(self.thing(operand, names))
        return found

    def thing(self, operand: Name, names: dict) -> str:
        """The name of hardware: itself, or what an argument stands for."""
        meant = names.get(operand.text, operand.text)
        return meant if isinstance(meant, str) else operand.text

    def pattern(self, operand: object, names: dict) -> tuple[dict[str, Fraction], Fraction | None]:
        """Volts per named electrode, and volts of the others (None: they keep)."""
        if isinstance(operand, Name):
            operand, names = names[operand.text]
        volts: dict[str, Fraction] = {}
        others = None
        for item in operand.items:
            assert isinstance(item, Assignment)
            if isinstance(item.targets[0], Name) and item.targets[0].text == "others":
                others = None if item.value is None else self.number(item.value, "V", names)
                continue
            for name in self.electrodes(item.targets, names):
                volts[name] = self.number(item.value, "V", names)
        return volts, others

    def play(self, body: Braces, names: dict) -> None:
        """Play the statements of a body one after the other."""
        for item in body.items:
            self.statement(item, names)

    def statement(self, item: Statement, names: dict) -> None:
        """Unfold what is no step; play what is."""
        verb = item.verb.text
        if verb == "repeat":
            for _ in range(int(self.number(item.operands[0], "", names))):
                self.play(item.block(), names)
        elif verb == "each":
            (clause,) = item.clauses
            for operand in clause.operands:
                given = self.argument(operand, names)
                self.play(item.block(), {**names, item.operands[0].text: given})
        elif verb == "do":
            call = item.operands[0]
            given = call.arguments if isinstance(call, Call) else ()
            procedure = names[call.name.text if isinstance(call, Call) else call.text]
            values = [self.argument(operand, names) for operand in given]
            inner = dict(zip(procedure.parameters, values, strict=True))
            self.play(procedure.body, {**procedure.names, **inner})
        elif verb == "alongside":
            start, ends = self.now, [self.now]
            for lane in item.block().items:
                self.now = start
                self.play(lane.block(), names)
                ends.append(self.now)
            self.now = max(ends)
        else:
            self.step(item, names)

    def argument(self, operand: object, names: dict) -> object:
        """What a parameter stands for: a value, hardware, a cloud or a pattern."""
        if isinstance(operand, Name):
            return names.get(operand.text, operand.text)
        return self.value(operand, names)

    def step(self, item: Statement, names: dict) -> None:
        """Play one step and note when it began and ended."""
        clauses = {clause.word.text: clause.operands for clause in item.clauses}
        for inner in item.block().items if item.verb.text == "catch" else ():
            clauses |= {clause.word.text: clause.operands for clause in inner.clauses}
        words = {word.text for word in item.words}
        block, start = self.blocks[-1], self.now
        method: Callable = getattr(self, "do_" + item.verb.text)
        method(item, clauses, words, names)
        if self.blocks[-1] is not block:
            block, start = self.blocks[-1], Fraction(0)
        block.steps.append((start, self.now))
        block.duration = max(block.duration, self.now)

    def do_hold(self, item: Statement, clauses: dict, words: set[str], names: dict) -> None:
        """hold, cool, load: time passes."""
        self.now += self.number(clauses["for"][0], "s", names)

    do_cool = do_load = do_hold

    def do_begin(self, item: Statement, clauses: dict, words: set[str], names: dict) -> None:
        """The outputs stand at a pattern before time zero."""
        volts, others = self.pattern(clauses["in"][0], names)
        self.volts |= self.targets(volts, others)
        self.blocks[0].volts = dict(self.volts)

    def targets(self, volts: dict[str, Fraction], others: Fraction | None) -> dict[str, Fraction]:
        """Volts per converter, through the switches that pass one on."""
        found: dict[str, Fraction] = {}
        if others is not None:
            found = {
                output: others
                for output in self.trap.electrodes.values()
                if output in self.trap.converters
            }
        for electrode, wished in volts.items():
            output = self.trap.electrodes[electrode]
            if output in self.trap.switches:
                output = self.trap.switches[output].levels[self.levels[output]]
            assert output in self.trap.converters, f"{electrode} is held by its switch"
            found[output] = wished
        return found

    def ramp(self, targets: dict[str, Fraction], duration: Fraction, smooth: bool) -> None:
        """All these converters move with one progress."""
        for output, wished in targets.items():
            move = Move(self.now, self.now + duration, self.volts[output], wished, smooth)
            self.blocks[-1].moves.setdefault(output, []).append(move)
            self.volts[output] = wished
        self.now += duration

    def do_ramp(self, item: Statement, clauses: dict, words: set[str], names: dict) -> None:
        """ramp PATTERN over T [smoothly]."""
        targets = self.targets(*self.pattern(item.operands[0], names))
        self.ramp(targets, self.number(clauses["over"][0], "s", names), "smoothly" in words)

    def do_nest(self, item: Statement, clauses: dict, words: set[str], names: dict) -> None:
        """nest … using PATTERN over T [smoothly]."""
        targets = self.targets(*self.pattern(clauses["using"][0], names))
        self.ramp(targets, self.number(clauses["over"][0], "s", names), "smoothly" in words)

    def do_release(self, item: Statement, clauses: dict, words: set[str], names: dict) -> None:
        """The named electrodes go straight to a voltage."""
        wished = self.number(clauses["to"][0], "V", names)
        volts = dict.fromkeys(self.electrodes(clauses["through"], names), wished)
        self.ramp(self.targets(volts, None), self.number(clauses["over"][0], "s", names), False)

    def do_throw(self, item: Statement, clauses: dict, words: set[str], names: dict) -> None:
        """Switches change level; the step lasts until their edges are over."""
        end = self.now
        for electrode in self.electrodes(item.operands, names):
            switch = self.trap.switches[self.trap.electrodes[electrode]]
            end = max(end, self.edge(switch.name, self.level(clauses["to"][0], names), self.now))
        self.now = self.rounded_up(end)

    def level(self, operand: object, names: dict) -> Fraction | str:
        """A level as the switch has it: volts, or the name of a converter."""
        if isinstance(operand, Name) and not isinstance(names.get(operand.text), Value):
            return self.thing(operand, names)
        return self.number(operand, "V", names)

    def edge(self, name: str, level: Fraction | str, command: Fraction) -> Fraction:
        """Throw one switch; gives the instant at which its edge is over."""
        switch = self.trap.switches[name]
        after = switch.levels.index(level)
        start = command + switch.delay
        throw = Throw(command, start, start + WHOLE_EDGE * switch.edge, self.levels[name], after)
        self.blocks[-1].throws.setdefault(name, []).append(throw)
        self.levels[name] = after
        return throw.end

    def rounded_up(self, time: Fraction) -> Fraction:
        """The next instant at which all outputs have a clock edge."""
        return math.ceil(time / self.trap.beat) * self.trap.beat

    def do_rotate(self, item: Statement, clauses: dict, words: set[str], names: dict) -> None:
        """A drive in the sense in which the cloud's charge turns.

        The drift E × B / B² of a positive plasma, E outward and B along +z, is clockwise seen
        from +z; derived.
        """
        duration = self.number(clauses["for"][0], "s", names)
        sense = -names[item.operands[0].text] * self.trap.field_sign
        turn = Turn(
            self.thing(clauses["on"][0], names),
            self.now,
            self.now + duration,
            self.number(clauses["from"][0], "Hz", names),
            self.number(clauses["to"][0], "Hz", names),
            self.number(clauses["at"][0], "V", names),
            2 if "quadrupole" in words else 1,
            -sense if "backwards" in words else sense,
        )
        self.blocks[-1].turns.append(turn)
        self.now += duration

    def do_set(self, item: Statement, clauses: dict, words: set[str], names: dict) -> None:
        """A line gets a state at once."""
        self.set_line(item, names, False)

    def do_expect(self, item: Statement, clauses: dict, words: set[str], names: dict) -> None:
        """A line is declared to have a state."""
        self.set_line(item, names, True)

    def set_line(self, item: Statement, names: dict, expected: bool) -> None:
        """Note the state of a line."""
        named, word = (*item.operands, *item.words)
        line = self.thing(named, names)
        self.states[line] = word.text
        self.blocks[-1].settings.append((self.now, line, word.text, expected))

    def do_await(self, item: Statement, clauses: dict, words: set[str], names: dict) -> None:
        """The block ends; the next begins at the trigger."""
        self.end_block()
        trigger = self.thing(item.operands[0], names)
        self.begin_at(trigger, clauses.get("within"), names)

    def begin_at(self, trigger: str, within: tuple | None, names: dict) -> None:
        """A new block at a trigger."""
        facts = self.trap.triggers[trigger]
        longest = self.number(within[0], "s", names) if within else plain_trap.read(facts["within"])
        self.new_block(trigger, longest, plain_trap.read(facts.get("latency", "0 s")))

    def do_catch(self, item: Statement, clauses: dict, words: set[str], names: dict) -> None:
        """A new block, in which half of the near gate's edge is over at the closing time."""
        self.end_block()
        self.begin_at(self.thing(clauses["after"][0], names), clauses.get("within"), names)
        near = self.trap.electrodes[self.thing(clauses["between"][0], names)]
        switch = self.trap.switches[near]
        closing = self.number(clauses["closing"][0], "s", names) - self.blocks[-1].latency
        command = closing - WHOLE_EDGE * switch.edge / 2 - switch.delay
        end = self.edge(near, self.number(clauses["at"][0], "V", names), command)
        self.now = self.rounded_up(end)

    def do_require(self, item: Statement, clauses: dict, words: set[str], names: dict) -> None:
        """A claim takes no time; its bounds are still read."""
        unit = {"depth": "V", "time": "s", "separation": "m"}[item.operands[0].text]
        for word in ("above", "below", "and"):
            if word in clauses:
                self.number(clauses[word][0], unit, names)
        assert all(isinstance(text, String) for text in clauses.get("after", ()))

    def do_assume(self, item: Statement, clauses: dict, words: set[str], names: dict) -> None:
        """A measured value takes no time."""
        self.value(item.operands[1], names)

    def new_block(self, trigger: str, within: Fraction, latency: Fraction) -> None:
        """Begin a block with what stands at its start."""
        self.now = Fraction(0)
        self.blocks.append(
            Block(
                trigger,
                within,
                latency,
                dict(self.volts),
                dict(self.levels),
                dict(self.states),
            )
        )

    def end_block(self) -> None:
        """The present instant is the end of the block."""
        self.blocks[-1].duration = max(self.blocks[-1].duration, self.now)

    def volts_at(self, block: Block, electrode: str, time: Fraction) -> tuple[float, float]:
        """Least and greatest volts that an electrode may have at an instant of a block."""
        output = self.trap.electrodes[electrode]
        if output in self.trap.converters:
            sure = float(block.converter_V(output, time))
            return sure, sure
        levels = [
            self.trap.switches[output].levels[index] for index in block.levels_at(output, time)
        ]
        volts = [
            float(block.converter_V(level, time) if isinstance(level, str) else level)
            for level in levels
        ]
        return min(volts), max(volts)


def trap_of(tree: Tree, path: Path) -> PlainTrap:
    """The trap that a file names."""
    (named,) = (item for item in tree.statements if item.verb.text == "trap")
    return plain_trap.load(path.parent / named.operands[0].text)
