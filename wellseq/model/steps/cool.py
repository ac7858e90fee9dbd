"""cool: a cloud loses its heat, by radiation or to a coolant that shares its well."""

from typing import Annotated, Self

from pydantic import model_validator

from wellseq.model.effects import Acted, Cooled
from wellseq.model.pen import Pen
from wellseq.model.step import Cloud, Duration, Step, Subject, Takes

Temperature = Annotated[float, Takes("quantity", "K", "positive")]


class Cool(Step):
    """`cool CLOUD [with COOLANT] for T [until K]`: nothing moves; both clouds must be in the trap.

    `until` (K) shortens nothing: it is a claim about the end of the step.
    """

    cloud: Annotated[Cloud, Subject()]
    with_: Cloud | None = None
    for_: Duration
    until: Temperature | None = None

    @model_validator(mode="after")
    def _two_clouds(self) -> Self:
        if self.cloud == self.with_:
            raise ValueError(f"'{self.cloud}' cannot be its own coolant")
        return self

    def draw(self, pen: Pen) -> None:
        """Hold while the clouds cool."""
        pen.hold(self.for_)
        pen.note(Acted(self.cloud))
        if self.with_ is not None:
            pen.note(Acted(self.with_))
        pen.note(Cooled(self.cloud, self.with_ or "", self.until))
