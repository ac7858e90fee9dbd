"""Everything known about one sequence file: what checks read and reports show."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path
from typing import TypeVar

from wellseq.base.finding import Finding, Mistake, Origin
from wellseq.base.place import Place
from wellseq.model.rulebook import Rulebook
from wellseq.model.sequence import Sequence, SourceFile
from wellseq.model.trap import Trap
from wellseq.rules.rulings import Rulings
from wellseq.timeline.shipped import Shipped
from wellseq.timeline.timeline import Timeline
from wellseq.wells.wells import Wells

Stage = TypeVar("Stage")


def reached(stage: Stage | None) -> Stage:
    """A stage that a check `NEEDS` and therefore has; raises TypeError for a check that errs."""
    if stage is None:
        raise TypeError("this check reads a stage that its NEEDS does not name")
    return stage


@dataclass(frozen=True, slots=True)
class Case:
    """One file with all its stages; a stage that could not be reached is None.

    `mistakes` are those of the text, the trap file and the drawing.  `findings` are judged, passes
    included, in order of place.  `ran` and `not_run` name the checks that ran and, with the cause,
    those that had nothing to read.  `sources` are all files that were read, also of a broken text.
    `each` is the one value of an `each` that is played, in base units; empty when all are.
    `rules` are the interlock rules for this trap, `rulings` what came of each on this sequence.
    """

    path: Path
    shown: str
    mistakes: tuple[Mistake, ...] = ()
    trap: Trap | None = None
    sequence: Sequence | None = None
    timeline: Timeline | None = None
    shipped: Shipped | None = None
    wells: Wells | None = None
    rules: Rulebook | None = None
    rulings: Rulings | None = None
    findings: tuple[Finding, ...] = ()
    ran: tuple[str, ...] = ()
    not_run: tuple[tuple[str, str], ...] = ()
    sources: tuple[SourceFile, ...] = ()
    each: str = ""

    def with_findings(
        self,
        findings: tuple[Finding, ...],
        ran: tuple[str, ...],
        not_run: tuple[tuple[str, str], ...],
    ) -> Case:
        """The same case with its verdicts."""
        return replace(self, findings=findings, ran=ran, not_run=not_run)

    @property
    def blocked(self) -> tuple[Finding, ...]:
        """The findings that stand between this sequence and its table."""
        return tuple(finding for finding in self.findings if finding.blocks)

    def origin(self, number: int) -> Origin:
        """The step behind a number of the timeline; the start of the file when there is none."""
        if self.timeline is not None and 0 <= number < len(self.timeline.origins):
            return self.timeline.origins[number]
        return Origin(Place(self.shown))

    def block_name(self, index: int) -> str:
        """The name of a block of the timeline; empty when there is none of that number."""
        if self.timeline is not None and 0 <= index < len(self.timeline.blocks):
            return self.timeline.blocks[index].name
        return ""
