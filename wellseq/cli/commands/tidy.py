"""Bring sequences into the one layout.

A file is rewritten only when the rewrite is proved to be harmless: laid out again it is the same,
it says the same, its comments are all there, and its table has the same hash.  Files with mistakes
are left alone.
"""

from __future__ import annotations

import argparse
import sys

from wellseq.cli import status
from wellseq.cli.common import UsageError, add_as, complain, standard_input
from wellseq.cli.members import TYPE_CHECKING
from wellseq.cli.progress import Progress

if TYPE_CHECKING:
    from wellseq.review.tidying import Tidied

EXAMPLE = "wellseq tidy --check sequences"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """FILE…, --check, --diff, --as."""
    parser.add_argument(
        "file",
        nargs="+",
        metavar="FILE",
        help="a sequence, a folder, or - for standard input, which goes to standard output",
    )
    parser.add_argument(
        "--check", action="store_true", help="write nothing; say which files would change"
    )
    parser.add_argument("--diff", action="store_true", help="write nothing; show what would change")
    add_as(parser)


def run(arguments: argparse.Namespace) -> int:
    """Lay out every file; returns the exit status."""
    from pathlib import Path

    from wellseq.review.tidying import files_of, tidied

    content = standard_input(arguments.file, arguments.called)
    if content is not None and len(arguments.file) > 1:
        raise UsageError("standard input is laid out alone")
    if content is not None:
        return _through(tidied(Path(arguments.called), arguments.called, content), arguments)
    files = list(files_of(arguments.file))
    if not files:
        complain("no sequence stands in these folders")
        return status.NO_INPUT
    progress = Progress("laid out")
    codes = []
    for number, file in enumerate(files, start=1):
        codes.append(_one(tidied(Path(file), file), arguments))
        progress.tell(number, len(files))
    progress.end()
    return status.worst(codes)


def _one(one: Tidied, arguments: argparse.Namespace) -> int:
    from pathlib import Path

    from wellseq.review.tidying import difference
    from wellseq.review.writing import CannotWrite, replace_file

    if one.refused:
        return _refuse(one)
    if not one.changed:
        return status.CLEAR
    if arguments.diff:
        sys.stdout.write(difference(one))
    if arguments.check:
        sys.stdout.write(f"{one.shown}: would change\n")
    if arguments.check or arguments.diff:
        return status.FINDINGS
    try:
        replace_file(Path(one.shown), one.after.encode())
    except CannotWrite as why:
        complain(str(why))
        return status.NO_OUTPUT
    sys.stdout.write(f"{one.shown}: laid out\n")
    return status.CLEAR


def _through(one: Tidied, arguments: argparse.Namespace) -> int:
    """Standard input to standard output; with a doubt nothing comes out."""
    from wellseq.review.tidying import difference

    if one.refused:
        return _refuse(one)
    if arguments.diff:
        sys.stdout.write(difference(one))
    if arguments.check and one.changed:
        sys.stdout.write(f"{one.shown}: would change\n")
    if arguments.check or arguments.diff:
        return status.FINDINGS if one.changed else status.CLEAR
    sys.stdout.flush()
    # As bytes: the text keeps its own line ends.
    sys.stdout.buffer.write(one.after.encode())
    return status.CLEAR


def _refuse(one: Tidied) -> int:
    complain(f"{one.shown}: {one.refused}")
    return status.FINDINGS if one.readable else status.NO_INPUT
