"""Explain a step, a clause, a unit or a finding.

The pages are those of the manual; what is known about a unit or a clause comes from the program.
"""

from __future__ import annotations

import argparse
import sys

from wellseq.cli import status
from wellseq.cli.common import complain
from wellseq.cli.members import TYPE_CHECKING

if TYPE_CHECKING:
    from pathlib import Path

EXAMPLE = "wellseq explain evaporate well-too-shallow V/us"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """NAME…"""
    parser.add_argument("name", nargs="+", metavar="NAME", help="a step, clause, unit or finding")


def run(arguments: argparse.Namespace) -> int:
    """Print what is known about every name; returns the exit status."""
    codes = []
    for number, name in enumerate(arguments.name):
        text = explanation(name)
        if text is None:
            complain(f"'{name}' is not known; {_near(name)}")
            codes.append(status.USAGE)
        else:
            sys.stdout.write(("\n" if number else "") + text.strip("\n") + "\n")
            codes.append(status.CLEAR)
    return status.USAGE if status.USAGE in codes else status.CLEAR


def explanation(name: str) -> str | None:
    """Everything known about a name as text, None when nothing is."""
    parts = [page.read_text("utf-8") for key, page in pages() if key == name]
    parts += [text for text in (_clause(name), _unit(name)) if text]
    return "\n\n".join(part.strip("\n") for part in parts) if parts else None


def pages() -> list[tuple[str, Path]]:
    """(name, file) of every page: steps, checks, and what verify can find."""
    from wellseq.base.data import data_folder

    folders = (
        data_folder("grammar") / "steps",
        data_folder("safety") / "checks",
        data_folder("safety") / "verify",
    )
    return [(page.stem, page) for folder in folders for page in sorted(folder.glob("*.md"))]


def _clause(name: str) -> str:
    """Which steps take a clause or a bare word of this name, and what stands after it."""
    from wellseq.base.names import RESERVED
    from wellseq.model.reader import signature
    from wellseq.model.steps import step_class, verbs

    found = []
    for verb in verbs():
        kind = step_class(verb)
        if kind is not None and name in {**signature(kind).clauses, **signature(kind).words}:
            found.append(f"  {' '.join((kind.__doc__ or '').split(chr(10) * 2)[0].split())}")
    if found:
        return f"`{name}` is a word of these steps:\n" + "\n".join(found)
    return f"`{name}` is a word of the language; no name may be one." if name in RESERVED else ""


def _unit(name: str) -> str:
    """What a unit word is in base units."""
    from wellseq.base.quantity import QuantityError, kind_name, unit_of

    try:
        factor, kind = unit_of(name)
    except QuantityError:
        return ""
    if not name:
        return ""
    return f"`{name}` is a unit: 1 {name} = {float(factor):g} {kind_name(kind)}"


def _near(name: str) -> str:
    from wellseq.base.names import RESERVED, nearest
    from wellseq.base.quantity import UNITS
    from wellseq.model.steps import verbs

    known = {key for key, _ in pages()} | RESERVED | set(UNITS) | set(verbs())
    return nearest(name, known, "known names")
