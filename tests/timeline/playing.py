"""Text → timeline and shipped rows, for tests."""

from __future__ import annotations

from pathlib import Path

from wellseq.fields.field import Field
from wellseq.model.build import build
from wellseq.text.parse import parse
from wellseq.timeline.draw import draw
from wellseq.timeline.ship import ship
from wellseq.timeline.shipped import Shipped
from wellseq.timeline.timeline import Timeline

HERE = Path(__file__).parent
HEAD = """wellseq 1
trap "bench.trap.toml"
cloud cold is electron { number 1e6; radius 1 mm; temperature 100 K }
cloud hot is antiproton { number 1e4; energy 2 keV }
cloud plus is positron { number 1e4; radius 1 mm; temperature 100 K }
"""


def play(body: str, before: str = "") -> Timeline:
    """Draw a sequence with the given steps; `before` stands ahead of it (lets, patterns)."""
    source = f"{HEAD}{before}\nsequence test {{\n{body}\n}}\n"
    tree = parse(source, "test.well")
    built = build(tree, HERE / "test.well", known_findings=("off-clock",))
    serious = [m for m in built.mistakes if m.name != "name-unused"]
    assert not serious, serious
    assert built.sequence is not None
    solved: list[Field] = []

    def field_of() -> Field:
        if not solved:
            solved.append(Field(built.trap))
        return solved[0]

    return draw(built.sequence, field_of)


def table(body: str, before: str = "") -> tuple[Timeline, Shipped]:
    """Draw and ship."""
    timeline = play(body, before)
    return timeline, ship(timeline)


def names(timeline: Timeline) -> list[str]:
    """The names of the mistakes of a drawing."""
    return [mistake.name for mistake in timeline.mistakes]
