"""The cautions of one case: the page that says what can hurt somebody while its table is played.

A stranger must be able to read from it which hazards there are, when, guarded by what, what nobody
examined, what was allowed and why, and who must be asked.  The standing texts are data in
`safety/texts/`.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.checks.case import Case
from wellseq.checks.numbers import amount
from wellseq.emit.content import content_id
from wellseq.emit.guards import guard_sections
from wellseq.emit.hazard_map import HazardMap, hazard_map
from wellseq.emit.page import Page, Paragraph, Part, Section, Trusted, paragraph, section, standing
from wellseq.model.trap import Trap
from wellseq.version import __version__


def cautions(case: Case) -> Page | None:
    """The page of a case that got as far as its tables; None for any other."""
    found = hazard_map(case)
    if found is None or case.sequence is None:
        return None
    sections = [
        section("who", "Who must agree", *standing("who-to-ask"), *standing("signatures")),
        _site(found.trap),
        *found.sections(),
        *guard_sections(case),
    ]
    title = (Trusted("Cautions for "), case.sequence.name, Trusted(" on "), found.trap.name)
    return Page(title, tuple(_lead(case, found)), tuple(one for one in sections if one is not None))


def _lead(case: Case, found: HazardMap) -> Iterator[Part]:
    yield from standing("what-this-is")
    longest = sum(float(block.within_s) for block in found.timeline.blocks)
    waits = f", waits for triggers {amount(longest, 's')} more at the longest" if longest else ""
    yield paragraph(
        Trusted(f"Played time {amount(float(found.timeline.duration_s), 's')}{waits}. Tables "),
        Trusted(f"`{content_id(found.shipped)[:16]}…`, written by wellseq {__version__}."),
    )


def _site(trap: Trap) -> Section | None:
    site = trap.site
    parts: list[Part] = []
    if site.magnet:
        strongest = max(abs(field) for _, field in trap.field.along)
        parts += _with(standing("magnet"), f" The trap file gives {strongest:g} T on the axis.")
    if site.cryogen:
        parts += _with(standing("cryogen"), Trusted(" The trap file names: "), site.cryogen, ".")
    if site.source:
        parts += _with(standing("source"), Trusted(" Source: "), site.source, ".")
    if site.notes:
        parts.append(paragraph(Trusted("Notes of the trap file: "), site.notes))
    unknown = [what for what in ("cryogen", "source") if not getattr(site, what)]
    if unknown:
        said = f"The trap file says nothing of: {', '.join(unknown)}. That is not the same as none."
        parts.append(paragraph(Trusted(said)))
    return section("site", "The site", *parts)


def _with(parts: Iterator[Part], *words: str) -> list[Part]:
    """A standing text with what is true here at its end."""
    found = list(parts)
    last = found[-1]
    if isinstance(last, Paragraph):
        found[-1] = Paragraph((*last.words, *words))
    return found
