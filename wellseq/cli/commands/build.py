"""Check a sequence and, if nothing stands in the way, publish its tables.

The folder is written whole or not at all; an older one that wellseq made is replaced.  With --each
every value of the sequence's `each` becomes a folder of its own, FOLDER-1, FOLDER-2 and so on.
"""

from __future__ import annotations

import argparse
import sys

from wellseq.cli import status
from wellseq.cli.common import (
    add_format,
    add_lets,
    complain,
    lets_of,
    print_report,
    status_of,
)
from wellseq.cli.members import TYPE_CHECKING

if TYPE_CHECKING:
    from wellseq.checks.case import Case

EXAMPLE = "wellseq build evening.well -o evening-tables"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """FILE, -o FOLDER, --each, --each-of, --let, --format, --margins."""
    parser.add_argument("file", metavar="FILE", help="a sequence, NAME.well")
    parser.add_argument(
        "-o", "--output", required=True, metavar="FOLDER", help="the folder to publish"
    )
    parser.add_argument(
        "--each", action="store_true", help="a folder per value of the sequence's `each`"
    )
    parser.add_argument(
        "--each-of", metavar="NAME", help="the same, where a sequence has more than one `each`"
    )
    add_lets(parser)
    add_format(parser)


def run(arguments: argparse.Namespace) -> int:
    """Check, then publish; returns the exit status."""
    from wellseq.emit.examined import examined
    from wellseq.emit.publish import CannotPublish, Miswritten
    from wellseq.pipeline import publish

    cases = _cases(arguments)
    things = [examined(case) for case in cases]
    print_report(things, arguments)
    code = status.worst(status_of(thing) for thing in things)
    if code != status.CLEAR:
        complain("nothing was written")
        return code
    try:
        for folder, case in zip(_folders(arguments, len(cases)), cases, strict=True):
            publish(case, folder)
            _tell(folder, case)
    except CannotPublish as why:
        complain(str(why))
        return status.NO_OUTPUT
    except Miswritten as why:
        complain(f"this is a fault of wellseq itself: {why}; nothing was published")
        return status.OUR_FAULT
    return status.CLEAR


def _cases(arguments: argparse.Namespace) -> list[Case]:
    """The cases to publish: one, or one per value of an `each`.

    What keeps the first value from being drawn keeps all of them, and is told once.
    """
    from wellseq.pipeline import compile_file

    lets = lets_of(arguments)
    if not _alone(arguments):
        return [compile_file(arguments.file, lets=lets)]
    cases: list[Case] = []
    count = 1
    while len(cases) < count:
        number = len(cases) + 1
        each = (arguments.each_of, number) if arguments.each_of else number
        cases.append(compile_file(arguments.file, lets=lets, each=each))
        if cases[0].sequence is not None and cases[0].timeline is not None:
            count = len(cases[0].sequence.each_values)
    return cases


def _alone(arguments: argparse.Namespace) -> bool:
    """Whether every value of an `each` is to be played alone."""
    return arguments.each or arguments.each_of is not None


def _folders(arguments: argparse.Namespace, count: int) -> list[str]:
    folder = arguments.output.rstrip("/") or arguments.output
    if not _alone(arguments):
        return [folder]
    return [f"{folder}-{number + 1}" for number in range(count)]


def _tell(folder: str, case: Case) -> None:
    """One line on standard error: standard output belongs to the findings."""
    blocks = case.shipped.blocks if case.shipped is not None else ()
    rows = sum(len(block.ticks) for block in blocks)
    tables = f"{len(blocks)} table" + ("s" if len(blocks) != 1 else "")
    sys.stderr.write(f"{folder}: written, {tables}, {rows} rows; read cautions.md first\n")
