"""expect: a digital line must be in a state at this instant."""

from collections.abc import Iterator
from typing import Annotated

from wellseq.base.names import nearest
from wellseq.model.pen import Pen
from wellseq.model.step import Line, Objection, State, Step, Subject
from wellseq.model.trap import Trap


class Expect(Step):
    """`expect LINE STATE`: nothing is moved; the line may be an input or an output."""

    line: Annotated[Line, Subject()]
    state: Annotated[State, Subject()]

    def objections(self, trap: Trap) -> Iterator[Objection]:
        """The line must have the state."""
        states = trap.line(self.line).states
        if self.state not in states:
            yield Objection(
                "state",
                "unknown-name",
                f"the line '{self.line}' has no state '{self.state}'",
                nearest(self.state, states, "states"),
            )

    def draw(self, pen: Pen) -> None:
        """Declare the state of the line."""
        pen.expect_line(self.line, self.state)
