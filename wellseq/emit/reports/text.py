"""Findings for a person at a terminal: what is wrong, the written line, where, when, what to do.

A finding is a headline and a few labelled rows; nothing is said by colour alone.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from textwrap import wrap

from wellseq.base.finding import Finding, Verdict
from wellseq.base.names import printable
from wellseq.base.place import Place
from wellseq.checks.numbers import amount, stretch
from wellseq.emit.examined import Examined, nearest_of_each, standing
from wellseq.emit.excerpt import marker, shown_line, source_line
from wellseq.emit.formats import Options

_WORD = {
    Verdict.FAIL: "FAILS",
    Verdict.UNSURE: "NOT DECIDED",
    Verdict.ALLOWED: "ALLOWED",
    Verdict.PASS: "PASSES",
}
_COLOUR = {Verdict.FAIL: "31;1", Verdict.UNSURE: "35;1", Verdict.ALLOWED: "33", Verdict.PASS: "32"}
_INDENT = " " * 10
WIDE = 40
"""Columns below which a long word is cut: it would not fit on any line."""


def report(things: Sequence[Examined], options: Options) -> str:
    """All findings of all files, each file closed by one line that says how it stands."""
    return "\n".join(
        "".join(f"{line}\n" for line in _paragraphs(thing, options)) for thing in things
    )


def _paragraphs(thing: Examined, options: Options) -> Iterator[str]:
    for finding in thing.having(Verdict.FAIL, Verdict.UNSURE, Verdict.ALLOWED):
        yield from _finding(thing, finding, options)
        yield ""
    if options.margins:
        yield from _margins(thing, options)
    for why, names in thing.by_cause().items():
        yield from _row("not run", f"{', '.join(names)}: {printable(why)}", options)
    yield from _closing(thing, options)


def _finding(thing: Examined, finding: Finding, options: Options) -> Iterator[str]:
    word = _painted(_WORD[finding.verdict], _COLOUR[finding.verdict], options)
    word += ", known" if finding.known else ""
    yield f"{word}  {_painted(finding.name, '1', options)}"
    yield from _row("", finding.message, options)
    written = source_line(thing.sources, finding.place)
    if written is not None:
        yield from _excerpt(written, finding.place, options)
    yield from _row("at", _where(finding), options)
    for call in reversed(finding.chain):
        yield from _row("called", f"from {_shown(call)}", options)
    if finding.window_s is not None:
        yield from _row("when", _when(finding), options)
    if finding.strip:
        room = max(10, options.width - len(_INDENT))
        for number, line in enumerate(finding.strip):
            yield f"{'' if number else 'signals':>8}  {printable(line)[:room]}".rstrip()
    if finding.reason:
        yield from _row("because", printable(finding.reason), options)
    if finding.known:
        yield from _row("known", printable(finding.known), options)
    if finding.hint:
        yield from _row("try", finding.hint, options)


def _excerpt(written: str, place: Place, options: Options) -> Iterator[str]:
    line = shown_line(written.rstrip())
    under = marker(written.rstrip(), place)
    cut = len(line) - len(line.lstrip(" "))
    room = max(10, options.width - len(_INDENT))
    start = len(under) - len(under.lstrip(" "))
    if start - cut > room - 12:
        cut = start - room // 3
    yield f"{'written':>8}  {line[cut : cut + room]}"
    yield _INDENT + _painted(under[cut : cut + room], "36", options)


def _where(finding: Finding) -> str:
    words = [_shown(finding.place)]
    if finding.label:
        words.append(f'step "{printable(finding.label)}"')
    elif finding.step:
        words.append(f"step {printable(finding.step)}")
    if finding.passes:
        words.append("pass " + ", inner pass ".join(str(number) for number in finding.passes))
    return ", ".join(words)


def _shown(place: Place) -> str:
    return f"{printable(place.file)}, line {place.line}, column {place.column}"


def _when(finding: Finding) -> str:
    start_s, end_s = finding.window_s or (0.0, 0.0)
    within = f" of block {printable(finding.block)}" if finding.block else ""
    return f"{stretch(start_s, end_s)}{within}"


def _margins(thing: Examined, options: Options) -> Iterator[str]:
    passing = nearest_of_each(thing.findings)
    if passing:
        yield _painted(
            f"margins of {printable(thing.shown)}, the nearest to its limit first", "1", options
        )
    for finding in passing:
        subject = f" of {printable(finding.subject)}" if finding.subject else ""
        yield (
            f"{_amount(finding.margin, finding.unit):>12}  {finding.name}{subject}: "
            f"{_amount(finding.value, finding.unit)} against {_amount(finding.limit, finding.unit)}"
            f" at {printable(finding.place.file)}:{finding.place.line}"
        )
    if passing:
        yield ""


def _amount(value: float | None, unit: str) -> str:
    return "not known" if value is None else amount(value, unit)


def _closing(thing: Examined, options: Options) -> Iterator[str]:
    counts = [
        f"{len(thing.having(verdict))} {word}"
        for verdict, word in (
            (Verdict.FAIL, "fail"),
            (Verdict.UNSURE, "not decided"),
            (Verdict.ALLOWED, "allowed"),
            (Verdict.PASS, "pass"),
        )
        if thing.having(verdict)
    ]
    verdict = "clear" if thing.clear else "not clear"
    if thing.against and thing.settled and not thing.clear:
        counts.append(f"{standing(thing)}; a build refuses it")
    elif thing.set_aside:
        counts.append(f"{thing.set_aside} there already in {printable(thing.against)}")
    if thing.cause:
        counts.append(f"{len(thing.not_run)} checks not run")
    said = ", ".join(counts) or "no findings"
    colour = _COLOUR[Verdict.PASS if thing.clear else Verdict.FAIL]
    length = f"; {amount(thing.duration_s, 's')} played" if thing.duration_s is not None else ""
    yield f"{printable(thing.shown)}: {_painted(verdict, colour, options)}; {said}{length}"


def _row(label: str, text: str, options: Options) -> Iterator[str]:
    room = max(10, options.width - len(_INDENT))
    long = options.width < WIDE
    lines = wrap(text, room, break_long_words=long, break_on_hyphens=False) or [""]
    yield f"{label:>8}  {lines[0]}".rstrip()
    for line in lines[1:]:
        yield _INDENT + line


def _painted(text: str, colour: str, options: Options) -> str:
    return f"\x1b[{colour}m{text}\x1b[0m" if options.colour and text else text
