"""A page → one HTML file that needs nothing else: no script, no network, no other file.

It reads in the light, in the dark and in print.  Names are escaped; the policy in its head forbids
whatever they might bring along.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from html import escape
from itertools import groupby

from wellseq.base.data import data_folder
from wellseq.base.names import printable
from wellseq.emit.chart import drawn
from wellseq.emit.page import Bullets, Page, Paragraph, Part, Section, Table, Trusted, Words

HALF = frozenset(
    ("who", "site", "stored", "waits", "end", "not-examined", "allowances", "assumed", "roundings")
)
"""Sections that stand in two columns of a printed page where they follow each other."""
SHORT = 26
POLICY = "default-src 'none'; style-src 'unsafe-inline'"
_STRONG = re.compile(r"\*\*([^*]+)\*\*")
_STRESSED = re.compile(r"\*([^*]+)\*")
_CODE = re.compile(r"`([^`]+)`")


def rendered(page: Page) -> str:
    """The page as HTML; ends with a new line."""
    title = _words(page.title)
    style = (data_folder("safety") / "texts" / "page.css").read_text("utf-8").strip()
    body = "\n".join(
        (
            f"<header>\n<h1>{title}</h1>",
            *(_part(part) for part in page.lead),
            "</header>\n<main>",
            *_sections(page.sections),
            "</main>",
        )
    )
    return (
        '<!DOCTYPE html>\n<html lang="en">\n<head>\n<meta charset="utf-8">\n'
        f'<meta http-equiv="Content-Security-Policy" content="{POLICY}">\n'
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n'
        '<meta name="color-scheme" content="light dark">\n'
        f"<title>{_plain(page.title)}</title>\n<style>\n{style}\n</style>\n</head>\n"
        f"<body>\n{body}\n</body>\n</html>\n"
    )


def _sections(sections: Sequence[Section]) -> Iterator[str]:
    for half, group in groupby(sections, key=lambda one: one.key in HALF):
        text_of = "\n".join(_section(one) for one in group)
        yield f'<div class="halves">\n{text_of}\n</div>' if half else text_of


def _section(one: Section) -> str:
    parts = "\n".join(_part(part) for part in one.parts)
    heading = _marked(one.heading)
    return (
        f'<section id="{one.key}" aria-labelledby="{one.key}-heading">\n'
        f'<h2 id="{one.key}-heading">{heading}</h2>\n{parts}\n</section>'
    )


def _part(part: Part) -> str:
    if isinstance(part, Paragraph):
        return f"<p>{_words(part.words)}</p>"
    if isinstance(part, Bullets):
        items = "".join(f"<li>{_words(item)}</li>" for item in part.items)
        return f"<ul>{items}</ul>"
    return _table(part) if isinstance(part, Table) else drawn(part)


def _table(part: Table) -> str:
    head = "".join(f'<th scope="col">{_marked(cell)}</th>' for cell in part.head)
    rows = "\n".join("<tr>" + "".join(_cell(cell) for cell in row) + "</tr>" for row in part.rows)
    return (
        f'<div class="wide"><table>\n<thead><tr>{head}</tr></thead>\n'
        f"<tbody>\n{rows}\n</tbody>\n</table></div>"
    )


def _cell(cell: Words) -> str:
    """A cell; a long one may be broken into lines, a short one keeps its width."""
    kind = ' class="long"' if sum(map(len, cell)) > SHORT else ""
    return f"<td{kind}>{_words(cell)}</td>"


def _words(words: Words) -> str:
    """Names made harmless, then the marks of our own words as elements, also around names."""
    joined = "".join(
        escape(one, quote=False) if isinstance(one, Trusted) else _still(text(one)) for one in words
    )
    return _marks(joined)


def text(name: str) -> str:
    """A text as HTML, with nothing in it that could act; blanks at its ends are kept."""
    core = " ".join(name.split())
    lead = " " if name[:1].isspace() else ""
    tail = " " if name[-1:].isspace() and core else ""
    return lead + escape(printable(core)) + tail


def _still(escaped: str) -> str:
    """A name in which nothing is one of our marks."""
    return escaped.replace("*", "&#42;").replace("`", "&#96;")


def _marked(words: str) -> str:
    """Our own words with their marks."""
    return _marks(escape(words, quote=False))


def _marks(escaped: str) -> str:
    coded = _CODE.sub(r"<code>\1</code>", escaped)
    strong = _STRONG.sub(r"<strong>\1</strong>", coded)
    return _STRESSED.sub(r"<em>\1</em>", strong)


def _plain(words: Words) -> str:
    return "".join(text(one) for one in words)
