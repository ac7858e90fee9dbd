"""A bar on standard error while something takes longer than a second; nothing where it is piped.

`rich` draws it where it is installed; without it a plain sentence stands there.  Either is gone
when the work is over.  Times in s.
"""

from __future__ import annotations

import sys
from collections.abc import Iterator
from contextlib import contextmanager
from importlib.util import find_spec
from threading import Event, Thread

PATIENCE_S = 1.0
CLEAR_LINE = "\r\x1b[K"


class Waiting:
    """How far the work is; `step` is called as it goes on."""

    def __init__(self, doing: str, of: int) -> None:
        self.doing, self.of, self.done = doing, of, 0
        self.over = Event()

    def step(self) -> None:
        """One more piece of the work is done."""
        self.done += 1

    def watch(self) -> None:
        """Show the bar once the work has taken longer than PATIENCE_S, s, until it is over."""
        if self.over.wait(PATIENCE_S):
            return
        if find_spec("rich"):
            self._bar()
        else:
            sys.stderr.write(f"{CLEAR_LINE}{self.doing} …")
            sys.stderr.flush()
            self.over.wait()
            sys.stderr.write(CLEAR_LINE)
        sys.stderr.flush()

    def _bar(self) -> None:
        from rich.console import Console
        from rich.progress import BarColumn, Progress, TextColumn, TimeElapsedColumn

        columns = (TextColumn("{task.description}"), BarColumn(), TimeElapsedColumn())
        with Progress(*columns, console=Console(stderr=True), transient=True) as bar:
            # With a single piece nobody knows how far it is: the bar only moves.
            task = bar.add_task(self.doing, total=self.of if self.of > 1 else None)
            while not self.over.wait(0.1):
                bar.update(task, completed=self.done)


@contextmanager
def waiting(doing: str, of: int = 1) -> Iterator[Waiting]:
    """Show that something goes on, `of` so many pieces, while the block runs on a terminal."""
    state = Waiting(doing, of)
    if not sys.stderr.isatty():
        yield state
        return
    watcher = Thread(target=state.watch, daemon=True)
    watcher.start()
    try:
        yield state
    finally:
        state.over.set()
        watcher.join()
