"""Statements → the least number of steps they can come to, without evaluating anything.

A scan in a scan in a scan multiplies faster than it can be read; this tells it beforehand.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from wellseq.model.scope import Defined, FileScope
from wellseq.text.tree import Block, Call, Name, Statement

DEPTH_MAX = 64
"""Deeper bodies count as nothing, so that the count stays a least one and the walk ends."""


@dataclass(slots=True)
class LeastSize:
    """Counts bodies; `single` tells that one value of every `each` is played only.

    A `repeat` counts as one pass, a step that cannot be read as one step.
    """

    single: bool = False
    _known: dict[int, int] = field(default_factory=dict)

    def of(self, block: Block, scope: FileScope, depth: int = 0) -> int:
        """The least number of steps of a block in a file; at least one."""
        found = self._known.get(id(block))
        if found is None:
            self._known[id(block)] = 1  # a body inside itself: reported when it is read
            found = max(1, sum(self._item(item, scope, depth) for item in block.items))
            self._known[id(block)] = found
        return found

    def _item(self, item: object, scope: FileScope, depth: int) -> int:
        verb = item.verb.text if isinstance(item, Statement) and item.verb is not None else ""
        if not isinstance(item, Statement) or depth > DEPTH_MAX:
            return 0
        block = item.block()
        if verb == "do":
            return self._called(item, scope, depth)
        if verb == "alongside" and block is not None:
            lanes = (lane.block() for lane in block.items if isinstance(lane, Statement))
            return sum(self.of(lane, scope, depth + 1) for lane in lanes if lane is not None)
        if verb in ("repeat", "each") and block is not None:
            values = sum(len(clause.operands) for clause in item.clauses)
            passes = values if verb == "each" and not self.single else 1
            return passes * self.of(block, scope, depth + 1)
        return 1

    def _called(self, item: Statement, scope: FileScope, depth: int) -> int:
        operand = item.operands[0] if item.operands else None
        name = operand.name if isinstance(operand, Call) else operand
        found = scope.known.get(name.text) if isinstance(name, Name) else None
        if not isinstance(found, Defined) or found.sort != "procedure" or found.block is None:
            return 0
        return self.of(found.block, found.scope, depth + 1)
