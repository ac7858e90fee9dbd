"""Write the script that completes wellseq's words in a shell.

For bash: wellseq complete bash > ~/.local/share/bash-completion/completions/wellseq
"""

from __future__ import annotations

import argparse
import sys

from wellseq.cli import status
from wellseq.cli.completion import SHELLS

EXAMPLE = "wellseq complete bash"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """SHELL."""
    parser.add_argument("shell", choices=SHELLS, metavar="SHELL", help=", ".join(SHELLS))


def run(arguments: argparse.Namespace) -> int:
    """Write the script; returns the exit status."""
    from wellseq.cli.commands.explain import known_names
    from wellseq.cli.completion import command_of, script
    from wellseq.cli.main import Parser, command, command_names

    commands = []
    for name in command_names():
        module = command(name)
        says = (module.__doc__ or "").splitlines()[0]
        parser = Parser(prog=f"wellseq {name}", description=says)
        module.add_arguments(parser)
        words = tuple(sorted(known_names())) if name == "explain" else ()
        commands.append(command_of(name, parser, words))
    sys.stdout.write(script(arguments.shell, commands))
    return status.CLEAR
