"""What guards a table and what does not: rules, what nobody examined, allowances, margins."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Finding, Verdict
from wellseq.checks.breaches import said
from wellseq.checks.case import Case
from wellseq.checks.numbers import amount
from wellseq.emit.examined import nearest_of_each
from wellseq.emit.page import (
    Bullets,
    Paragraph,
    Part,
    Section,
    Trusted,
    Words,
    paragraph,
    section,
    standing,
    table,
)
from wellseq.emit.sources import written_names
from wellseq.emit.story import allowances, assumed, roundings
from wellseq.rules.rulings import Outcome, Ruling, Rulings

MARGINS_SHOWN = 9
MARGINS_OF_A_KIND = 1
WORDS = {
    Outcome.KEPT: "kept",
    Outcome.BROKEN: "**broken**",
    Outcome.UNSURE: "**not surely kept**",
    Outcome.NOT_EXAMINED: "**not examined**",
}


def guard_sections(case: Case) -> Iterator[Section | None]:
    """Everything, in the order of the page."""
    yield _rules(case)
    yield section("not-examined", "What was not examined", *_not_examined(case))
    yield _allowances(case)
    yield _assumed(case)
    yield _roundings(case)
    yield _margins(case)


# rules


def _rules(case: Case) -> Section | None:
    heading = "Interlock rules"
    if case.rulings is None:
        said_ = Trusted("**No rule was judged**: the sequence did not get as far as that.")
        return section("rules", heading, paragraph(said_), *standing("rules"))
    judged = [one for one in case.rulings.all if one.outcome is not Outcome.NOT_APPLICABLE]
    head = ("rule", "says", "came out", "least margin")
    rows = [
        (
            one.rule.name,
            said(one.rule),
            (Trusted(WORDS[one.outcome] + _marks(one)),),
            _margin_of(one),
        )
        for one in judged
    ]
    left_out = [one for one in case.rulings.all if one.outcome is Outcome.NOT_APPLICABLE]
    return section(
        "rules",
        heading,
        _count(case, case.rulings),
        *standing("rules"),
        table(head, rows) if rows else None,
        *_not_applicable(left_out),
    )


def _count(case: Case, rulings: Rulings) -> Part:
    house = sum(one.rule.house for one in rulings.all)
    own = len(rulings.all) - house
    counts = ", ".join(
        f"{len(rulings.of(outcome))} {outcome.value}" for outcome in Outcome if rulings.of(outcome)
    )
    words: list[str] = [
        Trusted(f"{house} rules come with wellseq, {own} from the laboratory: {counts}.")
    ]
    files = case.rules.own_files if case.rules is not None else ()
    names = written_names(case)
    if files:
        listed = ", ".join(names.get(file, file) for file in files)
        words += [Trusted(" The laboratory's stand in "), listed, Trusted(".")]
    else:
        words.append(Trusted(" **The trap file names no rules of the laboratory's own.**"))
    return Paragraph(tuple(words))


def _marks(ruling: Ruling) -> str:
    words = "" if ruling.arises else "; never arises here"
    if ruling.rule.never_waivable:
        words += "; may never be allowed"
    return words + (" (house)" if ruling.rule.house else "")


def _margin_of(ruling: Ruling) -> str:
    if ruling.outcome is not Outcome.KEPT:
        return ruling.why
    return "–" if ruling.margin is None else amount(ruling.margin.value, ruling.margin.unit)


def _not_applicable(left_out: list[Ruling]) -> Iterator[Part]:
    if left_out:
        yield paragraph(
            Trusted(
                "These rules of the house were **not applied**, since the trap file "
                "lacks what they speak of:"
            )
        )
        yield Bullets(
            tuple(
                (one.rule.name, Trusted(": "), one.why, Trusted(" ("), said(one.rule), Trusted(")"))
                for one in left_out
            )
        )


# what was not looked at, and what was let through


def _not_examined(case: Case) -> Iterator[Part]:
    unexamined = case.rulings.of(Outcome.NOT_EXAMINED) if case.rulings is not None else ()
    if unexamined:
        yield Bullets(
            tuple(
                (Trusted("**Rule "), one.rule.name, Trusted("**: "), one.why) for one in unexamined
            )
        )
    if case.not_run:
        yield Bullets(
            tuple((Trusted("**Check "), name, Trusted("**: "), why) for name, why in case.not_run)
        )
    yield from standing("not-examined")


def _allowances(case: Case) -> Section | None:
    used = allowances(case)
    if not used:
        return section("allowances", "Allowances", paragraph("None: no finding was waived."))
    rows = [
        (str(one["name"]), str(one["reason"]), f"line {one['line']}", str(one["covers"]))
        for one in used
    ]
    names = written_names(case)
    waived = [finding for finding in case.findings if finding.verdict is Verdict.ALLOWED]
    items: tuple[Words, ...] = tuple((f"{one.message} ({_place(one, names)})",) for one in waived)
    head = ("what was allowed", "because", "written at", "findings")
    return section("allowances", "Allowances", table(head, rows), Bullets(items))


def _assumed(case: Case) -> Section | None:
    rows = [
        (
            f"{one['quantity']} of {one['cloud']}",
            f"{one['value']:g} ± {one['half_width']:g} {one['unit']}",
            str(one["reason"]),
        )
        for one in assumed(case)
    ]
    head = ("what", "value", "because")
    return section("assumed", "Values assumed", table(head, rows)) if rows else None


# margins


def _margins(case: Case) -> Section | None:
    """The passing readings nearest to their limits, a few subjects of each kind, nearest first."""
    nearest = nearest_of_each(one for one in case.findings if one.name != "interlock-broken")
    names = written_names(case)
    met: dict[str, int] = {}
    rows: list[tuple[str, ...]] = []
    for finding in nearest:
        met[finding.name] = met.get(finding.name, 0) + 1
        if met[finding.name] <= MARGINS_OF_A_KIND and len(rows) < MARGINS_SHOWN:
            rows.append(_margin(finding, names))
    if not rows:
        return None
    head = ("what could go wrong", "of", "value", "limit", "margin", "where")
    more = len(nearest) - len(rows)
    said_ = paragraph(f"{more} more lie further from their limits.") if more else None
    return section("margins", "Margins, the nearest to its limit first", table(head, rows), said_)


def _margin(finding: Finding, names: dict[str, str]) -> tuple[str, ...]:
    margin = finding.margin if finding.margin is not None else float("nan")
    return (
        finding.name,
        finding.subject,
        amount(finding.value or 0.0, finding.unit),
        amount(finding.limit or 0.0, finding.unit),
        amount(margin, finding.unit),
        _place(finding, names),
    )


def _place(finding: Finding, names: dict[str, str]) -> str:
    label = finding.label or finding.step
    step = f", {label}" if label else ""
    file = names.get(finding.place.file, finding.place.file)
    return f"{file} line {finding.place.line}{step}"


def _roundings(case: Case) -> Section | None:
    moved = roundings(case)
    heading = "Rounding of times"
    if not moved:
        words: Words = ("Every edge falls on its clock as written.",)
    else:
        block, worst = moved[0]
        words = (
            f"{len(moved)} edges were moved onto their clocks, the furthest by "
            f"{amount(abs(float(worst.error_s)), 's')}: {worst.output}, written for "
            f"{amount(float(worst.asked_s), 's')} of {case.block_name(block)}.",
        )
    return section("roundings", heading, Paragraph(words))
