"""nest: a cloud is brought around, or beside, a cloud of the opposite sign."""

from typing import Annotated, Self

from pydantic import model_validator

from wellseq.model.effects import Acted, Nested
from wellseq.model.pen import Pen
from wellseq.model.step import Cloud, Duration, Pattern, Step, Subject, Word


class Nest(Step):
    """`nest CLOUD around|beside CLOUD using PATTERN over T [smoothly]`; `over` in s."""

    cloud: Annotated[Cloud, Subject()]
    around: Cloud | None = None
    beside: Cloud | None = None
    using: Pattern
    over: Duration
    smoothly: Word = False

    @property
    def host(self) -> str:
        """The cloud that the other is brought around or beside."""
        return self.around or self.beside or ""

    @model_validator(mode="after")
    def _one_host(self) -> Self:
        if (self.around is None) == (self.beside is None):
            raise ValueError("`nest` needs one of `around` and `beside`, and a cloud")
        if self.cloud == self.host:
            raise ValueError(f"'{self.cloud}' cannot be nested with itself")
        return self

    def draw(self, pen: Pen) -> None:
        """Ramp to the pattern while both clouds are watched."""
        pen.ramp(self.using.volts, self.over, others_V=self.using.others_V, smoothly=self.smoothly)
        pen.note(Acted(self.cloud))
        pen.note(Acted(self.host))
        pen.note(Nested(self.cloud, self.host))
