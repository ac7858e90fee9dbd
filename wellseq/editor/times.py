"""An examined sequence → when each written step begins, shown at the end of its first line."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.place import Place
from wellseq.checks.numbers import amount
from wellseq.editor.documents import Looked
from wellseq.timeline.timeline import StepSpan


def spans_of(looked: Looked) -> dict[Place, list[tuple[int, StepSpan]]]:
    """Every written step → (block index, span) of each time it is played."""
    timeline = looked.case.timeline
    found: dict[Place, list[tuple[int, StepSpan]]] = {}
    if timeline is None:
        return found
    for block in timeline.blocks:
        for span in block.spans:
            place = timeline.origins[span.number].place
            found.setdefault(place, []).append((block.index, span))
    return found


def hints(looked: Looked, file: str) -> Iterator[tuple[int, str, str]]:
    """(line, words, more words) for every step of a file that is played; lines from 1."""
    told: set[int] = set()
    for place, spans in sorted(spans_of(looked).items()):
        if place.file != file or place.line in told:
            continue
        told.add(place.line)
        block, first = spans[0]
        words = f"at {amount(float(first.start_s), 's')}"
        if len(spans) > 1:
            words += f", {len(spans)} times"
        yield place.line, words, f"of block {looked.case.block_name(block)}"
