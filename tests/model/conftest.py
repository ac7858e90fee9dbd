"""A small invented trap, texts written for it, and a pen that records what is asked of it."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

import pytest

from wellseq.model.build import Built, build
from wellseq.model.sequence import Lanes, Played
from wellseq.model.step import Step
from wellseq.model.trap import Trap
from wellseq.model.trap_file import read_trap
from wellseq.text.parse import parse

FINDINGS = ("ramp-not-adiabatic", "well-too-shallow", "slew-too-fast")


def _trap_text() -> str:
    """Gates G1 and G2 on switches, E1…E9 on converters, a ring of 6 sectors and one of 4."""
    parts = ['wellseq-trap = 1\nname = "Sandpit"\n[field]\nuniform = "1 T"\n']
    stack = ["G1", *(f"E{n}" for n in range(1, 10)), "R6", "R4", "G2"]
    for number, name in enumerate(stack):
        sectors = {"R6": 6, "R4": 4}.get(name, 1)
        output = f"hv{name[1]}" if name[0] == "G" else f"out_{name}"
        parts.append(
            f'[[electrode]]\nname = "{name}"\nfrom = "{13 * number} mm"\n'
            f'to = "{13 * number + 12} mm"\nradius = "15 mm"\nsectors = {sectors}\n'
            f'output = "{output}"\n'
        )
    for name in [*(f"out_{name}" for name in stack if name[0] != "G"), "behind"]:
        parts.append(
            f'[[output]]\nname = "{name}"\nrange = ["-140 V", "140 V"]\nslew = "12 V/us"\n'
            'bits = 16\nclock = "1 us"\n'
        )
    for name in ("hv1", "hv2"):
        parts.append(
            f'[[output]]\nname = "{name}"\nkind = "switch"\nlevels = ["behind", "-4.5 kV"]\n'
            'edge = "90 ns"\nclock = "10 ns"\n'
        )
    parts.append(
        '[[line]]\nname = "valve"\nstates = ["closed", "open"]\ninitial = "closed"\n'
        'clock = "1 us"\n'
        '[[line]]\nname = "bias"\nstates = ["off", "on"]\ninitial = "off"\nclock = "1 us"\n'
        '[[line]]\nname = "gauge"\nstates = ["off", "on"]\nkind = "input"\nclock = "1 us"\n'
        '[[trigger]]\nname = "arrival"\nwithin = "130 s"\nlatency = "250 ns"\njitter = "20 ns"\n'
        '[[trigger]]\nname = "knock"\nlatency = "250 ns"\njitter = "20 ns"\n'
    )
    return "".join(parts)


TRAP_TEXT = _trap_text()
PRELUDE = """wellseq 1
trap "sandpit.trap.toml"
let wall = 90 V
cloud cool_ones is electron { number 6e7 ± 10 %; radius 0.8 mm; temperature 300 K }
cloud bunch is antiproton { number 8e4 ± 30 %; energy 5 keV ± 2 keV; duration 150 ns }
cloud plus is positron { number 2e6 }
pattern cradle { E1, E9 = -wall; E2..E8 = 10 V; others = 0 V }
"""
LINES_BEFORE = PRELUDE.count("\n") + 1
"""The line of `sequence`: the first step of `Bench.steps` stands in the next one."""


class Bench:
    """Writes files into a folder of their own and builds them."""

    def __init__(self, folder: Path, trap: Trap) -> None:
        self.folder = folder
        self.trap = trap

    def write(self, name: str, text: str | bytes) -> Path:
        """A file of the folder."""
        path = self.folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(text if isinstance(text, bytes) else text.encode())
        return path

    def build(self, text: str, **more: Any) -> Built:
        """Build a whole text as `run.well` beside the trap."""
        path = self.write("run.well", text)
        more.setdefault("known_findings", FINDINGS)
        return build(parse(text, "run.well"), path, **more)

    def told(self, text: str, **more: Any) -> list[tuple[int, str, str]]:
        """Line, name and message of every mistake of a whole text."""
        found = self.build(text, **more).mistakes
        return [(mistake.place.line, mistake.name, mistake.message) for mistake in found]

    def whole(self, steps: str, *definitions: str) -> str:
        """A text with these steps in its sequence."""
        head = PRELUDE + "".join(f"{line}\n" for line in definitions)
        return f"{head}sequence run {{\n{steps}\n}}\n"

    def items(self, steps: str, *definitions: str) -> tuple[Played | Lanes, ...]:
        """What is played; nothing may be wrong but that a name is not used."""
        built = self.build(self.whole(steps, *definitions))
        assert [m for m in built.mistakes if m.name != "name-unused"] == []
        assert built.sequence is not None
        return built.sequence.items

    def step(self, line: str) -> Step:
        """The one step that a line says."""
        (item,) = self.items(line)
        assert isinstance(item, Played)
        return item.step

    def refused(self, line: str, *definitions: str) -> list[tuple[str, str, str]]:
        """Name, the words at the place, and message of everything wrong with a line of steps."""
        text = self.whole(line, *definitions)
        lines = text.split("\n")
        found = [m for m in self.build(text).mistakes if m.name != "name-unused"]
        return [
            (
                m.name,
                lines[m.place.line - 1][m.place.column - 1 : m.place.end_column - 1],
                m.message,
            )
            for m in found
        ]


class RecordingPen:
    """A pen that draws nothing: `calls` are the names and arguments of what was asked."""

    def __init__(self, trap: Trap, senses: Mapping[str, int] | None = None) -> None:
        self.trap = trap
        self.senses = senses or {}
        self.calls: list[tuple[Any, ...]] = []

    def sense_of(self, cloud: str) -> int:
        """The sense given for a cloud, else +1."""
        return self.senses.get(cloud, 1)

    def __getattr__(self, name: str) -> Any:
        def record(*arguments: Any, **named: Any) -> None:
            self.calls.append((name, *arguments, *([named] if named else [])))

        return record


@pytest.fixture(scope="session")
def sandpit(tmp_path_factory: pytest.TempPathFactory) -> Trap:
    """The trap of these tests."""
    path = tmp_path_factory.mktemp("trap") / "sandpit.trap.toml"
    path.write_text(TRAP_TEXT)
    trap, mistakes = read_trap(path, "sandpit.trap.toml")
    assert mistakes == ()
    assert trap is not None
    return trap


@pytest.fixture
def bench(tmp_path: Path, sandpit: Trap) -> Bench:
    """A folder with the trap in it."""
    made = Bench(tmp_path, sandpit)
    made.write("sandpit.trap.toml", TRAP_TEXT)
    return made


@pytest.fixture
def pen(sandpit: Trap) -> RecordingPen:
    """A fresh recording pen."""
    return RecordingPen(sandpit)


@pytest.fixture
def drawn(bench: Bench, pen: RecordingPen) -> Any:
    """A function: the calls that a line of one step makes on the pen."""

    def draw(line: str) -> list[tuple[Any, ...]]:
        pen.calls.clear()
        bench.step(line).draw(pen)
        return list(pen.calls)

    return draw
