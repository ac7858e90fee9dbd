"""`cautions.md`: what can hurt somebody while this table is played, in plain words.

The standing texts are data in `safety/texts/`; this file fills in what is true of one case.  Names
are escaped, so that none of them can act as Markdown.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence

from wellseq.base.data import data_folder
from wellseq.base.finding import Finding, Verdict
from wellseq.checks.case import Case
from wellseq.checks.judging import Cleared
from wellseq.checks.numbers import amount
from wellseq.emit.escape import markdown
from wellseq.emit.examined import nearest_of_each
from wellseq.emit.hazards import EXTRA_LOW_V, TOUCH_V, Hazard, Windows, hazards
from wellseq.emit.sources import written_names
from wellseq.emit.story import allowances, assumed, roundings
from wellseq.model.trap import Trap
from wellseq.timeline.shipped import Shipped

WINDOWS_SHOWN = 6
MARGINS_OF_A_KIND = 3
ROUNDINGS_SHOWN = 20


def write(cleared: Cleared) -> Iterator[tuple[str, list[bytes]]]:
    """(name, content) of the cautions of a cleared case."""
    case = cleared.case
    if case.trap is None or case.shipped is None or case.sequence is None:
        return
    found = hazards(case.trap, case.shipped)
    parts = [
        _opening(case, case.trap),
        _who(),
        _outputs(found, case.shipped),
        _stored(found),
        _waiting(case.shipped, found),
        _end(found),
        _site(case.trap),
        _drives(case.shipped),
        _lines(case, case.trap),
        _not_examined(),
        _allowances(case),
        _assumed(case),
        _margins(case),
        _roundings(case),
    ]
    text = "\n\n".join(part.strip("\n") for part in parts if part)
    yield "cautions.md", [f"{text}\n".encode()]


def standing(name: str) -> str:
    """A standing text of `safety/texts/`."""
    return (data_folder("safety") / "texts" / f"{name}.md").read_text("utf-8").strip()


def _opening(case: Case, trap: Trap) -> str:
    sequence = markdown(case.sequence.name) if case.sequence is not None else ""
    played = amount(float(case.timeline.duration_s), "s") if case.timeline is not None else ""
    return (
        f"# Cautions for {sequence} on {markdown(trap.name)}\n\n{standing('what-this-is')}\n\n"
        f"Played time {played}, waits for triggers not counted."
    )


def _who() -> str:
    return f"## Who must agree\n\n{standing('who-to-ask')}"


def _outputs(found: list[Hazard], shipped: Shipped) -> str:
    heading = "## Outputs that can injure"
    if not found:
        return (
            f"{heading}\n\nNo output is flagged hazardous, and by the trap file none can give more "
            f"than {TOUCH_V:g} V.\n\n{standing('touch')}"
        )
    live = [one for one in found if one.flagged or one.windows]
    rows = [
        (
            markdown(one.output),
            markdown(", ".join(one.electrodes)),
            "yes" if one.flagged else "no",
            amount(one.largest_V, "V") + _class(one.largest_V),
            amount(one.able_V, "V"),
            _times(one.windows, shipped),
        )
        for one in live
    ]
    quiet = [
        f"{markdown(one.output)} ({amount(one.able_V, 'V')})" for one in found if one not in live
    ]
    said = f"Able to give more than {TOUCH_V:g} V, but never commanded to: {', '.join(quiet)}."
    head = (
        "output",
        "electrodes",
        "flagged hazardous",
        "most commanded",
        "able to",
        f"above {TOUCH_V:g} V",
    )
    parts = [heading, _table(head, rows) if rows else "", said if quiet else "", standing("touch")]
    return "\n\n".join(part for part in parts if part)


def _class(volts: float) -> str:
    if volts > EXTRA_LOW_V:
        return f", **above {EXTRA_LOW_V:g} V**"
    return f", **above {TOUCH_V:g} V**" if volts > TOUCH_V else ""


def _times(windows: Windows, shipped: Shipped) -> str:
    if not windows:
        return "never commanded"
    names = {block.block.index: block.block.name for block in shipped.blocks}
    shown = [
        f"{amount(start, 's')} to {amount(end, 's')} of {markdown(names[block])}"
        for block, start, end in windows[:WINDOWS_SHOWN]
    ]
    if len(windows) > WINDOWS_SHOWN:
        last = windows[-1]
        shown.append(
            f"{len(windows) - WINDOWS_SHOWN} more, the last until {amount(last[2], 's')} of "
            f"{markdown(names[last[0]])}"
        )
    return "; ".join(shown)


def _stored(found: list[Hazard]) -> str:
    live = [one for one in found if one.flagged or one.windows]
    live.sort(key=lambda one: -(one.stored_J or 0.0))
    rows = [
        (markdown(one.output), amount(one.stored_J, "J"), amount(one.largest_V, "V"))
        for one in live
        if one.stored_J is not None
    ]
    unknown = [markdown(one.output) for one in live if one.stored_J is None]
    said = f"\n\nNo capacitance is given for: {', '.join(unknown)}." if unknown else ""
    if not rows and not unknown:
        return ""
    table = f"\n\n{_table(('output', 'stored energy', 'at'), rows)}" if rows else ""
    return f"## Stored energy\n\n{standing('stored-energy')}{table}{said}"


def _waiting(shipped: Shipped, found: list[Hazard]) -> str:
    waits = [block.block for block in shipped.blocks if block.block.trigger]
    if not waits:
        return ""
    rows = []
    for block in waits:
        live = [markdown(one.output) for one in found if one.ends_V[block.index - 1] > TOUCH_V]
        rows.append(
            (
                markdown(block.trigger),
                amount(float(block.within_s), "s"),
                amount(float(block.first_row_s), "s") + " ± " + amount(float(block.jitter_s), "s"),
                ", ".join(live) or "none",
            )
        )
    head = ("trigger", "waits at most", "first row after it", f"above {TOUCH_V:g} V meanwhile")
    return f"## Waits for triggers\n\n{standing('waits')}\n\n{_table(head, rows)}"


def _end(found: list[Hazard]) -> str:
    live = [one for one in found if one.ends_V[-1] > TOUCH_V]
    quiet = [one for one in found if one.flagged and one not in live]
    said = f"No output of the list above is left above {TOUCH_V:g} V."
    if live:
        said = f"**Left above {TOUCH_V:g} V: {_left(live)}.**"
    if quiet:
        said += f" Flagged hazardous and left below that: {_left(quiet)}."
    return f"## After the last row\n\n{standing('end-state')}\n\n{said}"


def _left(found: list[Hazard]) -> str:
    return "; ".join(f"{markdown(one.output)} at {amount(one.ends_V[-1], 'V')}" for one in found)


def _site(trap: Trap) -> str:
    site, parts = trap.site, []
    if site.magnet:
        strongest = max(abs(field) for _, field in trap.field.along)
        parts.append(f"{standing('magnet')} The trap file gives {strongest:g} T on the axis.")
    if site.cryogen:
        parts.append(f"{standing('cryogen')} The trap file names: {markdown(site.cryogen)}.")
    if site.source:
        parts.append(f"{standing('source')} Source: {markdown(site.source)}.")
    if site.notes:
        parts.append(f"Notes of the trap file: {markdown(site.notes)}")
    unknown = [what for what in ("cryogen", "source") if not getattr(site, what)]
    if unknown:
        parts.append(
            f"The trap file says nothing of: {', '.join(unknown)}. That is not the same as none."
        )
    return "## The site\n\n" + "\n\n".join(parts)


def _drives(shipped: Shipped) -> str:
    rows = [
        (
            markdown(drive.ring),
            markdown(block.block.name),
            f"{amount(float(drive.start_s), 's')} to {amount(float(drive.stop_s), 's')}",
            f"{amount(drive.from_Hz, 'Hz')} to {amount(drive.to_Hz, 'Hz')}",
            amount(drive.amplitude_V, "V"),
        )
        for block in shipped.blocks
        for drive in block.block.drives
    ]
    if not rows:
        return ""
    head = ("ring", "block", "when", "frequency", "amplitude")
    return f"## Radio-frequency drives\n\n{standing('drives')}\n\n{_table(head, rows)}"


def _lines(case: Case, trap: Trap) -> str:
    if not trap.lines or case.shipped is None:
        return ""
    last = case.shipped.blocks[-1].states[-1].tolist()
    rows = []
    for line, state in zip(trap.lines, last, strict=True):
        if line.kind == "input":
            rows.append((markdown(line.name), "input, not set by the table", ""))
        else:
            left = markdown(line.states[state])
            rows.append((markdown(line.name), markdown(line.initial), left))
    return "## Digital lines\n\n" + _table(("line", "begins", "is left"), rows)


def _not_examined() -> str:
    return f"## What was not examined\n\n{standing('not-examined')}"


def _allowances(case: Case) -> str:
    used = allowances(case)
    if not used:
        return "## Allowances\n\nNone: no finding was waived."
    rows = [
        (
            markdown(str(one["name"])),
            markdown(str(one["reason"])),
            f"line {one['line']}",
            str(one["covers"]),
        )
        for one in used
    ]
    waived = [finding for finding in case.findings if finding.verdict is Verdict.ALLOWED]
    names = written_names(case)
    said = "\n".join(f"- {markdown(one.message)} ({_place(one, names)})" for one in waived)
    head = ("what was allowed", "because", "written at", "findings")
    return f"## Allowances\n\n{_table(head, rows)}\n\n{said}"


def _assumed(case: Case) -> str:
    used = assumed(case)
    if not used:
        return ""
    rows = [
        (
            f"{markdown(str(one['quantity']))} of {markdown(str(one['cloud']))}",
            f"{one['value']:g} ± {one['half_width']:g} {one['unit']}",
            markdown(str(one["reason"])),
        )
        for one in used
    ]
    return "## Values assumed\n\n" + _table(("what", "value", "because"), rows)


def _margins(case: Case) -> str:
    """The passing readings nearest to their limits, a few subjects of each kind, nearest first."""
    nearest = nearest_of_each(case.findings)
    if not nearest:
        return ""
    names = written_names(case)
    shown: dict[str, int] = {}
    rows = []
    for finding in nearest:
        shown[finding.name] = shown.get(finding.name, 0) + 1
        if shown[finding.name] <= MARGINS_OF_A_KIND:
            rows.append(_margin(finding, names))
    more = len(nearest) - len(rows)
    said = f"\n\n{more} more of these kinds lie further from their limits." if more else ""
    head = ("what could go wrong", "of", "value", "limit", "margin", "where")
    return f"## Margins, the nearest to its limit first\n\n{_table(head, rows)}{said}"


def _margin(finding: Finding, names: Mapping[str, str]) -> tuple[str, ...]:
    return (
        markdown(finding.name),
        markdown(finding.subject),
        amount(finding.value or 0.0, finding.unit),
        amount(finding.limit or 0.0, finding.unit),
        amount(finding.margin if finding.margin is not None else float("nan"), finding.unit),
        _place(finding, names),
    )


def _place(finding: Finding, names: Mapping[str, str]) -> str:
    label = finding.label or finding.step
    step = f", {markdown(label)}" if label else ""
    file = names.get(finding.place.file, finding.place.file)
    return f"{markdown(file)} line {finding.place.line}{step}"


def _roundings(case: Case) -> str:
    moved = roundings(case)
    if not moved:
        return "## Rounding of times\n\nEvery edge falls on its clock as written."
    rows = [
        (
            amount(float(one.error_s), "s"),
            markdown(one.output),
            amount(float(one.asked_s), "s"),
            markdown(case.block_name(block)),
        )
        for block, one in moved[:ROUNDINGS_SHOWN]
    ]
    more = len(moved) - len(rows)
    said = f"\n\n{more} more edges were moved by less." if more > 0 else ""
    head = ("moved by", "output", "written for", "block")
    return f"## Rounding of times, largest first\n\n{_table(head, rows)}{said}"


def _table(head: tuple[str, ...], rows: Sequence[tuple[str, ...]]) -> str:
    lines = ["| " + " | ".join(cells) + " |" for cells in (head, *rows)]
    lines.insert(1, "|" + " --- |" * len(head))
    return "\n".join(lines)
