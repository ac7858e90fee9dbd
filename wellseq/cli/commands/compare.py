"""Say what changed physically from one sequence to another.

OLD and NEW are sequences, published folders, folders of sequences, or REVISION:PATH in git.  What
only moved is not shown.  The exit status is 1 when something got worse beyond the tolerance.
"""

from __future__ import annotations

import argparse
import sys

from wellseq.cli import status
from wellseq.cli.common import add_lets, complain, lets_of
from wellseq.cli.members import names_in

EXAMPLE = "wellseq compare HEAD:evening.well evening.well --format markdown"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """OLD NEW, --tolerance, --format, --let."""
    parser.add_argument("old", metavar="OLD", help="a sequence, a folder, or REVISION:PATH")
    parser.add_argument("new", metavar="NEW", help="the same, as it is now")
    parser.add_argument(
        "--tolerance",
        type=_share,
        default=0.01,
        metavar="SHARE",
        help="how much worse a figure may be than before, for example 5%% (1%%)",
    )
    parser.add_argument(
        "--format",
        choices=names_in("review", "forms"),
        default="text",
        help="how the comparison is written (text)",
    )
    add_lets(parser)


def run(arguments: argparse.Namespace) -> int:
    """Compare two sides; returns the exit status."""
    from wellseq.review.comparing import compare
    from wellseq.review.sides import NoSide, side
    from wellseq.review.telling import report

    try:
        old, new = (side(one, lets_of(arguments)) for one in (arguments.old, arguments.new))
    except NoSide as why:
        complain(str(why))
        return status.NO_INPUT
    if old.single != new.single:
        complain(f"{old.shown} and {new.shown} cannot be compared: one is a sequence, one several")
        return status.USAGE
    names = sorted({*old.pictures, *new.pictures})
    comparisons = [
        compare(name, old.pictures.get(name), new.pictures.get(name), arguments.tolerance)
        for name in names
    ]
    sys.stdout.write(report(arguments.format, comparisons, (old.shown, new.shown)))
    unreadable = any(
        finding.name in ("unreadable-file", "folder-unreadable")
        for one in comparisons
        for picture in (one.old, one.new)
        if picture is not None
        for finding in picture.thing.findings
    )
    if unreadable:
        return status.NO_INPUT
    return status.FINDINGS if any(one.worse for one in comparisons) else status.CLEAR


def _share(text: str) -> float:
    number = text.strip().removesuffix("%")
    try:
        share = float(number) / (100 if number != text.strip() else 1)
    except ValueError:
        share = -1.0
    if not 0 <= share < 1e6:
        raise argparse.ArgumentTypeError(f"'{text}' is no share such as 5%")
    return share
