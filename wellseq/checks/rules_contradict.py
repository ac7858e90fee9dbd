"""Two rules of the laboratory cannot both be kept once what they watch for is true."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake
from wellseq.checks.breaches import said
from wellseq.checks.case import Case, reached
from wellseq.checks.written import mistakes_named
from wellseq.rules.sense import contradictions

SAYS = "Two interlock rules demand opposite things of the same moment."
NEEDS = ("trap", "rules")
WAIVABLE = False


def read(case: Case) -> Iterator[Mistake]:
    """Pairs of rules with one trigger, or without any, that demand what cannot be together."""
    yield from mistakes_named(case, "rules-contradict")
    rules = [rule for rule in reached(case.rules).rules if not rule.lacking]
    for first, second in contradictions(rules, reached(case.trap)):
        place = first.place
        yield Mistake(
            "rules-contradict",
            second.place,
            f"the rules '{second.name}' and '{first.name}' cannot both be kept: {said(second)}; "
            f"and {place.file} line {place.line}: {said(first)}",
            "give them different conditions, or take one away",
            subject=second.name,
        )
