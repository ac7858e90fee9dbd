"""cool: a cloud loses its heat, by radiation or to a coolant that shares its well."""

from collections.abc import Mapping
from typing import Annotated, ClassVar

from wellseq.model.effects import Acted
from wellseq.model.pen import Pen
from wellseq.model.step import Cloud, Duration, Step, Subject


class Cool(Step):
    """`cool CLOUD [with COOLANT] for T`: nothing moves; both clouds must be in the trap."""

    REFUSED: ClassVar[Mapping[str, str]] = {
        "until": "`until` needs the forecast of temperature, which this version does not make; "
        "leave it out or state the measured value with `assume`"
    }

    cloud: Annotated[Cloud, Subject()]
    with_: Cloud | None = None
    for_: Duration

    def draw(self, pen: Pen) -> None:
        """Hold while the clouds cool."""
        pen.hold(self.for_)
        pen.note(Acted(self.cloud))
        if self.with_ is not None:
            pen.note(Acted(self.with_))
