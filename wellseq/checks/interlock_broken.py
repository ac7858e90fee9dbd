"""An interlock rule is broken somewhere in the table, or may be within what is known of it.

A rule is judged over all of time: on the rows as shipped, with the real edges and the lag of the
outputs, for every time at which a trigger may come.  What is kept hands over its least margin: in
the unit of its comparison, in s, or in times.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Origin, Reading, at_least
from wellseq.checks.breaches import mistake, reading, said, whole
from wellseq.checks.case import Case, reached
from wellseq.checks.written import mistakes_named
from wellseq.rules.rulings import Outcome, Ruling

SAYS = "An interlock rule is broken, or not surely kept."
NEEDS = ("timeline", "rulings")
WAIVABLE = True


def read(case: Case) -> Iterator[Reading | Mistake]:
    """Every step at which a rule is or may be broken; the least margin of each rule kept."""
    yield from mistakes_named(case, "interlock-broken")
    for ruling in reached(case.rulings).all:
        if ruling.outcome is Outcome.BROKEN:
            for breach in ruling.breaches:
                yield mistake(case, "interlock-broken", ruling, breach)
        elif ruling.outcome is Outcome.UNSURE:
            for breach in ruling.breaches:
                yield reading(case, ruling, breach, "may be broken within what is known")
            if not ruling.breaches:
                yield whole(ruling)
        elif ruling.margin is not None:
            yield _kept(ruling)


def _kept(ruling: Ruling) -> Reading:
    assert ruling.margin is not None
    return Reading(
        value=ruling.margin.value,
        limit=at_least(0.0, ruling.margin.unit),
        message=f"the rule '{ruling.rule.name}' is kept by {{value}}: {said(ruling.rule)}",
        origin=Origin(ruling.rule.place),
        subject=ruling.rule.name,
    )
