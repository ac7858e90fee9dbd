"""What several commands share: options for findings and for `let`, and printing of reports."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Sequence

from wellseq.cli import status
from wellseq.cli.members import TYPE_CHECKING, names_in
from wellseq.cli.terminal import colour_here, width_here

if TYPE_CHECKING:
    from wellseq.emit.examined import Examined


def add_format(parser: argparse.ArgumentParser) -> None:
    """`--format` and `--margins`."""
    # The forms are read off the folder: importing them would load numpy for a mere --help.
    names = names_in("emit", "reports")
    parser.add_argument(
        "--format", choices=names, default="text", help="how findings are written (text)"
    )
    parser.add_argument(
        "--margins",
        action="store_true",
        help="also show what passes, the nearest to its limit first",
    )


def add_lets(parser: argparse.ArgumentParser) -> None:
    """`--let NAME=VALUE`, any number of times."""
    parser.add_argument(
        "--let",
        action="append",
        default=[],
        type=_let,
        metavar="NAME=VALUE",
        help="another value for a `let` of the file, for example 'wall=80 V'",
    )


def lets_of(arguments: argparse.Namespace) -> dict[str, str]:
    """The values given by `--let`; the last one of a name counts."""
    return dict(arguments.let)


def _let(text: str) -> tuple[str, str]:
    name, sign, value = text.partition("=")
    if not sign or not name.strip() or not value.strip():
        raise argparse.ArgumentTypeError(f"'{text}' is not NAME=VALUE")
    return name.strip(), value.strip()


def standard_input(names: Sequence[str], called: str | None) -> bytes | None:
    """What stands on standard input, where `-` is among the names; None where it is not.

    Raises UsageError when it has no name, or is asked for twice.
    """
    if "-" not in names:
        return None
    if not called:
        raise UsageError(
            "a text from standard input needs a name, which says where its trap is: --as"
        )
    if list(names).count("-") > 1:
        raise UsageError("standard input can be read once only")
    return sys.stdin.buffer.read()


class UsageError(Exception):
    """The words of a call do not go together; the sentence says why."""


def add_as(parser: argparse.ArgumentParser) -> None:
    """`--as NAME`, the name of what comes from standard input."""
    parser.add_argument(
        "--as",
        dest="called",
        metavar="NAME",
        help="the file that standard input (FILE `-`) stands for, for its trap and in findings",
    )


def print_report(things: Sequence[Examined], arguments: argparse.Namespace) -> None:
    """Write the findings in the form that was asked for to standard output."""
    from wellseq.emit.formats import Options, report

    options = Options(colour_here(), arguments.margins, width_here())
    sys.stdout.write(report(arguments.format, things, options))


def status_of(thing: Examined) -> int:
    """The exit status that one examined file comes to."""
    if thing.clear or thing.settled:
        return status.CLEAR
    blocking = [finding for finding in thing.findings if finding.blocks and not finding.known]
    if any(finding.name in ("unreadable-file", "folder-unreadable") for finding in blocking):
        return status.NO_INPUT
    if any(
        finding.place.file.endswith((".toml", ".rules")) or finding.name == "known-unreadable"
        for finding in blocking
    ):
        return status.WRONG_TRAP
    return status.FINDINGS


def complain(sentence: str) -> None:
    """One sentence on standard error."""
    sys.stderr.write(f"wellseq: {sentence}\n")
