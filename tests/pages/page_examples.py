"""Pages of the manual → sequence files that can be compiled, each in a folder of its own.

A page has sections under `## ` headings; in them stand examples, fenced as ```well.  An example
that begins with `wellseq 1` is a whole file.  Any other is a piece of a sequence on the page trap;
it gets the clouds that it names, the first of them standing at R6 where the example does not say
how it comes.  A ```toml fence before it is added to the trap file, a ```rules fence before it is a
rules file that the trap names, a ```python fence after it changes the compiled `case`, for what no
sequence can bring about.
"""

from __future__ import annotations

import re
import shutil
from dataclasses import dataclass, field, replace
from pathlib import Path

from wellseq.checks.case import Case
from wellseq.checks.judging import judge
from wellseq.pipeline import compile_file

HERE = Path(__file__).parent
FENCE = re.compile(r"^```(\w+)\n(.*?)^```$", re.MULTILINE | re.DOTALL)
HEADING = re.compile(r"^## (.+)$", re.MULTILINE)
CLOUDS = {
    "pool": "electron { number 1e7 ± 10 %; radius 1 mm; temperature 300 K }",
    "cold": "antiproton { number 1e4 ± 10 %; radius 1 mm; temperature 300 K }",
    "bunch": "antiproton { number 8e4 ± 30 %; energy 1 keV ± 0.3 keV; duration 150 ns }",
    "positrons": "positron { number 2e6 ± 10 %; radius 1 mm; temperature 80 K }",
}
PATTERN = "pattern cradle { C5, C7 = -80 V; R6 = -20 V; others = 0 V }"
COMES = r"\b(begin with|load|catch)\b"


@dataclass(frozen=True)
class Example:
    """One ```well fence and what stands around it."""

    text: str
    trap_more: str = ""
    changes: list[str] = field(default_factory=list)
    rules: str = ""

    def compile(self, folder: Path) -> Case:
        """The judged case of this example, compiled in an empty folder."""
        for name in ("page.trap.toml", "unpatched.trap.toml"):
            trap = (HERE / "page.trap.toml").read_text("utf-8")
            if name.startswith("unpatched"):
                trap = re.sub(r"^patch = .*\n", "", trap, flags=re.MULTILINE)
            if self.rules:
                trap = trap.replace("[site]\n", '[site]\nrules = ["page.rules"]\n')
            (folder / name).write_text(trap + "\n" + self.trap_more, "utf-8")
        if self.rules:
            (folder / "page.rules").write_text(self.rules, "utf-8")
        shutil.copytree(HERE / "common", folder / "common")
        path = folder / "page.well"
        path.write_text(whole(self.text), "utf-8")
        case = compile_file(path)
        for change in self.changes:
            names = {"case": case, "replace": replace}
            exec(change, names)
            case = judge(names["case"])
        return case


def sections(page: str) -> dict[str, str]:
    """The text under each heading, in order."""
    parts = HEADING.split(page)
    return dict(zip(parts[1::2], parts[2::2], strict=True))


def examples(text: str) -> list[Example]:
    """The examples of a section, in order."""
    found: list[Example] = []
    more = rules = ""
    for kind, body in FENCE.findall(text):
        if kind == "toml":
            more = body
        elif kind == "rules":
            rules = body
        elif kind == "well":
            found.append(Example(body, more, [], rules))
            more = rules = ""
        elif kind == "python":
            found[-1].changes.append(body)
    return found


def whole(text: str) -> str:
    """A whole file for an example: as it is, or with the page trap and the clouds it names."""
    if text.startswith("wellseq 1"):
        return text
    named = [cloud for cloud in CLOUDS if re.search(rf"\b{cloud}\b", text)]
    begins = named and not re.search(COMES, text)
    lines = ["wellseq 1", 'trap "page.trap.toml"', ""]
    lines += [f"cloud {cloud} is {CLOUDS[cloud]}" for cloud in named]
    if begins or re.search(r"\bcradle\b", text):
        lines.append(PATTERN)
    lines.append("sequence page {")
    if begins:
        lines.append(f"  begin with {named[0]} in cradle at R6")
    lines += [f"  {line}" for line in text.splitlines()]
    return "\n".join([*lines, "}", ""])
