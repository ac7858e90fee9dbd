"""A plan → the steps in order of play, each with its label, its passes and its number."""

from __future__ import annotations

from wellseq.base.finding import Mistake, Origin
from wellseq.base.names import printable
from wellseq.base.place import Place
from wellseq.model.plan import Body, CallNode, LanesNode, Node, PassesNode, StepNode
from wellseq.model.reader import signature
from wellseq.model.reporter import Reporter
from wellseq.model.sequence import Lanes, Played
from wellseq.model.step import Step

Items = list[Played | Lanes]


class Expansion:
    """Plays a plan through, and looks at what only the order of play can tell."""

    def __init__(self, reporter: Reporter) -> None:
        self.reporter = reporter
        self._number = 0
        self._labels: set[str] = set()
        self._first: Step | None = None
        self._begun = False

    def play(self, body: Body) -> tuple[Played | Lanes, ...]:
        """All steps of a body; those that could not be read are left out."""
        items: Items = []
        self._body(body, items, (), (), "")
        return tuple(items)

    def _body(
        self,
        body: Body,
        items: Items,
        passes: tuple[int, ...],
        chain: tuple[Place, ...],
        label: str,
    ) -> None:
        for node in body.nodes:
            if isinstance(node, StepNode):
                self._step(node, items, passes, chain, label)
            else:
                self._group(node, items, passes, chain, node.label or label)

    def _group(
        self,
        node: Node,
        items: Items,
        passes: tuple[int, ...],
        chain: tuple[Place, ...],
        label: str,
    ) -> None:
        if isinstance(node, PassesNode):
            for numbers, body in node.passes:
                for number in numbers:
                    self._body(body, items, (*passes, number), chain, label)
        elif isinstance(node, CallNode):
            self._body(node.body, items, passes, (*chain, node.place), label)
        elif isinstance(node, LanesNode):
            before = self._labels
            after = set(before)
            lanes: list[tuple[Played | Lanes, ...]] = []
            for lane in node.lanes:
                played: Items = []
                self._labels = set(before)  # what another lane says is not before this one
                self._body(lane, played, passes, chain, label)
                after |= self._labels
                lanes.append(tuple(played))
            self._labels = after
            items.append(Lanes(tuple(lanes), Origin(node.place, "alongside", label, passes, chain)))

    def _step(
        self,
        node: StepNode,
        items: Items,
        passes: tuple[int, ...],
        chain: tuple[Place, ...],
        label: str,
    ) -> None:
        label = node.label or label
        origin = Origin(node.place, node.verb, label, passes, chain, self._number)
        self._number += 1
        if node.step is not None:
            self._in_order(node.step, origin)
            items.append(Played(node.step, node.verb, origin))
        elif node.verb != "begin":
            self._begun = True
        if label:
            self._labels.add(label)

    def _in_order(self, step: Step, origin: Origin) -> None:
        for field in signature(type(step)).labels:
            label = getattr(step, field)
            if label is not None and label not in self._labels:
                message = f'no step before this one is labelled "{printable(label)}"'
                near = self.reporter.near(label, self._labels, "labels")
                self._wrong("unknown-name", origin, message, near)
        if not step.FIRST:
            self._begun = True
            return
        if self._begun:
            self._wrong("syntax", origin, f"`{origin.step}` stands before everything else")
        elif self._first is None:
            self._first = step
        else:
            clash = step.clash(self._first)
            if clash:
                self._wrong("syntax", origin, clash)

    def _wrong(self, name: str, origin: Origin, message: str, hint: str = "") -> None:
        self.reporter.add(Mistake(name, origin.place, message, hint, origin))
