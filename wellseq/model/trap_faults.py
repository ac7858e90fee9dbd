"""What can be said against a trap file: a fault at a path, and the tables that faults speak of."""

from __future__ import annotations

from dataclasses import dataclass

from wellseq.model.hardware import Converter, Electrode, Line, Part, Switch, Trigger
from wellseq.model.toml_places import Path
from wellseq.text.mistakes import quoted

SECTIONS = {
    Electrode: "electrode",
    Converter: "output",
    Switch: "output",
    Line: "line",
    Trigger: "trigger",
}
"""Model → the key of the list of tables in which a trap file has it."""


@dataclass(frozen=True, slots=True)
class Fault:
    """Something wrong, at a path of the file.

    `see` is the path of what it clashes with.  `word` and `known` are a word that names nothing and
    what it could have named; `what` says what those are.
    """

    path: Path
    name: str
    message: str
    hint: str = ""
    see: Path | None = None
    word: str = ""
    known: tuple[str, ...] = ()
    what: str = ""


@dataclass(frozen=True, slots=True)
class Entry:
    """One table of the file: which model it is for, its number, its name, the part if readable.

    An electrode of which only the ends could be read has a `Stretch` for its part.
    `mentions` are the output names that it uses, each with the rest of its path; None when they
    could not be read.
    """

    model: type[Part]
    number: int
    name: str | None
    part: Part | None
    mentions: tuple[tuple[Path, str], ...] | None = ()

    @property
    def path(self) -> Path:
        """Where its table stands."""
        return (SECTIONS[self.model], self.number)

    @staticmethod
    def of(number: int, part: Electrode | Converter | Switch | Line | Trigger) -> Entry:
        """The entry of a part that has been read."""
        mentions: tuple[tuple[Path, str], ...] = ()
        if isinstance(part, Electrode):
            mentions = ((("output",), part.output),)
        elif isinstance(part, Switch):
            named = enumerate(part.levels)
            mentions = tuple((("levels", n), item) for n, item in named if isinstance(item, str))
        return Entry(type(part), number, part.name, part, mentions)


def said(name: str | None) -> str:
    """The name of a table as it is quoted, or that it has none that could be read."""
    return "without a name" if name is None else quoted(name)
