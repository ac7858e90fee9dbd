"""What came of every rule: kept, broken, not sure, not examined, not applicable; and why."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction

from wellseq.model.rulebook import Rule


class Outcome(StrEnum):
    """What a rule came to; all but `kept` and `not applicable` stand in the way of a table."""

    KEPT = "kept"
    BROKEN = "broken"
    UNSURE = "not sure"
    NOT_EXAMINED = "not examined"
    NOT_APPLICABLE = "not applicable"


@dataclass(frozen=True, slots=True)
class Shown:
    """An atom at a moment: its words, whether it is true (None: not sure), its value if any.

    `low` and `high` are in `unit`; NaN where the atom has no value or it is not known.
    """

    text: str
    true: bool | None
    low: float
    high: float
    unit: str


@dataclass(frozen=True, slots=True)
class Row:
    """One line of a strip: an atom's words and a sign per cell: '#' true, '.' not, '?' not sure."""

    text: str
    cells: str


@dataclass(frozen=True, slots=True)
class Strip:
    """The signals of a rule around a moment, from `start_s` to `end_s` counted from it, s."""

    rows: tuple[Row, ...]
    start_s: float
    end_s: float


@dataclass(frozen=True, slots=True)
class Breach:
    """Where a rule is broken, or may be.

    `block` is the index of the block whose time `start_s` and `end_s` are; in a wait they are later
    than its last row.  `number` is the step, `awaiting` the trigger that is waited for.  `waits`
    says after which wait for which trigger it happens, where it does not after every one.
    `unknown` names what would have to be known.
    """

    sure: bool
    block: int
    start_s: Fraction
    end_s: Fraction
    number: int
    awaiting: str = ""
    waits: Mapping[str, Fraction] | None = None
    shown: tuple[Shown, ...] = ()
    strip: Strip | None = None
    unknown: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Margin:
    """How far a kept rule was from being broken: in the unit of a comparison, in s, or in times."""

    value: float
    unit: str


@dataclass(frozen=True, slots=True)
class Ruling:
    """One rule and what came of it.

    `arises` says whether what it watches for happened at all.  `breaches` are at most one per step
    and stretch of time; `margin` is None where nothing came near.  `why` tells what lacked, or why
    it is not sure.
    """

    rule: Rule
    outcome: Outcome
    breaches: tuple[Breach, ...] = ()
    arises: bool = True
    margin: Margin | None = None
    why: str = ""

    @property
    def blocks(self) -> bool:
        """Whether this stands between the sequence and its table."""
        return self.outcome not in (Outcome.KEPT, Outcome.NOT_APPLICABLE)


@dataclass(frozen=True, slots=True)
class Rulings:
    """All rules in the order of the book."""

    all: tuple[Ruling, ...] = ()

    def of(self, *outcomes: Outcome) -> tuple[Ruling, ...]:
        """The rulings that came to one of these."""
        return tuple(one for one in self.all if one.outcome in outcomes)
