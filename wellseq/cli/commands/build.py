"""Check a sequence and, if nothing stands in the way, publish its tables.

The folder is written whole or not at all; an older one that wellseq made is replaced.  With --each
every value of the sequence's `each` becomes a folder of its own, FOLDER-1, FOLDER-2 and so on.
With --draft tables are written whatever was found, to FOLDER-draft, which says that it is a draft
and which verify refuses.
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
from wellseq.cli.members import TYPE_CHECKING, names_in

if TYPE_CHECKING:
    from wellseq.checks.case import Case

EXAMPLE = "wellseq build evening.well -o evening-tables --also npz,hdf5"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """FILE, -o FOLDER, --also, --draft, --each, --each-of, --let, --format, --margins."""
    parser.add_argument("file", metavar="FILE", help="a sequence, NAME.well")
    parser.add_argument(
        "-o", "--output", required=True, metavar="FOLDER", help="the folder to publish"
    )
    parser.add_argument(
        "--also",
        default=(),
        type=_forms,
        metavar="FORM,…",
        help=f"further forms of every table: {', '.join(names_in('emit', 'also'))}",
    )
    parser.add_argument(
        "--draft", action="store_true", help="write tables with findings, marked as a draft"
    )
    parser.add_argument(
        "--each", action="store_true", help="a folder per value of the sequence's `each`"
    )
    parser.add_argument(
        "--each-of", metavar="NAME", help="the same, where a sequence has more than one `each`"
    )
    add_lets(parser)
    add_format(parser)


def _forms(text: str) -> tuple[str, ...]:
    known = names_in("emit", "also")
    forms = tuple(sorted({form.strip() for form in text.split(",")}))
    for form in forms:
        if form not in known:
            raise argparse.ArgumentTypeError(f"'{form}' is none of {', '.join(known)}")
    return forms


def run(arguments: argparse.Namespace) -> int:
    """Check, then publish; returns the exit status."""
    from wellseq.emit.examined import examined
    from wellseq.emit.publish import CannotPublish, Miswritten

    cases = _cases(arguments)
    things = [examined(case) for case in cases]
    print_report(things, arguments)
    code = status.worst(status_of(thing) for thing in things)
    if code != status.CLEAR and not arguments.draft:
        complain("nothing was written")
        return code
    try:
        for folder, case in zip(_folders(arguments, len(cases)), cases, strict=True):
            _publish(folder, case, arguments)
    except CannotPublish as why:
        complain(str(why))
        return status.NO_OUTPUT
    except Miswritten as why:
        complain(f"this is a fault of wellseq itself: {why}; nothing was published")
        return status.OUR_FAULT
    return code


def _publish(folder: str, case: Case, arguments: argparse.Namespace) -> None:
    from wellseq.pipeline import publish, publish_draft

    if not arguments.draft:
        publish(case, folder, arguments.also)
        _tell(folder, case, "read cautions.md first")
        return
    named = publish_draft(case, folder, arguments.also)
    if named is None:
        complain(f"{folder}: there are no tables to draft")
    else:
        _tell(str(named), case, "a DRAFT, not to be played")


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


def _tell(folder: str, case: Case, last: str) -> None:
    """Two lines on standard error: standard output belongs to the findings."""
    blocks = case.shipped.blocks if case.shipped is not None else ()
    rows = sum(len(block.ticks) for block in blocks)
    tables = f"{len(blocks)} table" + ("s" if len(blocks) != 1 else "")
    sys.stderr.write(f"{folder}: written, {tables}, {rows} rows; {last}\n")
