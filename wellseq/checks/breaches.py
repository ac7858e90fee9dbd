"""Breaches of interlock rules in words: what was broken, what the signals were, when it happens."""

from __future__ import annotations

import math

from wellseq.base.finding import Mistake, Origin, Reading, at_most
from wellseq.checks.case import Case
from wellseq.checks.numbers import amount
from wellseq.model.rulebook import Rule
from wellseq.rules.rulings import Breach, Ruling, Shown, Strip

TEXT_MAX = 240
SIGNALS_MAX = 6


def mistake(case: Case, name: str, ruling: Ruling, breach: Breach) -> Mistake:
    """A rule that is surely broken there."""
    rule, origin = ruling.rule, case.origin(breach.number)
    return Mistake(
        name,
        origin.place,
        f"{_called(rule)} is broken{_when(breach)}: {said(rule)}{_signals(breach)}",
        hint(case, rule),
        origin,
        subject=rule.name,
        block=case.block_name(breach.block),
        window_s=_window(breach),
        waivable=not rule.never_waivable,
        strip=drawn(breach.strip),
    )


def reading(case: Case, ruling: Ruling, breach: Breach, why: str) -> Reading:
    """A rule that may be broken there: not known, which is never a pass."""
    rule = ruling.rule
    return Reading(
        value=math.nan,
        limit=at_most(0.0),
        message=f"{_called(rule)} {why}{_when(breach)}: {said(rule)}{_signals(breach)}",
        origin=case.origin(breach.number),
        subject=rule.name,
        block=case.block_name(breach.block),
        window_s=_window(breach),
        hint=hint(case, rule),
        waivable=not rule.never_waivable,
        strip=drawn(breach.strip),
    )


def whole(ruling: Ruling) -> Reading:
    """A rule that could not be decided at all; it points at the rule itself."""
    rule = ruling.rule
    return Reading(
        value=math.nan,
        limit=at_most(0.0),
        message=f"{_called(rule)} could not be decided: {ruling.why}",
        origin=Origin(rule.place),
        subject=rule.name,
        waivable=False,
    )


def said(rule: Rule) -> str:
    """What a rule says, without its name, cut off where it is long."""
    words = rule.text.partition(":")[2].strip()
    return words if len(words) <= TEXT_MAX else words[:TEXT_MAX].rstrip() + " …"


def hint(case: Case, rule: Rule) -> str:
    """Where to read more."""
    trap = f" --trap {case.trap.file}" if case.trap is not None and not rule.house else ""
    return f"'wellseq explain {rule.name}{trap}' prints the rule and its comment"


def _called(rule: Rule) -> str:
    return f"the rule '{rule.name}'" + (" of the house" if rule.house else "")


def _when(breach: Breach) -> str:
    """The arrival times that a breach needs, and the wait that it lies in."""
    words = [f", while {breach.awaiting} is awaited"] if breach.awaiting else []
    for trigger, wait_s in (breach.waits or {}).items():
        words.append(f", when the first row after {trigger} comes {amount(float(wait_s), 's')} ")
        words.append("after the last row before it")
    return "".join(words)


def _signals(breach: Breach) -> str:
    """What each signal was, in parentheses."""
    shown = [_shown(one) for one in breach.shown[:SIGNALS_MAX]]
    more = len(breach.shown) - len(shown)
    if more > 0:
        shown.append(f"and {more} more")
    return f" ({'; '.join(shown)})" if shown else ""


def _shown(one: Shown) -> str:
    word = {True: "yes", False: "no", None: "not sure"}[one.true]
    if math.isnan(one.low) or math.isnan(one.high):
        return f"{one.text}: {word}"
    low, high = amount(one.low, one.unit), amount(one.high, one.unit)
    return f"{one.text}: {word}, {low if low == high else f'{low} to {high}'}"


def _window(breach: Breach) -> tuple[float, float]:
    return float(breach.start_s), float(breach.end_s)


def drawn(strip: Strip | None) -> tuple[str, ...]:
    """A strip as lines of text: signals by name, then how far it reaches."""
    if strip is None:
        return ()
    width = max(len(row.text) for row in strip.rows)
    lines = [f"{row.text.ljust(width)}  {row.cells}".rstrip() for row in strip.rows]
    start, end = amount(strip.start_s, "s"), f"+{amount(strip.end_s, 's')}"
    cells = len(strip.rows[0].cells)
    lines.append(f"{' ' * width}  {start}{end.rjust(max(cells - len(start), len(end) + 1))}")
    lines.append(f"{' ' * width}  # true   . not   + changes   ? not sure")
    return tuple(lines)
