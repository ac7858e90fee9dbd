"""ramp: electrodes go from where they are to a pattern, all with one progress."""

from typing import Annotated

from wellseq.model.pen import Pen
from wellseq.model.step import Duration, Pattern, Step, Subject, Word


class Ramp(Step):
    """`ramp PATTERN over T [smoothly]`: straight in time, or a half-cosine; `over` in s."""

    pattern: Annotated[Pattern, Subject()]
    over: Duration
    smoothly: Word = False

    def draw(self, pen: Pen) -> None:
        """Move the electrodes of the pattern, and the others where it says so."""
        pen.ramp(
            self.pattern.volts,
            self.over,
            others_V=self.pattern.others_V,
            smoothly=self.smoothly,
        )
