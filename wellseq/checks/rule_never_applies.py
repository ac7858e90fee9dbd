"""A rule of the laboratory can never be broken on this trap, whatever is played.

It guards nothing, and whoever wrote it believes that it does: a bound that no output reaches, a
line that would have to be in two states at once.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake
from wellseq.checks.breaches import said
from wellseq.checks.case import Case, reached
from wellseq.checks.written import mistakes_named
from wellseq.rules.sense import never_applies

SAYS = "An interlock rule can never be broken on this trap, so that it guards nothing."
NEEDS = ("trap", "rules")
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake]:
    """The rules that can never apply; those of the house are told in the cautions instead."""
    yield from mistakes_named(case, "rule-never-applies")
    for rule in reached(case.rules).rules:
        why = "" if rule.house else never_applies(rule, reached(case.trap))
        if why:
            yield Mistake(
                "rule-never-applies",
                rule.place,
                f"the rule '{rule.name}' can never be broken: {why} ({said(rule)})",
                "look at its bounds and its states, or take the rule away",
                subject=rule.name,
            )
