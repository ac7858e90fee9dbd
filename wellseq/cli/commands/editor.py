"""Serve an editor: the language server on standard input and output.

Editors start it themselves and speak the Language Server Protocol 3.17 with it.  What it finds is
what `check` finds, in buffers that are not saved as well.  It needs the libraries of the optional
group: pip install 'wellseq[editor]'.
"""

from __future__ import annotations

import argparse
import os

from wellseq.cli import status
from wellseq.cli.common import complain

EXAMPLE = "wellseq editor --stdio"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """--stdio, which some editors add and which changes nothing."""
    parser.add_argument("--stdio", action="store_true", help="standard input and output (always)")


def run(arguments: argparse.Namespace) -> int:
    """Serve until the editor says goodbye; returns the exit status."""
    try:
        from wellseq.editor.server import made
    except ModuleNotFoundError as error:
        if error.name not in ("pygls", "lsprotocol"):
            raise
        complain("the language server needs two more libraries: pip install 'wellseq[editor]'")
        return status.USAGE
    server = made()
    # Copies: the server closes what it was given, and nothing else may write to the real ones.
    with os.fdopen(os.dup(0), "rb") as reader, os.fdopen(os.dup(1), "wb") as writer:
        server.start_io(reader, writer)
    return status.CLEAR if server.dismissed else status.FINDINGS
