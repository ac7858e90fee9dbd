"""The members of a folder of the package, by their files' names, without importing any of them.

`--help` must answer at once: this file and what it serves do without `pathlib` and `typing`,
which take longer to load than the whole answer to write.
"""

from __future__ import annotations

import os

TYPE_CHECKING = False
"""Type checkers take a name spelled like this for true; `typing` itself need not be loaded."""

_PACKAGE = os.path.dirname(os.path.dirname(os.path.abspath(__file__)))


def names_in(*folders: str) -> tuple[str, ...]:
    """The names of all modules of a folder of the package, in alphabetical order."""
    files = os.listdir(os.path.join(_PACKAGE, *folders))
    return tuple(sorted(file[:-3] for file in files if file.endswith(".py") and file[0] != "_"))
