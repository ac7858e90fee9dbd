"""release: a cloud is let go on purpose, towards a detector or a dump."""

from typing import Annotated

from wellseq.model.effects import Acted, Released
from wellseq.model.pen import Pen
from wellseq.model.step import Cloud, Duration, Electrodes, Step, Subject, Volts


class Release(Step):
    """`release CLOUD through E[, E2] to V over T`: these electrodes go straight to `to` (V)."""

    cloud: Annotated[Cloud, Subject()]
    through: Electrodes
    to: Volts
    over: Duration

    def draw(self, pen: Pen) -> None:
        """Open the well; whatever shares it goes too."""
        pen.ramp(dict.fromkeys(self.through, self.to), self.over)
        pen.note(Acted(self.cloud))
        pen.note(Released(self.cloud, self.through))
