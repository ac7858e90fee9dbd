"""Read published folders back, every byte, and judge them.

The reader shares no code with the writer.  It says that a folder is as it was written and within
the limits it carries; it cannot say that nobody forged it.
"""

from __future__ import annotations

import argparse

from wellseq.cli import status
from wellseq.cli.common import add_format, print_report, status_of

EXAMPLE = "wellseq verify evening-tables"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """FOLDER…, --format, --margins."""
    parser.add_argument("folder", nargs="+", metavar="FOLDER", help="a folder made by build")
    add_format(parser)


def run(arguments: argparse.Namespace) -> int:
    """Verify every folder; returns the exit status."""
    from wellseq.emit.examined import Examined
    from wellseq.pipeline import verify
    from wellseq.reread.folder import CHECKS

    things = [Examined(folder, verify(folder), CHECKS) for folder in arguments.folder]
    print_report(things, arguments)
    return status.worst(status_of(thing) for thing in things)
