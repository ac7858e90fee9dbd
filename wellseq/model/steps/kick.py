"""kick: a well is opened so briefly that only the light of two species leaves it."""

from typing import Annotated, Self

from pydantic import model_validator

from wellseq.model.effects import Acted, Kicked
from wellseq.model.pen import Pen
from wellseq.model.step import Cloud, Duration, Electrodes, Step, Subject, Volts


class Kick(Step):
    """`kick LIGHT through E[, E2] to V for T keeping HEAVY`; `to` in V, `for_` in s."""

    light: Annotated[Cloud, Subject()]
    through: Electrodes
    to: Volts
    for_: Duration
    keeping: Cloud

    @model_validator(mode="after")
    def _two_clouds(self) -> Self:
        if self.light == self.keeping:
            raise ValueError(f"'{self.light}' cannot be both kicked out and kept")
        return self

    def draw(self, pen: Pen) -> None:
        """Take the electrodes to the voltage and back."""
        pen.pulse(self.through, self.to, self.for_)
        pen.note(Acted(self.light))
        pen.note(Acted(self.keeping))
        pen.note(Kicked(self.light, self.keeping, self.through))
