"""Say everything that stands between sequences and their tables.

No table is written.  Several files and folders are all checked, in order; a folder stands for every
sequence below it.  The worst file decides the exit status.  With --known, findings that a reviewer
has accepted are listed and no longer decide it; they still keep their tables from being built.
"""

from __future__ import annotations

import argparse
import os
import re
import sys

from wellseq.cli import status
from wellseq.cli.common import (
    UsageError,
    add_as,
    add_format,
    add_lets,
    complain,
    lets_of,
    print_report,
    standard_input,
    status_of,
)
from wellseq.cli.members import TYPE_CHECKING
from wellseq.cli.progress import Progress

if TYPE_CHECKING:
    from wellseq.emit.examined import Examined

EXAMPLE = "wellseq check evening.well --margins --let 'wall=80 V'"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """FILE…, --as, --known with --accept and --on, --changed-since, --at-once, --let, --format."""
    parser.add_argument(
        "file", nargs="+", metavar="FILE", help="a sequence, a folder, or - for standard input"
    )
    add_as(parser)
    parser.add_argument(
        "--known", metavar="LIST", help="a list of findings that a reviewer has accepted"
    )
    parser.add_argument(
        "--accept", metavar="REASON", help="write what is found into the list, with this reason"
    )
    parser.add_argument("--on", metavar="DATE", help="the day of the reason, as 2026-05-12")
    parser.add_argument(
        "--changed-since",
        metavar="REVISION",
        help="leave out what a git revision had already; files are judged as a whole",
    )
    parser.add_argument(
        "--at-once",
        type=int,
        default=0,
        metavar="N",
        help="how many files are checked at a time (as many as there are processors)",
    )
    add_lets(parser)
    add_format(parser)


def run(arguments: argparse.Namespace) -> int:
    """Check every file; returns the exit status."""
    _agree(arguments)
    content = standard_input(arguments.file, arguments.called)
    things = _examined(arguments, content)
    if arguments.accept is not None:
        return _accept(things, arguments)
    if arguments.known is not None:
        from pathlib import Path

        from wellseq.review.known import accept, read_known

        things = accept(things, read_known(Path(arguments.known)))
    print_report(things, arguments)
    return status.worst(status_of(thing) for thing in things)


def _agree(arguments: argparse.Namespace) -> None:
    """Refuse options that do not go together."""
    if (arguments.accept is None) != (arguments.on is None):
        raise UsageError("--accept REASON and --on DATE go together")
    if arguments.accept is None:
        return
    if arguments.known is None:
        raise UsageError("--accept needs the list to write to: --known LIST")
    if arguments.changed_since is not None:
        raise UsageError("--accept takes everything that is found, so not with --changed-since")
    if not arguments.accept.strip():
        raise UsageError("an accepted finding needs a reason")
    from wellseq.review.known import DATE

    if not re.fullmatch(DATE, arguments.on):
        raise UsageError(f"'{arguments.on}' is no day; write it as 2026-05-12")


def _examined(arguments: argparse.Namespace, content: bytes | None) -> list[Examined]:
    from wellseq.review.many import asked, examine_all

    wanted = asked(
        arguments.file,
        lets_of(arguments),
        given=(arguments.called, content) if content is not None else None,
        since=arguments.changed_since or "",
    )
    progress = Progress("checked")
    try:
        return examine_all(wanted, arguments.at_once or os.cpu_count() or 1, progress.tell)
    finally:
        progress.end()


def _accept(things: list[Examined], arguments: argparse.Namespace) -> int:
    """Write the list; what kept a file from being examined is never accepted."""
    from pathlib import Path

    from wellseq.review.known import accept, listed, read_known
    from wellseq.review.writing import CannotWrite, replace_file

    path = Path(arguments.known)
    known = read_known(path, may_lack=True)
    if known.wrong:
        print_report(accept([], known), arguments)
        return status.WRONG_TRAP
    text, added, gone = listed(things, known, arguments.accept, arguments.on)
    try:
        replace_file(path, text.encode())
    except CannotWrite as why:
        complain(str(why))
        return status.NO_OUTPUT
    sys.stderr.write(f"{path}: {added} accepted, {gone} taken off\n")
    unseen = [thing.shown for thing in things if thing.cause]
    for shown in unseen:
        complain(f"{shown} was not examined wholly; what is hidden by its mistakes is not accepted")
    return status.FINDINGS if unseen else status.CLEAR
