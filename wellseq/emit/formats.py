"""The forms in which findings are reported, found by looking into `reports/`.

A form is a module there with `report(examined, options) -> str`; its file name is the form's name.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from importlib import import_module
from pathlib import Path

from wellseq.emit.examined import Examined


@dataclass(frozen=True, slots=True)
class Options:
    """How to report: ANSI colour or none, passing margins shown or not, columns of the page."""

    colour: bool = False
    margins: bool = False
    width: int = 100


def report(name: str, things: Sequence[Examined], options: Options | None = None) -> str:
    """Everything found, in the form of that name; ends with a new line unless empty.

    Raises KeyError for a name that is not a form.
    """
    if name not in format_names():
        raise KeyError(name)
    write: Callable[[Sequence[Examined], Options], str]
    write = import_module(f"wellseq.emit.reports.{name}").report
    return write(things, options or Options())


def format_names() -> tuple[str, ...]:
    """The names of all forms, in alphabetical order."""
    folder = Path(__file__).parent / "reports"
    return tuple(sorted(file.stem for file in folder.glob("*.py") if file.stem != "__init__"))
