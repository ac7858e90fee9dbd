"""assume: a measured value takes the place of the forecast from here on."""

from typing import Annotated, Literal

from wellseq.base.quantity import Spread
from wellseq.model.effects import Assumed
from wellseq.model.pen import Pen
from wellseq.model.step import Cloud, Step, Subject, Takes, Text

_UNITS = (("temperature", "K"), ("number", ""), ("radius", "m"), ("density", "/m3"))


class Assume(Step):
    """`assume QUANTITY of CLOUD VALUE [± …] because "reason"`; listed in manifest and cautions."""

    quantity: Annotated[
        Literal["temperature", "number", "radius", "density"], Takes("choice"), Subject()
    ]
    of: Cloud
    value: Annotated[
        Spread, Takes("spread", by="quantity", units=_UNITS, sign="positive"), Subject()
    ]
    because: Text

    def draw(self, pen: Pen) -> None:
        """Note the measured value, in K, as a count, in m or per m3."""
        pen.note(
            Assumed(
                self.quantity,
                self.of,
                float(self.value.value),
                float(self.value.half_width),
                dict(_UNITS)[self.quantity],
                self.because,
            )
        )
