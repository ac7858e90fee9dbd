"""Write a small trap file and sequence to start from.

Both check and build as they are, to be changed into your own.
Files that are there already are left alone, and then nothing is written.
"""

from __future__ import annotations

import argparse
import os
import sys

from wellseq.cli import status
from wellseq.cli.common import complain
from wellseq.cli.members import TYPE_CHECKING

if TYPE_CHECKING:
    from pathlib import Path

EXAMPLE = "wellseq new mybench"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """FOLDER."""
    parser.add_argument("folder", metavar="FOLDER", help="where to write; made if it is not there")


def run(arguments: argparse.Namespace) -> int:
    """Write the files to start from; returns the exit status."""
    from pathlib import Path

    from wellseq.base.data import data_folder

    folder = Path(arguments.folder)
    start = sorted((data_folder("grammar") / "start").iterdir())
    taken = [file.name for file in start if os.path.lexists(folder / file.name)]
    if taken:
        complain(f"{folder / taken[0]} is there already; nothing was written")
        return status.NO_OUTPUT
    try:
        folder.mkdir(parents=True, exist_ok=True)
        for file in start:
            _write(folder / file.name, file.read_bytes())
    except OSError as error:
        reason = (error.strerror or "unknown cause").lower()
        complain(f"{folder} cannot be written: {reason}")
        return status.NO_OUTPUT
    names = [str(folder / file.name) for file in start]
    sequence = next((name for name in names if name.endswith(".well")), names[0])
    sys.stdout.write(
        "".join(f"{name}\n" for name in names)
        + f"\nnext: wellseq check {sequence} --margins\n"
        + f"      wellseq build {sequence} -o {folder / 'tables'}\n"
    )
    return status.CLEAR


def _write(path: Path, content: bytes) -> None:
    """Write a file that is not there yet; FileExistsError when it is."""
    flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | getattr(os, "O_BINARY", 0)
    with os.fdopen(os.open(path, flags, 0o644), "wb") as stream:
        stream.write(content)
