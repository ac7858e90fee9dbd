"""Read published folders back, every byte, and judge them.

The reader shares no code with the writer.  It says that a folder is as it was written and within
the limits it carries; it cannot say that nobody forged it.  What it examined is said on standard
error.
"""

from __future__ import annotations

import argparse
import sys

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
    from wellseq.pipeline import examine
    from wellseq.reread.folder import CHECKS

    readings = [examine(folder) for folder in arguments.folder]
    things = [
        Examined(folder, reading.findings, CHECKS)
        for folder, reading in zip(arguments.folder, readings, strict=True)
    ]
    print_report(things, arguments)
    sys.stdout.flush()
    for folder, reading in zip(arguments.folder, readings, strict=True):
        if reading.meaning is not None:
            sys.stderr.write(f"{folder}: {reading.examined}\n")
    return status.worst(status_of(thing) for thing in things)
