"""A comparison as Markdown, for the text of a pull request."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from wellseq.emit.escape import markdown
from wellseq.review.comparing import Comparison
from wellseq.review.telling import Row, finding_words, step_rows, verdict, whole_rows


def report(comparisons: Sequence[Comparison], sides: tuple[str, str]) -> str:
    """All comparisons, a heading each where there are several."""
    old, new = (markdown(side) for side in sides)
    lines = [f"### {old} → {new}"]
    for one in comparisons:
        lines += _lines(one)
    return "\n".join(lines) + "\n"


def _lines(one: Comparison) -> Iterator[str]:
    yield ""
    name = f"**{markdown(one.name)}**: " if one.name else ""
    mark = "**Worse.** " if one.worse and one.new is not None else ""
    yield f"{name}{mark}{markdown(verdict(one).capitalize())}."
    for sentence in one.unexamined:
        yield from ("", f"{markdown(sentence.capitalize())}.")
    yield from _findings("New findings", one, came=True)
    yield from _findings("Findings that went", one, came=False)
    yield from _table("step", list(step_rows(one)))
    yield from _table("", list(whole_rows(one)))


def _findings(head: str, one: Comparison, came: bool) -> Iterator[str]:
    found = one.came if came else one.went
    if found:
        yield from ("", f"{head}:", "")
        yield from (f"- {markdown(finding_words(finding))}" for finding in found)


def _table(first: str, rows: list[Row]) -> Iterator[str]:
    if not rows:
        return
    heads = [first] if first else []
    yield ""
    yield _line([*heads, "figure", "before", "after", "change"])
    yield "|" + "---|" * (len(heads) + 4)
    for row in rows:
        by = f"**worse** {row.by}" if row.worse else markdown(row.by)
        where = [markdown(row.where)] if first else []
        yield _line([*where, markdown(row.what), markdown(row.old), markdown(row.new), by])


def _line(cells: Sequence[str]) -> str:
    return "| " + " | ".join(cells) + " |"
