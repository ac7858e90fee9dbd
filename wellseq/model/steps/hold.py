"""hold: nothing moves for a time."""

from wellseq.model.pen import Pen
from wellseq.model.step import Duration, Step


class Hold(Step):
    """`hold for T`: every output keeps what it has; `for_` in s."""

    for_: Duration

    def draw(self, pen: Pen) -> None:
        """Let the time pass."""
        pen.hold(self.for_)
