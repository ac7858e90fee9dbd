"""Say everything that stands between sequences and their tables.

Nothing is written.  Several files are all checked; the worst decides the exit status.
"""

from __future__ import annotations

import argparse

from wellseq.cli import status
from wellseq.cli.common import add_format, add_lets, lets_of, print_report, status_of

EXAMPLE = "wellseq check evening.well --margins --let 'wall=80 V'"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """FILE…, --let, --format, --margins."""
    parser.add_argument("file", nargs="+", metavar="FILE", help="a sequence, NAME.well")
    add_lets(parser)
    add_format(parser)


def run(arguments: argparse.Namespace) -> int:
    """Check every file; returns the exit status."""
    from wellseq.emit.examined import examined
    from wellseq.pipeline import compile_file

    lets = lets_of(arguments)
    things = [examined(compile_file(file, lets=lets)) for file in arguments.file]
    print_report(things, arguments)
    return status.worst(status_of(thing) for thing in things)
