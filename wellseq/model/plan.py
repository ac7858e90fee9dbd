"""The statements of a sequence → a plan: steps read once, repeats and calls not yet unfolded.

A body that is played many times is read once, as long as its names mean the same.  The number of
steps that will be played is known before any of them is.
"""

from __future__ import annotations

from collections.abc import Callable, Collection
from dataclasses import dataclass, field
from fractions import Fraction
from typing import NoReturn

from wellseq.base.names import normal, printable
from wellseq.base.place import Place
from wellseq.model.declare import whole_number
from wellseq.model.headers import INSIDE, OUTSIDE, fits
from wellseq.model.reader import read_step
from wellseq.model.reporter import Reporter
from wellseq.model.scope import Bound, Defined, Names
from wellseq.model.sequence import Allowed
from wellseq.model.step import Step
from wellseq.model.steps import step_class, verbs
from wellseq.model.values import UNKNOWN, Unknown, evaluate
from wellseq.text.tree import Assignment, Block, Call, Name, Operand, Statement

STEPS_MAX = 100_000
"""The most steps that a sequence may play, and the highest count of a `repeat`."""
VISITS_MAX = 3 * STEPS_MAX
"""Statements and bodies that are read, counted again for every argument they are read with."""
DEPTH_MAX = 64
"""How deep `repeat`, `each`, `do` and `alongside` may stand in one another."""


class TooLarge(Exception):
    """Reading stops: the mistake is reported.  Never leaves this floor."""


@dataclass(frozen=True, slots=True)
class StepNode:
    """One step; `step` is None where a mistake was reported."""

    step: Step | None
    verb: str
    place: Place
    label: str
    size: int = 1
    depth: int = 0


@dataclass(frozen=True, slots=True)
class PassesNode:
    """Bodies one after the other, each with the number of its pass: a `repeat` or an `each`."""

    passes: tuple[tuple[range, Body], ...]
    label: str

    @property
    def size(self) -> int:
        """Steps of all passes."""
        return sum(len(numbers) * body.size for numbers, body in self.passes)

    @property
    def depth(self) -> int:
        """How deep the deepest pass nests."""
        return max((body.depth for _, body in self.passes), default=0)


@dataclass(frozen=True, slots=True)
class CallNode:
    """The body of a procedure, called at a place."""

    body: Body
    place: Place
    label: str

    @property
    def size(self) -> int:
        """Steps of the body."""
        return self.body.size

    @property
    def depth(self) -> int:
        """How deep the body nests."""
        return self.body.depth


@dataclass(frozen=True, slots=True)
class LanesNode:
    """Bodies that begin together."""

    lanes: tuple[Body, ...]
    place: Place
    label: str

    @property
    def size(self) -> int:
        """Steps of all lanes."""
        return sum(lane.size for lane in self.lanes)

    @property
    def depth(self) -> int:
        """How deep the deepest lane nests."""
        return max((lane.depth for lane in self.lanes), default=0)


Node = StepNode | PassesNode | CallNode | LanesNode


@dataclass(frozen=True, slots=True)
class Body:
    """Nodes in order of play, the number of steps they come to, and how deep they nest."""

    nodes: tuple[Node, ...]
    size: int
    depth: int


Pick = tuple[str, int] | int | None
"""Which value of an `each` to play (from 1), of the one that sets this name or of the only one."""


