"""A small trap with the laboratory's own rules → the findings of one check, for tests."""

from __future__ import annotations

from pathlib import Path

from wellseq.pipeline import compile_file

TRAP = Path(__file__).parent.parent / "wells" / "bench.trap.toml"
LAMP = """
[[line]]
name = "lamp"
states = ["off", "on"]
initial = "off"
clock = "1 us"
"""


def found(folder: Path, rules: str, steps: str, check: str, before: str = "") -> list:
    """All findings of one check for a sequence on the bench trap under these rules."""
    text = TRAP.read_text(encoding="utf-8") + LAMP + '\n[site]\nrules = ["our.rules"]\n'
    (folder / "bench.trap.toml").write_text(text, encoding="utf-8")
    (folder / "our.rules").write_text(rules, encoding="utf-8")
    sequence = f'wellseq 1\ntrap "bench.trap.toml"\n{before}\nsequence run {{\n{steps}\n}}\n'
    (folder / "run.well").write_text(sequence, encoding="utf-8")
    case = compile_file(folder / "run.well")
    return [one for one in case.findings if one.name == check]


def verdicts(findings: list) -> list[str]:
    """The verdicts, in order."""
    return [one.verdict.value for one in findings]
