"""Examples of the manual → files on the page trap, their marks, and what the compiler finds.

An example is fenced as ```well, or as ```well refused where its lines bear `# expect: NAME` marks.
One that begins with `wellseq 1` is a whole file.  Any other gets a beginning: definitions stand
before the sequence, steps inside one, with the clouds and the pattern of the page trap that they
name; definitions alone make a file for others to use.
"""

from __future__ import annotations

import re
import shutil
from dataclasses import dataclass
from pathlib import Path

from page_examples import CLOUDS, COMES, HERE, PATTERN

from wellseq.base.finding import Finding
from wellseq.checks.judging import clear
from wellseq.pipeline import compile_file

FENCE = re.compile(r"^```well( refused)?\n(.*?)^```$", re.MULTILINE | re.DOTALL)
MARK = re.compile(r"#\s*expect:\s*(.+)$")
DEFINES = re.compile(r"(use|let|cloud|pattern|procedure|sequence)\b")
Marks = set[tuple[int, str]]
"""Line of the page, name of the finding."""


@dataclass(frozen=True)
class Example:
    """One fence: its text, the line of the page on which it begins, whether it is refused."""

    text: str
    line: int
    refused: bool

    @property
    def marks(self) -> Marks:
        """What the marks promise."""
        return {
            (number, name.strip())
            for number, line in enumerate(self.text.splitlines(), start=self.line)
            if (mark := MARK.search(line))
            for name in mark[1].split(",")
        }


def examples(page: str) -> list[Example]:
    """All examples of a page, in order."""
    return [
        Example(match[2], page.count("\n", 0, match.start(2)) + 1, match[1] is not None)
        for match in FENCE.finditer(page)
    ]


def faults(example: Example, folder: Path) -> list[str]:
    """What an example does otherwise than it says, in words; compiled in an empty folder."""
    found, complete = _found(example, folder)
    names = {(line, one.name) for line, one in found}
    words = [f"line {line}: no {name}" for line, name in sorted(example.marks - names)]
    words += [
        f"line {line}: {one.name}: {one.message}"
        for line, one in found
        if (line, one.name) not in example.marks
    ]
    if example.refused is not bool(example.marks):
        words.append(f"line {example.line}: marks stand in refused examples and only there")
    if not (example.refused or complete):
        words.append(f"line {example.line}: not everything was examined")
    return words


def _found(example: Example, folder: Path) -> tuple[list[tuple[int, Finding]], bool]:
    """Blocking findings with their lines of the page (0 outside), and whether all was examined."""
    shutil.copy(HERE / "page.trap.toml", folder)
    shutil.copytree(HERE / "common", folder / "common")
    lines = _whole(example)
    path = folder / "example.well"
    path.write_text("".join(f"{text}\n" for _, text in lines), "utf-8")
    case = compile_file(path)
    place = {number: line for number, (line, _) in enumerate(lines, start=1)}
    found = [(place.get(one.place.line, 0), one) for one in case.findings if one.blocks]
    return found, case.sequence is None or clear(case) is not None


def _whole(example: Example) -> list[tuple[int, str]]:
    """The lines of a whole file, each with its line of the page, 0 for one that was added."""
    numbered = list(enumerate(example.text.splitlines(), start=example.line))
    if example.text.startswith("wellseq 1"):
        return numbered
    outside, inside = _sorted(numbered)
    start = ["wellseq 1", 'trap "page.trap.toml"']
    if not inside and "sequence " not in example.text:
        return [*((0, text) for text in start), *outside]
    text = example.text
    named = [one for one in CLOUDS if re.search(rf"\b{one}\b", text)]
    start += [f"cloud {one} is {CLOUDS[one]}" for one in named if f"cloud {one} " not in text]
    begins = bool(inside and named and not re.search(COMES, text))
    cradle = begins or re.search(r"\bcradle\b", text)
    if cradle and "pattern cradle" not in text:
        start.append(PATTERN)
    whole = [*((0, line) for line in start), *outside]
    if inside:
        opening = ["sequence page {"]
        opening += [f"begin with {named[0]} in cradle at R6"] if begins else []
        whole += [*((0, line) for line in opening), *inside, (0, "}")]
    return whole


def _sorted(
    numbered: list[tuple[int, str]],
) -> tuple[list[tuple[int, str]], list[tuple[int, str]]]:
    """Lines of definitions, with their blocks, and lines of steps."""
    outside: list[tuple[int, str]] = []
    inside: list[tuple[int, str]] = []
    depth, here = 0, inside
    for number, line in numbered:
        if depth == 0 and line.strip() and not line.startswith(" "):
            here = outside if DEFINES.match(line) else inside
        here.append((number, line))
        code = line.partition("#")[0]
        depth += code.count("{") - code.count("}")
    return outside, [line for line in inside if any(text.strip() for _, text in inside)]
