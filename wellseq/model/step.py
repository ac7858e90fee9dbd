"""What a step kind is: fields that say which words it takes, and what it draws.

One file per verb in `model/steps/`, named by the verb, holding one subclass of `Step`.  Each field
is annotated with a `Takes` that says where it stands in the statement (after the verb, after a
clause word, or as a bare word) and what it must be; the reader of statements works from that alone.
A field after a clause word has that word as its name (with `_` appended where Python needs it).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Annotated, ClassVar, Literal

from pydantic import BaseModel, ConfigDict

from wellseq.base.quantity import Spread
from wellseq.model.pen import Pen


@dataclass(frozen=True, slots=True)
class Takes:
    """What a field accepts.

    `what`: quantity, spread, count, electrode, electrodes, cloud, pattern, line, state, trigger,
    level, text, word.  `unit` gives the kind of a quantity; `sign` restricts its value.
    `units` (for a spread whose kind depends on the quantity named before it) maps names to units.
    """

    what: str
    unit: str = ""
    sign: Literal["any", "positive", "not negative"] = "any"


@dataclass(frozen=True, slots=True)
class Subject:
    """Marks a field that stands after the verb, in the order of the fields, before any clause."""


@dataclass(frozen=True, slots=True)
class PatternVolts:
    """A pattern as settled: volts per electrode, and what the others do (None: keep).

    `others_V` concerns electrodes on converter outputs that the pattern does not name.
    """

    volts: Mapping[str, float]
    others_V: float | None = None


@dataclass(frozen=True, slots=True)
class Level:
    """A level of a switch: fixed volts, or the name of the converter output behind it."""

    value: float | str


Duration = Annotated[Fraction, Takes("quantity", "s", "positive")]
Seconds = Annotated[Fraction, Takes("quantity", "s", "not negative")]
Volts = Annotated[float, Takes("quantity", "V")]
Depth = Annotated[float, Takes("quantity", "V", "positive")]
Amplitude = Annotated[float, Takes("quantity", "V", "positive")]
Frequency = Annotated[float, Takes("quantity", "Hz", "positive")]
Electrode = Annotated[str, Takes("electrode")]
Electrodes = Annotated[tuple[str, ...], Takes("electrodes")]
Cloud = Annotated[str, Takes("cloud")]
Pattern = Annotated[PatternVolts, Takes("pattern")]
Line = Annotated[str, Takes("line")]
State = Annotated[str, Takes("state")]
Trigger = Annotated[str, Takes("trigger")]
SwitchLevel = Annotated[Level, Takes("level")]
Text = Annotated[str, Takes("text")]
Word = Annotated[bool, Takes("word")]
Measured = Annotated[Spread, Takes("spread")]


class Step(BaseModel):
    """A statement with every name and unit settled; immutable.

    Subclasses add fields and `draw`.  `IN_LANE` is False for steps that may not stand in a lane.
    A validator may raise ValueError with a sentence for the author.
    """

    model_config = ConfigDict(frozen=True, extra="forbid", arbitrary_types_allowed=True)

    IN_LANE: ClassVar[bool] = True
    REFUSED: ClassVar[Mapping[str, str]] = {}
    """Clause word → why it is not understood yet, for words that belong to a later release."""

    def draw(self, pen: Pen) -> None:
        """Say on the pen what this step does."""
        raise TypeError(f"{type(self).__name__} draws nothing")
