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
from importlib import import_module
from pkgutil import iter_modules
from types import ModuleType

from wellseq import checks
from wellseq.base.finding import Finding, Mistake, Reading, Verdict
from wellseq.base.names import printable
from wellseq.checks.case import Case

_HOUSE = frozenset({"case", "judging", "numbers"})


def check_names() -> tuple[str, ...]:
    """The names of all checks, as findings carry them."""
    names = (module.name for module in iter_modules(checks.__path__))
    return tuple(sorted(name.replace("_", "-") for name in names if name not in _HOUSE))


def check(name: str) -> ModuleType:
    """The module behind a check's name."""
    return import_module(f"wellseq.checks.{name.replace('-', '_')}")


def judge(case: Case) -> Case:
    """Run every check whose stages were reached and return the case with its findings.

    Allowances are applied after all checks have run; a check that raises for want of a stage is
    reported in `not_run` with the stage's name.
    """
    found: list[Finding] = []
    ran: list[str] = []
    not_run: list[tuple[str, str]] = []
    last = {"allowance-unused", "allowance-refused"}
    for name in sorted(check_names(), key=lambda name: (name in last, name)):
        module = check(name)
        missing = [stage for stage in module.NEEDS if getattr(case, stage) is None]
        if missing:
            not_run.append((name, f"no {missing[0]} was reached"))
            continue
        ran.append(name)
        seen = case if name not in last else case.with_findings(tuple(found), (), ())
        found.extend(_findings(name, module.read(seen)))
        if name not in last:
            continue
    found = [_waive(case, finding) for finding in found]
    found.sort(key=_order)
    return case.with_findings(tuple(found), tuple(ran), tuple(not_run))


def _findings(name: str, things: Iterable[Reading | Mistake]) -> Iterator[Finding]:
    for thing in things:
        yield _of_reading(name, thing) if isinstance(thing, Reading) else _of_mistake(name, thing)


def _of_mistake(name: str, mistake: Mistake) -> Finding:
    origin = mistake.origin
    return Finding(
        name=name,
        verdict=Verdict.FAIL,
        message=printable(mistake.message),
        place=mistake.place,
        hint=printable(mistake.hint),
        step=origin.step if origin else "",
        label=origin.label if origin else "",
        passes=origin.passes if origin else (),
        chain=origin.chain if origin else (),
    )


def _of_reading(name: str, reading: Reading) -> Finding:
    limit = reading.limit
    origin = reading.origin
    return Finding(
        name=name,
        verdict=limit.judge(reading.value, reading.uncertainty),
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
        margin=limit.margin(reading.value, reading.uncertainty),
        uncertainty=reading.uncertainty,
    )


def _worded(reading: Reading) -> str:
    from wellseq.checks.numbers import amount

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


def _waive(case: Case, finding: Finding) -> Finding:
    if not finding.blocks or case.sequence is None or not check(finding.name).WAIVABLE:
        return finding
    for allowance in case.sequence.allowances:
        if allowance.name == finding.name and _within(finding, allowance.step_place):
            return replace(finding, verdict=Verdict.ALLOWED, reason=allowance.reason)
    return finding


def _within(finding: Finding, step_place: object) -> bool:
    return finding.place == step_place


def _order(finding: Finding) -> tuple[object, ...]:
    return (finding.place, finding.passes, finding.name, finding.subject, finding.message)


@dataclass(frozen=True, slots=True)
class Cleared:
    """The key to the table writer: only `clear` makes one."""

    case: Case


def clear(case: Case) -> Cleared | None:
    """The key, or None while any finding fails or is unsure, or a stage is missing.

    Passing means that every check of the house ran: a check that could not run blocks as well.
    """
    complete = None not in (case.trap, case.sequence, case.timeline, case.shipped, case.wells)
    if not complete or case.blocked or case.not_run or not case.ran:
        return None
    return Cleared(case)