@dataclass(slots=True)
class Planner:
    """Plans bodies; what it meets on the way is kept for the sequence.

    `complete` is False where statements were left out of the tree, so that a body may be empty.
    """

    reporter: Reporter
    findings: Collection[str]
    pick: Pick = None
    complete: bool = True
    allowed: dict[Place, Allowed] = field(default_factory=dict)
    each: dict[Place, tuple[str, tuple[Fraction | str, ...]]] = field(default_factory=dict)
    called: set[Defined] = field(default_factory=set)
    _visits: int = 0
    _bodies: dict[tuple[object, ...], Body] = field(default_factory=dict)
    _calling: list[Defined] = field(default_factory=list)

    def body(self, block: Block, names: Names, depth: int = 0, in_lane: bool = False) -> Body:
        """Read every statement of a block.  Raises TooLarge."""
        if depth > DEPTH_MAX:
            self._too_deep(block.place, names)
        self._visit(block.place, names)
        if not block.items and self.complete:
            names.report("syntax", block.place, "nothing stands between these braces")
        nodes = []
        for item in block.items:
            node = self._node(item, names, depth, in_lane)
            if node is not None:
                nodes.append(node)
        deepest = max((node.depth for node in nodes), default=0)
        return Body(tuple(nodes), sum(node.size for node in nodes), 1 + deepest)

    def _too_deep(self, place: Place, names: Names) -> NoReturn:
        message = f"repeats, calls and lanes stand more than {DEPTH_MAX} deep in one another here"
        names.report("too-large", place, message)
        raise TooLarge

    def _visit(self, place: Place, names: Names) -> None:
        """Count what is read, so that bodies without a single step cannot go on for ever."""
        self._visits += 1
        if self._visits > VISITS_MAX:
            names.report("too-large", place, f"more than {STEPS_MAX:,} steps would be played")
            raise TooLarge

    def _node(
        self, item: Statement | Assignment, names: Names, depth: int, in_lane: bool
    ) -> Node | None:
        if isinstance(item, Assignment) or item.verb is None:
            hint = "voltages are assigned in a pattern: ramp { C3 = 5 V } over 20 ms"
            names.report("syntax", item.place, "a step begins with its verb", hint)
            return None
        verb = item.verb.text
        control = _CONTROLS.get(verb)
        if control is not None:
            return control(self, item, names, depth + 1, in_lane)
        kind = step_class(verb)
        if kind is None:
            self._no_step(item.verb, names)
            return None
        self._visit(item.place, names)
        if in_lane and not kind.IN_LANE:
            names.report("syntax", item.verb.place, f"`{verb}` cannot stand in a lane")
        self._allow(item, names)
        return StepNode(read_step(item, kind, names), verb, item.place, _label(item))

    def _no_step(self, verb: Name, names: Names) -> None:
        said = printable(verb.text)
        if verb.text in OUTSIDE:
            names.report("syntax", verb.place, f"`{said}` stands outside a sequence")
        elif verb.text == "lane":
            names.report("syntax", verb.place, "`lane` stands inside `alongside { … }`")
        else:
            near = self.reporter.near(verb.text, (*verbs(), *INSIDE), "steps")
            names.report("unknown-step", verb.place, f"'{said}' is no step", near)

    def _allow(self, item: Statement, names: Names) -> None:
        listed: set[str] = set()
        for allowance in item.allowances:
            name, reason = allowance.name, allowance.reason
            said = printable(name.text)
            if name.text not in self.findings:
                near = self.reporter.near(name.text, self.findings, "findings")
                names.report("unknown-name", name.place, f"no finding is named '{said}'", near)
            elif name.text in listed:
                names.report("syntax", name.place, f"'{said}' is allowed twice")
            elif not reason.text.strip():
                names.report("syntax", reason.place, "an allowance needs a reason")
            else:
                made = Allowed(name.text, reason.text, allowance.place, item.place)
                self.allowed[allowance.place] = made
            listed.add(name.text)

    def _repeat(
        self, item: Statement, names: Names, depth: int, in_lane: bool
    ) -> PassesNode | None:
        if not fits(item, self.reporter, object, Block, label=True):
            return None
        block = item.operands[1]
        count = whole_number(item.operands[0], "`repeat`", names) or 1
        place = item.operands[0].place
        if count > STEPS_MAX:
            names.report("too-large", place, f"a `repeat` has at most {STEPS_MAX:,} passes")
            count = 1
        if not isinstance(block, Block):
            return None
        body = self.body(block, names, depth, in_lane)
        count = self._fitting(count, body.size, item.place, names)
        return PassesNode(((range(1, count + 1), body),), _label(item))

    def _fitting(self, count: int, size: int, place: Place, names: Names) -> int:
        """The count, or 1 when so many passes are more than can be played."""
        if count * size <= STEPS_MAX or size > STEPS_MAX:
            return count  # a body that is too large by itself is reported for the sequence
        names.report(
            "too-large",
            place,
            f"{count:,} passes of {size:,} steps are more than can be played",
            f"a sequence plays at most {STEPS_MAX:,} steps",
        )
        return 1

    def _each(self, item: Statement, names: Names, depth: int, in_lane: bool) -> PassesNode | None:
        if not fits(item, self.reporter, Name, Block, clauses=True, label=True):
            return None
        name, block = item.operands
        if [clause.word.text for clause in item.clauses] != ["of"]:
            names.report("syntax", item.clauses[0].place, "after the name of an `each` stands `of`")
            return None
        if not isinstance(name, Name) or not isinstance(block, Block):
            return None
        names.scope.free(name, "what an `each` goes through", names.local)
        values = [argument(operand, names) for operand in item.clauses[0].operands]
        self._note_each(item, name, values, names)
        passes = []
        for number in self._picked(item, name, len(values), names):
            inside = names.inside({name.text: values[number - 1]})
            passes.append((range(number, number + 1), self.body(block, inside, depth, in_lane)))
        return PassesNode(tuple(passes), _label(item))

    def _note_each(self, item: Statement, name: Name, values: list[Bound], names: Names) -> None:
        self.each.setdefault(item.place, (name.text, tuple(_listed(value) for value in values)))
        if isinstance(self.pick, int) and item.place != next(iter(self.each)):
            listed = ", ".join(dict.fromkeys(one for one, _ in self.each.values()))
            hint = f"say which one's value is wanted: {listed}"
            names.report("syntax", item.place, "this file has more than one `each`", hint)

    def _picked(self, item: Statement, name: Name, count: int, names: Names) -> Collection[int]:
        wanted, number = self.pick if isinstance(self.pick, tuple) else (name.text, self.pick)
        if number is None or wanted != name.text:
            return range(1, count + 1)
        if not 1 <= number <= count:
            message = f"this `each` has {count} values, and number {number} was asked for"
            names.report("too-large", item.place, message)
            return range(1, 2)
        return range(number, number + 1)

    def _do(self, item: Statement, names: Names, depth: int, in_lane: bool) -> CallNode | None:
        if not fits(item, self.reporter, (Call, Name), label=True):
            return None
        operand = item.operands[0]
        called = operand.name if isinstance(operand, Call) else operand
        given = operand.arguments if isinstance(operand, Call) else ()
        procedure = names.thing(called, "procedure")
        values = [argument(operand, names) for operand in given]
        if isinstance(procedure, Unknown) or procedure.block is None:
            return None
        parameters = [parameter.text for parameter in procedure.parameters]
        if len(values) != len(parameters):
            listed = ", ".join(parameters)
            names.report(
                "syntax",
                operand.place,
                f"'{procedure.name}' takes {len(parameters)} arguments, {len(values)} are given",
                f"procedure {procedure.name}({listed})",
            )
            return None
        local = dict(zip(parameters, values, strict=True))
        inside = Names(procedure.scope, local, (*names.chain, item.place))
        body = self._called(procedure, inside, operand.place, depth, in_lane)
        if body is None:
            return None
        if depth + body.depth - 1 > DEPTH_MAX:
            self._too_deep(item.place, names)
        return CallNode(body, item.place, _label(item))

    def _called(
        self, procedure: Defined, names: Names, place: Place, depth: int, in_lane: bool
    ) -> Body | None:
        """The body of a procedure, read once for equal arguments."""
        if procedure in self._calling:
            path = [item.name for item in self._calling[self._calling.index(procedure) :]]
            circle = " → ".join([*path, procedure.name])
            names.report("too-large", place, f"this call never ends: {circle}")
            return None
        self.called.add(procedure)
        key = (procedure, in_lane, *names.local.values())
        if key not in self._bodies and procedure.block is not None:
            self._calling.append(procedure)
            try:
                self._bodies[key] = self.body(procedure.block, names, depth, in_lane)
            finally:
                self._calling.pop()
        return self._bodies.get(key)

    def _alongside(
        self, item: Statement, names: Names, depth: int, in_lane: bool
    ) -> LanesNode | None:
        if not fits(item, self.reporter, Block, label=True):
            return None
        block = item.operands[0]
        if not isinstance(block, Block):
            return None
        if not block.items and self.complete:
            names.report("syntax", block.place, "`alongside` needs at least one lane")
        lanes = []
        for lane in block.items:
            verb = lane.verb.text if isinstance(lane, Statement) and lane.verb is not None else ""
            if verb != "lane" or not isinstance(lane, Statement):
                hint = "alongside { lane { … } lane { … } }"
                names.report("syntax", lane.place, "only lanes stand in `alongside`", hint)
            elif fits(lane, self.reporter, Block) and isinstance(lane.operands[0], Block):
                lanes.append(self.body(lane.operands[0], names, depth + 1, True))
        return LanesNode(tuple(lanes), item.place, _label(item))


Control = Callable[[Planner, Statement, Names, int, bool], Node | None]
_CONTROLS: dict[str, Control] = {
    "repeat": Planner._repeat,
    "each": Planner._each,
    "do": Planner._do,
    "alongside": Planner._alongside,
}
"""What stands among steps and is none."""

PASSED_ON = ("electrode", "output", "line", "trigger", "cloud", "pattern")


def argument(operand: Operand, names: Names) -> Bound:
    """What an argument or a value of an `each` is: a value, or a thing that has a name."""
    found = names.find(operand.text) if isinstance(operand, Name) else None
    if isinstance(found, Defined) and found.sort in PASSED_ON:
        return found
    return evaluate(operand, names)


def _listed(value: Bound) -> Fraction | str:
    if isinstance(value, Defined):
        return value.name
    return Fraction(0) if value is UNKNOWN or isinstance(value, Unknown) else value.value


def _label(item: Statement) -> str:
    return normal(item.label.text) if item.label is not None else ""
