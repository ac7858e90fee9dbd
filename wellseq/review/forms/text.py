"""A comparison for a terminal: one sentence how it stands, then rows in columns."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from wellseq.base.names import printable
from wellseq.review.comparing import Comparison
from wellseq.review.telling import Row, finding_words, step_rows, verdict, whole_rows


def report(comparisons: Sequence[Comparison], sides: tuple[str, str]) -> str:
    """All comparisons; those without any change in one line each."""
    heads = f"{printable(sides[0])} → {printable(sides[1])}"
    return "\n\n".join("\n".join(_lines(one, heads)) for one in comparisons) + "\n"


def _lines(one: Comparison, heads: str) -> Iterator[str]:
    name = f"{printable(one.name)}: " if one.name else ""
    yield f"{name}{heads}: {verdict(one)}"
    yield from (f"  {sentence}" for sentence in one.unexamined)
    yield from _findings("new findings", [finding_words(finding) for finding in one.came])
    yield from _findings("findings that went", [finding_words(finding) for finding in one.went])
    yield from _rows("steps", list(step_rows(one)))
    yield from _rows("margins, outputs, tables", list(whole_rows(one)))


def _findings(head: str, lines: list[str]) -> Iterator[str]:
    if lines:
        yield from ("", head)
        yield from (f"  {line}" for line in lines)


def _rows(head: str, rows: list[Row]) -> Iterator[str]:
    if not rows:
        return
    yield from ("", head)
    where = ""
    wide = max(len(row.what) for row in rows)
    for row in rows:
        if row.where and row.where != where:
            yield f"  {row.where}"
        where = row.where
        indent = "    " if row.where else "  "
        if not row.old and not row.new:
            yield f"{indent}{row.what}"
            continue
        worse = "  WORSE" if row.worse else ""
        by = f"  {row.by}" if row.by else ""
        yield f"{indent}{row.what.ljust(min(wide, 44))}  {row.old} → {row.new}{by}{worse}"
