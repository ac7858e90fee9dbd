"""Text → followed wells, for tests."""

from __future__ import annotations

from functools import cache
from pathlib import Path

from wellseq.fields.field import Field
from wellseq.model.build import build
from wellseq.model.trap import Trap
from wellseq.text.parse import parse
from wellseq.timeline.draw import draw
from wellseq.timeline.ship import ship
from wellseq.timeline.shipped import Shipped
from wellseq.timeline.timeline import Timeline
from wellseq.wells.trace import trace
from wellseq.wells.wells import Held, Wells

HERE = Path(__file__).parent
HEAD = """wellseq 1
trap "bench.trap.toml"
cloud cold is electron { number 1e6; radius 1 mm; temperature 100 K }
cloud hot is antiproton { number 1e4; energy 2 keV ± 0.5 keV }
cloud slow is antiproton { number 1e4; radius 1 mm; temperature 100 K }
cloud plus is positron { number 1e4; radius 1 mm; temperature 100 K }
pattern cup { E3, E7 = -60 V; E4..E6 = 10 V; others = 0 V }
"""
FIELDS: list[Field] = []


def field_of(trap: Trap) -> Field:
    """The field of the bench trap, solved once."""
    if not FIELDS:
        FIELDS.append(Field(trap))
    return FIELDS[0]


@cache
def follow(body: str) -> tuple[Timeline, Shipped, Wells]:
    """Play a sequence of steps and follow its clouds."""
    source = f"{HEAD}\nsequence test {{\n{body}\n}}\n"
    tree = parse(source, "test.well")
    built = build(tree, HERE / "test.well", known_findings=())
    serious = [m for m in (*built.mistakes, *tree.mistakes) if m.name != "name-unused"]
    assert not serious, serious
    assert built.sequence is not None
    trap = built.sequence.trap
    timeline = draw(built.sequence, lambda: field_of(trap))
    assert not timeline.mistakes, timeline.mistakes
    shipped = ship(timeline)
    return timeline, shipped, trace(timeline, shipped, field_of(trap))


def held(wells: Wells, cloud: str) -> list[Held]:
    """All stretches of one cloud."""
    return [one for one in wells.held if one.cloud == cloud]


def troubles(wells: Wells) -> list[tuple[str, str, bool]]:
    """(finding, cloud, shown to happen) of everything unproved."""
    return [(one.trouble.value, one.cloud, one.sure) for one in wells.unproved]
