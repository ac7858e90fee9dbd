"""Explain a step, a statement, a clause, a unit, a finding or an interlock rule.

The pages are those of the manual; what is known about a unit or a clause comes from the program.
The rules of a laboratory are found through --trap, which names the trap file that names them.
Without a name, every name that can be explained is listed.
"""

from __future__ import annotations

import argparse
import sys

from wellseq.cli import status
from wellseq.cli.common import complain
from wellseq.cli.members import TYPE_CHECKING
from wellseq.cli.rule_pages import NoTrap, page, rules_known

if TYPE_CHECKING:
    from pathlib import Path

EXAMPLE = "wellseq explain evaporate well-too-shallow V/us"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """NAME…, --trap."""
    parser.add_argument(
        "name", nargs="*", metavar="NAME", help="a step, clause, unit, finding or rule"
    )
    parser.add_argument("--trap", metavar="TRAP", help="the trap file whose rules are known too")


def run(arguments: argparse.Namespace) -> int:
    """Print what is known about every name; returns the exit status."""
    try:
        rules = rules_known(arguments.trap)
    except NoTrap as why:
        complain(str(why))
        return status.WRONG_TRAP
    if not arguments.name:
        names = known_names() | set(rules)
        sys.stdout.write("".join(f"{name}\n" for name in sorted(names)))
        return status.CLEAR
    more = "" if arguments.trap else "; the rules of a laboratory are known with --trap"
    codes = []
    for number, name in enumerate(arguments.name):
        text = explanation(name)
        if name in rules:
            text = page(*rules[name]) + (f"\n\n{text}" if text else "")
        if text is None:
            complain(f"'{name}' is not known; {_near(name, set(rules))}{more}")
            codes.append(status.USAGE)
        else:
            sys.stdout.write(("\n" if number else "") + text.strip("\n") + "\n")
            codes.append(status.CLEAR)
    return status.USAGE if status.USAGE in codes else status.CLEAR


def explanation(name: str) -> str | None:
    """Everything known about a name as text, None when nothing is."""
    parts = [page.read_text("utf-8") for key, page in pages() if key == name]
    parts += [text for text in (_statement(name), _clause(name), _unit(name)) if text]
    return "\n\n".join(part.strip("\n") for part in parts) if parts else None


def pages() -> list[tuple[str, Path]]:
    """(name, file) of every page: steps, checks, and what verify can find."""
    from wellseq.base.data import data_folder

    folders = (
        data_folder("grammar") / "steps",
        data_folder("safety") / "checks",
        data_folder("safety") / "verify",
        data_folder("safety") / "reports",
    )
    return [(page.stem, page) for folder in folders for page in sorted(folder.glob("*.md"))]


def _statement(name: str) -> str:
    """How a statement that is no step is written."""
    from wellseq.model.headers import EXAMPLES, OUTSIDE

    if name not in EXAMPLES:
        return ""
    where = "stands outside a sequence" if name in OUTSIDE else "stands among steps"
    return f"`{name}` {where} and is written: {EXAMPLES[name]}"


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


def known_names() -> set[str]:
    """Every name that can be explained; quotients of units can be as well."""
    from wellseq.base.names import RESERVED
    from wellseq.base.quantity import UNITS
    from wellseq.model.headers import EXAMPLES
    from wellseq.model.reader import signature
    from wellseq.model.steps import step_class, verbs

    kinds = [kind for verb in verbs() if (kind := step_class(verb)) is not None]
    words = {word for kind in kinds for word in signature(kind).words}
    return {key for key, _ in pages()} | RESERVED | set(UNITS) | set(EXAMPLES) | words


def _near(name: str, rules: set[str]) -> str:
    from wellseq.base.names import nearest

    return nearest(name, known_names() | rules, "known names")
