"""Comparisons → rows of words, which the forms for people lay out; found by looking into `forms/`.

A form is a module there with `report(comparisons, sides) -> str`.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from importlib import import_module
from itertools import groupby

from wellseq.base.finding import Finding, Verdict
from wellseq.base.names import printable
from wellseq.checks.numbers import amount
from wellseq.review.comparing import Change, Comparison, StepChange, merged

Form = Callable[[Sequence[Comparison], tuple[str, str]], str]


@dataclass(frozen=True, slots=True)
class Row:
    """One change in words: where, what, before, after, by how much; `worse` is told by a word."""

    where: str
    what: str
    old: str
    new: str
    by: str
    worse: bool = False


def report(form: str, comparisons: Sequence[Comparison], sides: tuple[str, str]) -> str:
    """The comparisons of OLD and NEW in one form; ends with a new line."""
    write: Form = import_module(f"wellseq.review.forms.{form}").report
    return write(comparisons, sides)


def verdict(comparison: Comparison) -> str:
    """How a sequence stands now, in one sentence."""
    if comparison.new is None:
        return "it is not there any more"
    if comparison.old is None:
        return f"it is new, and {_standing(comparison)}"
    if comparison.empty and not comparison.unexamined:
        return "nothing physical changed"
    worse = "something got worse" if comparison.worse else "nothing got worse"
    return f"{worse}; it {_standing(comparison)}"


def _standing(comparison: Comparison) -> str:
    new = comparison.new
    clear = new is not None and new.thing.clear
    before = comparison.old is not None and comparison.old.thing.clear
    if clear:
        return "is clear, as before" if before else "is clear"
    return "is not clear any more" if before else "is not clear"


def step_rows(comparison: Comparison) -> Iterator[Row]:
    """What changed in steps, in order of play; figures that change alike in one row."""
    for _, group in groupby(comparison.steps, lambda one: (id(one.first), id(one.last), one.count)):
        together = list(group)
        where = _steps(together[0])
        changes = [one.change for one in together if one.change is not None]
        for change in merged(sorted(changes, key=lambda one: (one.what, one.subject))):
            yield _row(where, change)
        if not changes:
            came = together[0].kind == "came"
            yield Row(where, "this step is new" if came else "this step is gone", "", "", "")


def whole_rows(comparison: Comparison) -> Iterator[Row]:
    """What changed of margins, outputs, hazards and tables."""
    for change in merged(comparison.whole):
        yield _row("", change)


def finding_words(finding: Finding) -> str:
    """A finding in one line."""
    sure = "not decided: " if finding.verdict is Verdict.UNSURE else ""
    return f"{printable(str(finding.place))}: {sure}{finding.message} [{finding.name}]"


def _row(where: str, change: Change) -> Row:
    subject = f" of {change.subject}" if change.subject else ""
    return Row(
        where,
        printable(f"{change.what}{subject}"),
        _value(change.old, change.unit),
        _value(change.new, change.unit),
        _by(change),
        change.worse,
    )


def _value(value: float | None, unit: str) -> str:
    if value is None:
        return "none"
    return "not known" if math.isnan(value) else amount(value, unit)


def _by(change: Change) -> str:
    """The change itself, with its sign and as a share of the old value."""
    old, new = change.old, change.new
    if old is None or new is None or not (math.isfinite(old) and math.isfinite(new)):
        return ""
    sign = "+" if new > old else "-"
    share = f" ({sign}{abs(new - old) / abs(old) * 100:.3g} %)" if old else ""
    return f"{sign}{amount(abs(new - old), change.unit)}{share}"


def _steps(one: StepChange) -> str:
    """The steps of a row as people speak of them."""
    words = _step(one.first.text, one.first.label, one.first.passes)
    if one.count > 1:
        label = "" if one.last.label == one.first.label else one.last.label
        words += f" … {_step(one.last.text, label, ())} ({one.count} steps)"
    if one.was:
        words += f" (was: {_short(one.was)})"
    return printable(words)


def _step(text: str, label: str, passes: tuple[int, ...]) -> str:
    labelled = f'"{label}": ' if label else ""
    passed = f", pass {'.'.join(map(str, passes))}" if passes else ""
    return f"{labelled}{_short(text)}{passed}"


def _short(text: str) -> str:
    return text if len(text) <= 60 else text[:59].rstrip() + "…"
