"""What a step kind is: fields that say which words it takes, and what it draws.

One file per verb in `model/steps/`, named by the verb, holding one subclass of `Step`.  Each field
is annotated with a `Takes` that says what it must be; the reader of statements works from that
alone.  A field marked `Subject` stands after the verb; a `Word` is a bare word; any other field
stands after the clause word that is its name (with `_` appended where Python needs it: `for_`).
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Annotated, ClassVar, Literal

from pydantic import BaseModel, ConfigDict

from wellseq.base.quantity import Spread
from wellseq.model.pen import Pen
from wellseq.model.trap import Trap


@dataclass(frozen=True, slots=True)
class Takes:
    """What a field accepts.

    `what`: quantity, spread, electrode, electrodes, cloud, pattern, line, state, trigger, level,
    text, label (of a step before this one), choice (a word of the field's `Literal`), word.
    `unit` gives the kind of a quantity; `sign` restricts its value.  Where the kind depends on a
    word chosen before, `by` is the field of that choice and `units` pairs its words with units.
    """

    what: str
    unit: str = ""
    sign: Literal["any", "positive", "not negative"] = "any"
    by: str = ""
    units: tuple[tuple[str, str], ...] = ()


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


@dataclass(frozen=True, slots=True)
class Objection:
    """What this trap cannot do for a step: the field, the bad thing's name, a sentence, a hint."""

    field: str
    name: str
    message: str
    hint: str = ""


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
Label = Annotated[str, Takes("label")]
Word = Annotated[bool, Takes("word")]
Measured = Annotated[Spread, Takes("spread")]


class Step(BaseModel):
    """A statement with every name and unit settled; immutable.

    Subclasses add fields and `draw`.  A validator may raise ValueError with a sentence for the
    author.
    """

    model_config = ConfigDict(frozen=True, extra="forbid", arbitrary_types_allowed=True)

    IN_LANE: ClassVar[bool] = True
    """False for steps that may not stand in a lane."""
    FIRST: ClassVar[bool] = False
    """True for steps that stand before all others of a sequence."""
    BRACED: ClassVar[bool] = False
    """True for steps whose clauses may stand between braces."""
    REFUSED: ClassVar[Mapping[str, str]] = {}
    """Word → why it is not understood yet, for words that belong to a later release."""

    def objections(self, trap: Trap) -> Iterator[Objection]:
        """What this trap cannot do for this step, as far as its file alone can tell."""
        yield from ()

    def clash(self, first: Step) -> str:
        """Why this cannot stand after the first FIRST step; empty when it can."""
        return ""

    def draw(self, pen: Pen) -> None:
        """Say on the pen what this step does."""
        raise TypeError(f"{type(self).__name__} draws nothing")
