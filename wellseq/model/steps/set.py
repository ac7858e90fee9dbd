"""set: a digital line is put into a state."""

from collections.abc import Iterator
from typing import Annotated

from wellseq.base.names import nearest
from wellseq.model.pen import Pen
from wellseq.model.step import Line, Objection, State, Step, Subject
from wellseq.model.trap import Trap


class Set(Step):
    """`set LINE STATE`, at once; the line must be an output of the trap."""

    line: Annotated[Line, Subject()]
    state: Annotated[State, Subject()]

    def objections(self, trap: Trap) -> Iterator[Objection]:
        """The line must have the state, and must be one that can be set."""
        line = trap.line(self.line)
        if self.state not in line.states:
            yield Objection(
                "state",
                "unknown-name",
                f"the line '{self.line}' has no state '{self.state}'",
                nearest(self.state, line.states, "states"),
            )
        if line.kind == "input":
            yield Objection(
                "line",
                "line-misused",
                f"'{self.line}' is an input and cannot be set",
                f"write: expect {self.line} {self.state}",
            )

    def draw(self, pen: Pen) -> None:
        """Put the line into the state."""
        pen.set_line(self.line, self.state)
