"""load: a cloud is filled from a continuous source while nothing moves."""

from typing import Annotated

from wellseq.model.effects import Placed
from wellseq.model.pen import Pen
from wellseq.model.step import Cloud, Duration, Electrode, Step, Subject


class Load(Step):
    """`load CLOUD at ELECTRODE for T`: from its end on the cloud is there as declared."""

    cloud: Annotated[Cloud, Subject()]
    at: Electrode
    for_: Duration

    def draw(self, pen: Pen) -> None:
        """Hold, and place the cloud."""
        pen.hold(self.for_)
        pen.note(Placed(self.cloud, self.at))
