"""What standard output is: a terminal or not, wanting colour or not, how wide, in UTF-8 or not.

Colour: NO_COLOR, when set and not empty, forbids it; FORCE_COLOR or CLICOLOR_FORCE demands it;
CLICOLOR=0 or TERM=dumb forbids it; else it is used on terminals.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Mapping

from wellseq.cli.members import TYPE_CHECKING

if TYPE_CHECKING:
    from typing import TextIO

WIDTH_LEAST = 20
WIDTH_MOST = 120
WIDTH_ELSEWHERE = 100


def colour_wanted(environment: Mapping[str, str], is_terminal: bool) -> bool:
    """Whether to write ANSI colours, by the environment and by where the output goes."""
    if environment.get("NO_COLOR"):
        return False
    for name in ("FORCE_COLOR", "CLICOLOR_FORCE"):
        if environment.get(name, "0") not in ("", "0"):
            return True
    if environment.get("CLICOLOR") == "0" or environment.get("TERM") == "dumb":
        return False
    return is_terminal


def colour_here() -> bool:
    """Whether standard output gets colours."""
    return colour_wanted(os.environ, sys.stdout.isatty())


def width_here() -> int:
    """Columns to write for: those of the terminal within reason, a fixed number elsewhere."""
    if not sys.stdout.isatty():
        return WIDTH_ELSEWHERE
    import shutil

    columns = shutil.get_terminal_size((WIDTH_ELSEWHERE, 24)).columns
    return max(WIDTH_LEAST, min(columns, WIDTH_MOST))


def prepare(stream: TextIO) -> None:
    """Never fail on a character; elsewhere than on a terminal write UTF-8 with LF, whatever the
    locale says."""
    reconfigure = getattr(stream, "reconfigure", None)
    if reconfigure is None:
        return
    if stream.isatty():
        reconfigure(errors="backslashreplace")
    else:
        reconfigure(encoding="utf-8", errors="backslashreplace", newline="\n")
