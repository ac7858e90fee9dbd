"""One examined thing and its findings: what every form of report is made from.

A sequence (`Case`) and a published folder both become an `Examined`, so a report never asks which.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from wellseq.base.finding import Finding, Verdict
from wellseq.base.names import printable
from wellseq.checks.case import Case


@dataclass(frozen=True, slots=True)
class Examined:
    """What was examined, under which name it is shown, and everything found.

    `ran` and `not_run` name the checks; `duration_s` is the time played (s) or None when no
    timeline was reached; `sources` maps file names as shown to their text, for excerpts.
    `against` names what the findings were compared with (a file of known findings, a revision), if
    anything; `set_aside` counts findings that block, stood there already and are not listed.
    """

    shown: str
    findings: tuple[Finding, ...]
    ran: tuple[str, ...]
    not_run: tuple[tuple[str, str], ...] = ()
    duration_s: float | None = None
    sources: Mapping[str, str] = field(default_factory=dict)
    against: str = ""
    set_aside: int = 0

    @property
    def cause(self) -> str:
        """Why this was not examined wholly; empty when it was."""
        if self.not_run:
            why = "; ".join(self.by_cause())
            return f"{len(self.not_run)} checks did not run: {why}"
        return "" if self.ran else "no check ran"

    def by_cause(self) -> dict[str, tuple[str, ...]]:
        """Why checks did not run → their names."""
        causes = dict.fromkeys(why for _, why in self.not_run)
        return {
            cause: tuple(name for name, why in self.not_run if why == cause) for cause in causes
        }

    @property
    def clear(self) -> bool:
        """Whether everything was examined and nothing stands in the way."""
        blocked = self.set_aside > 0 or any(finding.blocks for finding in self.findings)
        return not self.cause and not blocked

    @property
    def settled(self) -> bool:
        """Whether everything was examined and whatever stands in the way was known before.

        A file that is settled and not clear still gets no table.
        """
        return not self.cause and not any(one.blocks and not one.known for one in self.findings)

    def having(self, *verdicts: Verdict) -> tuple[Finding, ...]:
        """The findings with one of these verdicts, in order of place."""
        return tuple(finding for finding in self.findings if finding.verdict in verdicts)


def standing(thing: Examined) -> str:
    """How many findings stood there before, in words."""
    known = sum(bool(finding.known) for finding in thing.findings)
    parts = [f"{known} known"] if known else []
    if thing.set_aside:
        parts.append(f"{thing.set_aside} there already in {printable(thing.against)}")
    return "nothing new" + (f", {', '.join(parts)}" if parts else "")


def nearest_of_each(findings: Iterable[Finding]) -> tuple[Finding, ...]:
    """The passing reading nearest to its limit for each name and subject, the nearest first."""
    measured = [one for one in findings if one.verdict is Verdict.PASS and one.value is not None]
    nearest: dict[tuple[str, str], Finding] = {}
    for finding in sorted(measured, key=nearness):
        nearest.setdefault((finding.name, finding.subject), finding)
    return tuple(nearest.values())


def nearness(finding: Finding) -> tuple[float, object, str, str]:
    """A sorting key: the margin as a share of the limit, then place, name and subject."""
    margin = finding.margin if finding.margin is not None else float("inf")
    scale = abs(finding.limit) if finding.limit else 1.0
    return (margin / scale, finding.place, finding.name, finding.subject)


def examined(case: Case) -> Examined:
    """The findings of one sequence file, as reports want them."""
    return Examined(
        shown=case.shown,
        findings=case.findings,
        ran=case.ran,
        not_run=case.not_run,
        duration_s=float(case.timeline.duration_s) if case.timeline is not None else None,
        sources={file.shown: file.content.decode("utf-8-sig", "replace") for file in case.sources},
    )
