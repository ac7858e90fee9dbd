"""A page → Markdown; names are escaped, so that none of them can act."""

from __future__ import annotations

from textwrap import wrap

from wellseq.emit.escape import markdown
from wellseq.emit.page import Bullets, Chart, Page, Paragraph, Part, Section, Table, Trusted, Words

WIDTH = 100


def rendered(page: Page) -> str:
    """The page as Markdown; ends with a new line.  A chart is left out: its table says the same."""
    blocks = [f"# {_words(page.title)}", *(_part(part) for part in page.lead)]
    for one in page.sections:
        blocks += _section(one)
    return "\n\n".join(block for block in blocks if block) + "\n"


def _section(one: Section) -> list[str]:
    return [f"## {one.heading}", *(_part(part) for part in one.parts)]


def _part(part: Part) -> str:
    if isinstance(part, Paragraph):
        return _wrapped(_words(part.words))
    if isinstance(part, Bullets):
        return "\n".join(_wrapped(_words(item), "- ", "  ") for item in part.items)
    return _table(part) if isinstance(part, Table) else _nothing(part)


def _nothing(chart: Chart) -> str:
    return ""


def _table(part: Table) -> str:
    lines = ["| " + " | ".join(part.head) + " |", "|" + " --- |" * len(part.head)]
    lines += ["| " + " | ".join(_words(cell) for cell in row) + " |" for row in part.rows]
    return "\n".join(lines)


def _words(words: Words) -> str:
    """Trusted words as they are, others escaped; blanks at the ends of a text are kept."""
    return "".join(one if isinstance(one, Trusted) else _escaped(one) for one in words)


def _escaped(text: str) -> str:
    core = text.strip(" ")
    if not core:
        return text
    start = len(text) - len(text.lstrip(" "))
    end = len(text) - len(text.rstrip(" "))
    return " " * start + markdown(core) + " " * end


def _wrapped(text: str, first: str = "", rest: str = "") -> str:
    lines = wrap(
        text,
        WIDTH,
        initial_indent=first,
        subsequent_indent=rest,
        break_long_words=False,
        break_on_hyphens=False,
    )
    return "\n".join(lines)
