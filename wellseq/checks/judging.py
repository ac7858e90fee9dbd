"""Run every check and judge its readings; the only way to a `Cleared`.

A check is a module of this folder with
    SAYS      one sentence for `explain`
    NEEDS     names of the stages of `Case` it reads, for example ("timeline", "shipped")
    WAIVABLE  whether `allow` may accept it
    read(case) yielding `Reading` (judged here) or `Mistake` (already a verdict)
Its file name, with hyphens, is the finding's name: a check cannot misname itself.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace
from functools import cache
from importlib import import_module
from pkgutil import iter_modules
from types import ModuleType

from wellseq import checks
from wellseq.base.finding import Finding, Mistake, Reading, Verdict
from wellseq.base.names import printable
from wellseq.base.place import Place
from wellseq.checks.case import Case
from wellseq.checks.numbers import amount

_HOUSE = frozenset(
    {"breaches", "case", "judging", "keeping", "numbers", "pieces", "windows", "written"}
)
_AFTER_ALLOWANCES = ("allowance-refused", "allowance-unused")


@cache
def check_names() -> tuple[str, ...]:
    """The names of all checks, as findings carry them."""
    names = (module.name for module in iter_modules(checks.__path__))
    return tuple(sorted(name.replace("_", "-") for name in names if name not in _HOUSE))


def check(name: str) -> ModuleType:
    """The module behind a check's name; raises KeyError for a name that is no check's."""
    if name not in check_names():
        raise KeyError(name)
    return import_module(f"wellseq.checks.{name.replace('-', '_')}")


def waivable(name: str) -> bool:
    """Whether `allow` may accept a finding of this name; False for a name that is no check's."""
    return name in check_names() and bool(check(name).WAIVABLE)


def judge(case: Case) -> Case:
    """Run every check whose stages were reached and return the case with its findings.

    First all ordinary checks, then the allowances, then the checks of the allowances themselves,
    which see every other finding as it stands after them.  A check that wants a stage that was not
    reached is named in `not_run` with the cause.  A mistake that no check reports is a finding all
    the same, under its own name.
    """
    run = _Run(case)
    for name in check_names():
        if name not in _AFTER_ALLOWANCES:
            run.examine(name, case)
    run.report_the_rest()
    found = _allow(case, run.found)
    run.found = []
    seen = case.with_findings(tuple(found), (), ())
    for name in _AFTER_ALLOWANCES:
        run.examine(name, seen)
    found = sorted(found + run.found, key=_order)
    return case.with_findings(tuple(found), tuple(sorted(run.ran)), tuple(sorted(run.not_run)))


class _Run:
    """What has been found so far, and by which checks."""

    def __init__(self, case: Case) -> None:
        self.case = case
        self.found: list[Finding] = []
        self.ran: list[str] = []
        self.not_run: list[tuple[str, str]] = []
        self.reported: set[Mistake] = set()

    def examine(self, name: str, case: Case) -> None:
        module = check(name)
        missing = [stage for stage in module.NEEDS if getattr(case, stage) is None]
        if missing:
            self.not_run.append((name, f"the file did not get as far as its {missing[0]}"))
            return
        self.ran.append(name)
        self.found.extend(self._findings(name, module.read(case)))

    def report_the_rest(self) -> None:
        for mistake in self.case.mistakes:
            if mistake not in self.reported:
                self.found.append(_of_mistake(mistake.name, mistake))

    def _findings(self, name: str, things: Iterable[Reading | Mistake]) -> Iterator[Finding]:
        for thing in things:
            if isinstance(thing, Reading):
                yield _of_reading(name, thing)
            else:
                self.reported.add(thing)
                yield _of_mistake(name, thing)


def _of_mistake(name: str, mistake: Mistake) -> Finding:
    origin = mistake.origin
    return Finding(
        name=name,
        verdict=Verdict.FAIL,
        message=printable(mistake.message),
        place=mistake.place,
        hint=printable(mistake.hint),
        subject=mistake.subject,
        step=origin.step if origin else "",
        label=origin.label if origin else "",
        passes=origin.passes if origin else (),
        chain=origin.chain if origin else (),
        block=mistake.block,
        window_s=mistake.window_s,
        waivable=mistake.waivable,
        strip=mistake.strip,
    )


def _of_reading(name: str, reading: Reading) -> Finding:
    limit, origin = reading.limit, reading.origin
    if reading.between is None:
        verdict = limit.judge(reading.value, reading.uncertainty)
        margin = limit.margin(reading.value, reading.uncertainty)
    else:
        low, high = reading.between
        verdict = limit.judge_between(low, high)
        margin = limit.margin(high if limit.side == "at most" else low)
    return Finding(
        name=name,
        verdict=verdict,
        message=printable(_worded(reading)),
        place=origin.place,
        hint=printable(reading.hint),
        subject=reading.subject,
        step=origin.step,
        label=origin.label,
        passes=origin.passes,
        chain=origin.chain,
        block=reading.block,
        window_s=reading.window_s,
        value=reading.value,
        limit=limit.value,
        unit=limit.unit,
        margin=margin,
        uncertainty=reading.uncertainty,
        waivable=reading.waivable,
        strip=reading.strip,
    )


def _worded(reading: Reading) -> str:
    unit = reading.limit.unit
    words = {
        "value": amount(reading.value, unit),
        "uncertainty": amount(reading.uncertainty, unit),
        "limit": amount(reading.limit.value, unit),
    }
    message = reading.message
    for word, text in words.items():
        message = message.replace("{" + word + "}", text)
    return message


def _allow(case: Case, found: list[Finding]) -> list[Finding]:
    """The findings after the allowances; one covers its name at its step, in every pass."""
    if case.sequence is None:
        return found
    reasons: dict[tuple[str, Place], str] = {}
    for allowance in case.sequence.allowances:
        if waivable(allowance.name):
            reasons.setdefault((allowance.name, allowance.step_place), allowance.reason)
    return [_allowed(finding, reasons) if finding.blocks else finding for finding in found]


def _allowed(finding: Finding, reasons: dict[tuple[str, Place], str]) -> Finding:
    reason = reasons.get((finding.name, finding.place))
    if reason is None or not finding.waivable:
        return finding
    return replace(finding, verdict=Verdict.ALLOWED, reason=reason)


def _order(finding: Finding) -> tuple[object, ...]:
    return (finding.place, finding.passes, finding.name, finding.subject, finding.message)


@dataclass(frozen=True, slots=True)
class Cleared:
    """The key to the table writer; it cannot be made for a case that is not clear.

    Raises ValueError otherwise: `clear` is the way to ask.
    """

    case: Case

    def __post_init__(self) -> None:
        if not _is_clear(self.case):
            raise ValueError("a case with findings or stages missing cannot be cleared")


def clear(case: Case) -> Cleared | None:
    """The key, or None while any finding fails or is unsure, or a stage is missing.

    Passing means that every check of the house ran: a check that could not run blocks as well.
    """
    return Cleared(case) if _is_clear(case) else None


def _is_clear(case: Case) -> bool:
    stages = (case.trap, case.sequence, case.timeline, case.shipped, case.wells, case.rulings)
    return None not in stages and not case.blocked and case.ran == check_names()
