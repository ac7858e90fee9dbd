"""Draw a trap file in text, with what each of its parts can do."""

from __future__ import annotations

import argparse
import sys

from wellseq.cli import status
from wellseq.cli.common import complain
from wellseq.cli.terminal import width_here

EXAMPLE = "wellseq show saltmarsh.trap.toml"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """TRAP…"""
    parser.add_argument("trap", nargs="+", metavar="TRAP", help="a trap file, NAME.trap.toml")


def run(arguments: argparse.Namespace) -> int:
    """Draw every trap; returns the exit status."""
    from wellseq.emit.stack import drawing
    from wellseq.pipeline import TrapMistakes, load_trap

    codes = []
    for number, file in enumerate(arguments.trap):
        try:
            trap = load_trap(file)
        except TrapMistakes as wrong:
            for one in wrong.mistakes:
                hint = f" ({one.hint})" if one.hint else ""
                complain(f"{one.place}: {one.message}{hint} [{one.name}]")
            unreadable = any(one.name == "unreadable-file" for one in wrong.mistakes)
            codes.append(status.NO_INPUT if unreadable else status.WRONG_TRAP)
            continue
        sys.stdout.write(("\n" if number else "") + drawing(trap, width_here()))
        codes.append(status.CLEAR)
    return status.worst(codes)
