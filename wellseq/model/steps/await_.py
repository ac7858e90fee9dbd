"""await: the table stops, and a new block begins at a trigger."""

from collections.abc import Iterator
from typing import Annotated

from wellseq.model.pen import Pen
from wellseq.model.step import Duration, Objection, Step, Subject, Trigger
from wellseq.model.trap import Trap


class Await(Step):
    """`await TRIGGER [within T]`; the longest wait stands here or with the trigger, in s."""

    IN_LANE = False

    trigger: Annotated[Trigger, Subject()]
    within: Duration | None = None

    def objections(self, trap: Trap) -> Iterator[Objection]:
        """The wait must be bounded somewhere."""
        if self.within is None and trap.trigger(self.trigger).within_s is None:
            yield Objection(
                "trigger",
                "syntax",
                "`await` needs `within` and a time: the trap file gives no longest wait for "
                f"'{self.trigger}'",
            )

    def draw(self, pen: Pen) -> None:
        """End the block; the next begins at the trigger."""
        pen.await_trigger(self.trigger, self.within)
