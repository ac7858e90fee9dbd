"""What a check says: readings are measured, a limit judges them, findings are the verdicts.

A check never compares.  `judge` is the one place where a number meets its limit; a value that is
not known (NaN) is `unsure`, never a pass.  `Mistake` is for what is wrong with a text, where there
is nothing to measure.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from enum import StrEnum
from typing import Literal

from wellseq.base.place import Place


class Verdict(StrEnum):
    """`pass` keeps its margin for the report; `fail` and `unsure` block the table."""

    PASS = "pass"
    FAIL = "fail"
    UNSURE = "unsure"
    ALLOWED = "allowed"


@dataclass(frozen=True, slots=True)
class Limit:
    """A bound on a reading: `side` says on which side of `value` a reading is fine (ties pass)."""

    side: Literal["at most", "at least"]
    value: float
    unit: str = ""

    def judge(self, value: float, uncertainty: float = 0.0) -> Verdict:
        """Pass, fail or unsure for a reading `value` ± `uncertainty` in the limit's unit."""
        if not (math.isfinite(value) and math.isfinite(uncertainty) and math.isfinite(self.value)):
            return Verdict.UNSURE
        sign = 1.0 if self.side == "at most" else -1.0
        if sign * value + uncertainty <= sign * self.value:
            return Verdict.PASS
        if sign * value - uncertainty > sign * self.value:
            return Verdict.FAIL
        return Verdict.UNSURE

    def judge_between(self, low: float, high: float) -> Verdict:
        """Pass, fail or unsure for a value known to lie from `low` to `high` (ends included).

        An end may be infinite where nothing bounds the value on that side; NaN is not known.
        """
        if math.isnan(low) or math.isnan(high) or not math.isfinite(self.value):
            return Verdict.UNSURE
        best, worst = (low, high) if self.side == "at most" else (-high, -low)
        bound = self.value if self.side == "at most" else -self.value
        if math.isfinite(worst) and worst <= bound:
            return Verdict.PASS
        return Verdict.FAIL if math.isfinite(best) and best > bound else Verdict.UNSURE

    def margin(self, value: float, uncertainty: float = 0.0) -> float:
        """How far inside the limit the worst of the reading is; negative outside, NaN unknown."""
        sign = 1.0 if self.side == "at most" else -1.0
        return sign * (self.value - value) - uncertainty + 0.0


def at_most(value: float, unit: str = "") -> Limit:
    """A limit that a reading may reach but not exceed."""
    return Limit("at most", value, unit)


def at_least(value: float, unit: str = "") -> Limit:
    """A limit that a reading must reach."""
    return Limit("at least", value, unit)


@dataclass(frozen=True, slots=True)
class Origin:
    """The step that something belongs to: where written, its label and its passes of repeats.

    `passes` counts from 1, outermost repeat first; `chain` are the places of the `do` calls, from
    the outermost in.
    """

    place: Place
    step: str = ""
    label: str = ""
    passes: tuple[int, ...] = ()
    chain: tuple[Place, ...] = ()
    number: int = -1


@dataclass(frozen=True, slots=True)
class Mistake:
    """Something wrong with a text: the bad thing's name, where, what, and what would be right.

    `waivable` is False for what no `allow` may accept though others of its name may be accepted;
    `strip` are lines of text that show what the signals were around it.
    """

    name: str
    place: Place
    message: str
    hint: str = ""
    origin: Origin | None = None
    subject: str = ""
    block: str = ""
    window_s: tuple[float, float] | None = None
    waivable: bool = True
    strip: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Reading:
    """One measured value: what a check hands over to be judged.

    `value` and `uncertainty` are in the limit's unit; `message` says in words what was measured and
    may hold {value}, {uncertainty}, {limit} (filled in with units); `window_s` is the span of time
    within the block, in seconds.  `between`, where given, is the interval that is judged instead of
    value ± uncertainty, whose sum and difference would move its ends by rounding.  `waivable` and
    `strip` are those of a `Mistake`.
    """

    value: float
    limit: Limit
    message: str
    origin: Origin
    uncertainty: float = 0.0
    subject: str = ""
    block: str = ""
    window_s: tuple[float, float] | None = None
    hint: str = ""
    between: tuple[float, float] | None = None
    waivable: bool = True
    strip: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Finding:
    """A judged reading or a mistake, with everything a report needs.

    `value`, `limit`, `margin`, `uncertainty` share `unit`, or are None when nothing was measured.
    `known` says why a reviewer need not look again; it opens no table, only `allow` does.
    """

    name: str
    verdict: Verdict
    message: str
    place: Place
    hint: str = ""
    subject: str = ""
    step: str = ""
    label: str = ""
    passes: tuple[int, ...] = ()
    chain: tuple[Place, ...] = ()
    block: str = ""
    window_s: tuple[float, float] | None = None
    value: float | None = None
    limit: float | None = None
    unit: str = ""
    margin: float | None = None
    uncertainty: float | None = None
    reason: str = field(default="", compare=False)
    known: str = field(default="", compare=False)
    waivable: bool = field(default=True, compare=False)
    strip: tuple[str, ...] = field(default=(), compare=False)

    @property
    def blocks(self) -> bool:
        """Whether this finding stands between the sequence and its table."""
        return self.verdict in (Verdict.FAIL, Verdict.UNSURE)
