"""argv → exit status: finds the command, runs it, and turns every failure into one sentence.

Nothing heavy is imported here, nor by a command before it runs, so that `--help` answers at once.
"""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Sequence
from importlib import import_module

from wellseq.cli import status
from wellseq.cli.common import UsageError
from wellseq.cli.members import TYPE_CHECKING, names_in
from wellseq.cli.terminal import prepare
from wellseq.version import __version__

if TYPE_CHECKING:
    from types import ModuleType
    from typing import NoReturn

DESCRIPTION = "Compile a sequence for the electrodes of a Penning-Malmberg trap, or say why not."
EPILOGUE = """\
exit status: 0 everything was examined and passes; 1 findings; 64 usage; 66 input missing or
unreadable; 70 a fault of wellseq; 73 output cannot be written; 78 the trap file or a rules file is
wrong.

example: wellseq check evening.well"""


class Parser(argparse.ArgumentParser):
    """argparse with the exit status 64 for wrong usage and no guessing at cut-off options."""

    def __init__(self, **arguments: object) -> None:
        super().__init__(
            allow_abbrev=False,
            formatter_class=argparse.RawDescriptionHelpFormatter,
            **arguments,  # type: ignore[arg-type]
        )

    def error(self, message: str) -> NoReturn:
        """Say what is wrong with the words of a call, and end with the status for that."""
        self.print_usage(sys.stderr)
        self.exit(status.USAGE, f"wellseq: {message}\n")


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command; returns the exit status and never lets an exception out.

    With WELLSEQ_DEBUG=1 a fault of wellseq shows its traceback.
    """
    prepare(sys.stdout)
    prepare(sys.stderr)
    try:
        code = _run(argv)
        sys.stdout.flush()
        return code
    except SystemExit as leaving:
        return leaving.code if isinstance(leaving.code, int) else status.CLEAR
    except KeyboardInterrupt:
        return status.INTERRUPTED
    except UsageError as why:
        sys.stderr.write(f"wellseq: {why}\n")
        return status.USAGE
    except OSError as error:
        if error.filename is not None:
            return _our_fault(error)
        return _no_output(error)
    except Exception as error:
        return _our_fault(error)


def _run(argv: Sequence[str] | None) -> int:
    given = sys.argv[1:] if argv is None else list(argv)
    arguments = parser(given[0] if given else "").parse_args(given)
    code: int = arguments.run(arguments)
    return code


def parser(first: str) -> Parser:
    """The command line as far as it is needed when `first` is its first word.

    Each command adds its own arguments; where one is named, the others are not even imported.
    """
    whole = Parser(prog="wellseq", description=DESCRIPTION, epilog=EPILOGUE)
    whole.add_argument("--version", action="version", version=f"wellseq {__version__}")
    commands = whole.add_subparsers(
        title="commands", metavar="COMMAND", required=True, prog="wellseq"
    )
    names = command_names()
    for name in (first,) if first in names else names if first != "--version" else ():
        module = command(name)
        says = (module.__doc__ or "").splitlines()[0]
        one = commands.add_parser(
            name, help=says, description=says, epilog=f"example: {module.EXAMPLE}"
        )
        if name == first:
            module.add_arguments(one)
            one.set_defaults(run=module.run)
    return whole


def command_names() -> tuple[str, ...]:
    """The names of all commands, in alphabetical order."""
    return names_in("cli", "commands")


def command(name: str) -> ModuleType:
    """The module of a command: EXAMPLE, add_arguments(parser), run(arguments) -> exit status."""
    return import_module(f"wellseq.cli.commands.{name}")


def _no_output(error: OSError) -> int:
    """Standard output is gone or full: nothing more can be said on it."""
    # What is still buffered would fail again when the interpreter ends.
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    if not isinstance(error, BrokenPipeError):
        reason = (error.strerror or "it is not there").lower()
        sys.stderr.write(f"wellseq: standard output cannot be written: {reason}\n")
    return status.NO_OUTPUT


def _our_fault(error: Exception) -> int:
    if os.environ.get("WELLSEQ_DEBUG") == "1":
        import traceback

        traceback.print_exc()
    sys.stderr.write(
        f"wellseq: this is a fault of wellseq itself ({type(error).__name__}: {_one_line(error)}); "
        "please report it with the files that led to it. WELLSEQ_DEBUG=1 shows where it happened.\n"
    )
    return status.OUR_FAULT


def _one_line(error: Exception) -> str:
    return " ".join(str(error).split())[:200]


if __name__ == "__main__":
    sys.exit(main())
