"""catch: a bunch that arrives at a trigger is shut in between two gates."""

from collections.abc import Iterator
from typing import Annotated, Self

from pydantic import model_validator

from wellseq.model.effects import Caught
from wellseq.model.pen import Pen
from wellseq.model.step import (
    Cloud,
    Duration,
    Electrode,
    Objection,
    Seconds,
    Step,
    Subject,
    Trigger,
    Volts,
)
from wellseq.model.trap import Switch, Trap


class Catch(Step):
    """`catch CLOUD { between NEAR and FAR; at V; closing T after TRIGGER; within T }`.

    `at` in V; `closing` in s, at which half of the near gate's edge is over; `within` in s, the
    longest wait for the trigger.
    """

    IN_LANE = False
    BRACED = True

    cloud: Annotated[Cloud, Subject()]
    between: Electrode
    and_: Electrode
    at: Volts
    closing: Seconds
    after: Trigger
    within: Duration | None = None

    @model_validator(mode="after")
    def _two_gates(self) -> Self:
        if self.between == self.and_:
            raise ValueError(f"a catch needs two gates, and '{self.and_}' is the near one already")
        return self

    def objections(self, trap: Trap) -> Iterator[Objection]:
        """The near gate is a switch that has the level, and the wait must be bounded somewhere."""
        if self.within is None and trap.trigger(self.after).within_s is None:
            yield Objection(
                "after",
                "syntax",
                "`catch` needs `within` and a time: the trap file gives no longest wait for "
                f"'{self.after}'",
            )
        output = trap.output_of(self.between)
        if not isinstance(output, Switch):
            yield Objection(
                "between",
                "voltage-out-of-range",
                f"the near gate '{self.between}' hangs on the converter '{output.name}', and only "
                "a switch closes fast enough",
            )
        elif self.at not in output.levels:
            levels = (item if isinstance(item, str) else f"{item:.6g} V" for item in output.levels)
            yield Objection(
                "at",
                "voltage-out-of-range",
                f"the switch of '{self.between}' has no level {self.at:.6g} V",
                f"levels of {output.name}: {', '.join(levels)}",
            )

    def draw(self, pen: Pen) -> None:
        """Wait for the bunch and close the near gate behind it."""
        pen.await_trigger(self.after, self.within)
        pen.close_gate(self.between, self.and_, self.at, self.closing)
        pen.note(Caught(self.cloud, self.between, self.and_))
