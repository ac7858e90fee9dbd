"""How far a long command is: one line on standard error, there only while that is a terminal."""

from __future__ import annotations

import sys

CLEAR_LINE = "\r\x1b[K"


class Progress:
    """Tells on a terminal, and nowhere else; the line is gone when it ends."""

    def __init__(self, doing: str) -> None:
        self.doing = doing
        self.on = sys.stderr.isatty()
        self._told = False

    def tell(self, done: int, of: int) -> None:
        """Write that so many of so many are done; nothing for a single one."""
        if self.on and of > 1:
            sys.stderr.write(f"{CLEAR_LINE}{self.doing} {done} of {of}")
            sys.stderr.flush()
            self._told = True

    def end(self) -> None:
        """Take the line away."""
        if self._told:
            sys.stderr.write(CLEAR_LINE)
            sys.stderr.flush()
            self._told = False
