"""require: the author's own claim about the state at this place."""

from collections.abc import Mapping
from typing import Annotated, ClassVar, Literal, Self

from pydantic import model_validator

from wellseq.model.effects import Claimed
from wellseq.model.pen import Pen
from wellseq.model.step import Cloud, Label, Step, Subject, Takes, Word

_LATER = "only depth, separation and time can be required yet; {} needs the forecast of clouds"
_FORECAST = ("temperature", "number", "radius", "density")
_UNITS = (("depth", "V"), ("separation", "m"), ("time", "s"))
Bound = Annotated[float, Takes("quantity", by="quantity", units=_UNITS, sign="not negative")]


class Require(Step):
    """`require depth of CLOUD`, `separation of CLOUD from CLOUD`, `time after LABEL`, and a bound.

    The bound is `above X`, `below X` or `between X and Y`; in V (depth), m (separation), s (time).
    `throughout` asks for the worst since the last label instead of the state at this place.
    """

    REFUSED: ClassVar[Mapping[str, str]] = {word: _LATER.format(word) for word in _FORECAST}

    quantity: Annotated[Literal["depth", "separation", "time"], Takes("choice"), Subject()]
    of: Cloud | None = None
    from_: Cloud | None = None
    after: Label | None = None
    above: Bound | None = None
    below: Bound | None = None
    between: Bound | None = None
    and_: Bound | None = None
    throughout: Word = False

    @model_validator(mode="after")
    def _whose(self) -> Self:
        takes = {"depth": ("of",), "separation": ("of", "from"), "time": ("after",)}[self.quantity]
        given = {"of": self.of, "from": self.from_, "after": self.after}
        for word, value in given.items():
            if (value is not None) != (word in takes):
                raise ValueError(
                    f"`require {self.quantity}` "
                    + ("does not take" if value is not None else "needs")
                    + f" `{word}`"
                )
        if self.of is not None and self.of == self.from_:
            raise ValueError(f"'{self.of}' has no separation from itself")
        return self

    @model_validator(mode="after")
    def _one_bound(self) -> Self:
        given = [self.above is not None, self.below is not None, self.between is not None]
        if sum(given) != 1 or (self.between is None) != (self.and_ is None):
            raise ValueError("`require` needs one of `above`, `below` and `between … and …`")
        if self.between is not None and self.and_ is not None and self.between >= self.and_:
            raise ValueError("after `between` the lower bound comes first")
        if self.quantity == "time" and self.throughout:
            raise ValueError("`require time` does not take `throughout`")
        return self

    def draw(self, pen: Pen) -> None:
        """Note the claim."""
        pen.note(
            Claimed(
                self.quantity,
                self.of or "",
                self.above if self.between is None else self.between,
                self.below if self.and_ is None else self.and_,
                other=self.from_ or "",
                label=self.after or "",
                throughout=self.throughout,
            )
        )
