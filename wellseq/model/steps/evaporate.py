"""evaporate: the wall of a well is lowered on one side, so that the hottest of a cloud leave."""

from typing import Annotated

from wellseq.model.effects import Acted, Evaporated
from wellseq.model.pen import Pen
from wellseq.model.step import Cloud, Depth, Duration, Electrodes, Step, Subject, Word


class Evaporate(Step):
    """`evaporate CLOUD through E[, E2] to U over T [exponentially]`.

    `to` is the own vacuum depth on axis over that side, in V; it falls straight in time, or by
    equal ratios when `exponentially`.
    """

    cloud: Annotated[Cloud, Subject()]
    through: Electrodes
    to: Depth
    over: Duration
    exponentially: Word = False

    def draw(self, pen: Pen) -> None:
        """Lower the depth over the side of these electrodes."""
        pen.lower_depth(
            self.cloud, self.through, self.to, self.over, exponentially=self.exponentially
        )
        pen.note(Acted(self.cloud))
        pen.note(Evaporated(self.cloud, self.through, self.to))
