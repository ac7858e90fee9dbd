"""Tables of a trap file → models, with every fault kept and put at its place.

A key that is misspelt is told once and then read as the key that was meant, so that nothing else is
reported as missing because of it.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any, TypeVar

from pydantic import ValidationError
from pydantic_core import ErrorDetails

from wellseq.base.finding import Mistake
from wellseq.base.names import nearest, printable
from wellseq.base.place import Place
from wellseq.model.hardware import Part
from wellseq.model.toml_places import Path, Places
from wellseq.model.trap_sound import STRAYS_MAX, Fault, meant_by
from wellseq.model.written import FAULT, WRITTEN, shown
from wellseq.text.mistakes import LISTED_MAX

TABLES_MAX = 1000
COMPARISONS_MAX = 20_000
"""Names compared in search of the nearest, in one file; a mistake beyond gets no such hint."""

Table = dict[str, Any]
P = TypeVar("P", bound=Part)


def keys_of(*models: type[Part]) -> tuple[str, ...]:
    """The keys under which a file writes the fields of these models."""
    return tuple(
        sorted(
            {info.alias or name for model in models for name, info in model.model_fields.items()}
        )
    )


class Draft:
    """Collects the faults of one file while its tables are read."""

    def __init__(self) -> None:
        self.faults: list[Fault] = []
        self._written: dict[Path, str] = {}
        """Path of a key that was meant → the key as it is written."""

    def add(self, path: Path, name: str, message: str, hint: str = "", **more: Any) -> None:
        """Keep a fault."""
        self.faults.append(Fault(path, name, message, hint, **more))

    def mend(self, path: Path, table: Table, known: Sequence[str]) -> Table:
        """The table with its known keys only; tells of the others and reads them as meant."""
        mended = {key: value for key, value in table.items() if key in known}
        strays = [key for key in table if key not in known]
        for number, key in enumerate(strays):
            right = meant_by(key, known) if number < STRAYS_MAX else None
            if right is not None and right not in mended:
                mended[right] = table[key]
                self._written[*path, right] = key
        for key in strays:
            message = f"{shown(key)} is not a key of {called(path, mended)}"
            self.add(
                (*path, key), "unknown-name", message, word=key, known=tuple(known), what="keys"
            )
        return mended

    def part(self, path: Path, model: type[P], table: Table) -> P | None:
        """Read a mended table as a model; None when a value of it cannot be read."""
        try:
            return model.model_validate(table, context=WRITTEN)
        except ValidationError as error:
            for item in error.errors(include_url=False, include_input=False):
                self._add_error(item, path, called(path, table))
            return None

    def _add_error(self, item: ErrorDetails, path: Path, subject: str) -> None:
        where = (*path, *item["loc"])
        # What a misspelt key was meant to be is a guess: its value is not held against it.
        if item["loc"] and where[: len(path) + 1] in self._written:
            return
        if item["type"] == "missing":
            self.add(path, "syntax", f"{subject} has no '{item['loc'][0]}'")
        elif item["type"] == FAULT:
            said = item["ctx"]
            about = f"'{item['loc'][0]}' of {subject}" if item["loc"] else subject
            self.add(where, said["name"], f"{about}: {said['message']}", said["hint"])
        else:
            self.add(where, "syntax", f"{subject}: {printable(item['msg'])}")

    def table(self, path: Path, value: object) -> Table | None:
        """A value that must be a table."""
        if isinstance(value, dict):
            return value
        self.add(path, "syntax", f"'{path[-1]}' is {_kind(value)}", f"write [{path[-1]}]")
        return None

    def tables(self, path: Path, value: object) -> Iterator[tuple[int, Table]]:
        """A value that must be a list of tables, with their numbers from 0."""
        header = ".".join(str(part) for part in path)
        hint = f"write [[{header}]], in two brackets, for each"
        if not isinstance(value, list):
            self.add(path, "syntax", f"'{path[-1]}' is {_kind(value)}", hint)
            return
        if len(value) > TABLES_MAX:
            message = f"there are {len(value)} tables [[{header}]]"
            self.add((*path, TABLES_MAX), "too-large", message, f"at most {TABLES_MAX}")
        for number, table in enumerate(value[:TABLES_MAX]):
            if isinstance(table, dict):
                yield number, table
            else:
                self.add((*path, number), "syntax", f"{_kind(table)} is no table", hint)

    def mistakes(self, places: Places) -> tuple[Mistake, ...]:
        """The faults in order of their places; beyond a number of them only counted."""
        placed = sorted(
            ((self._place(fault.path, places), fault) for fault in self.faults), key=_order
        )
        comparisons = 0
        mistakes: list[Mistake] = []
        for place, fault in placed[:LISTED_MAX]:
            message, hint = fault.message, fault.hint
            if fault.see is not None:
                message += f", line {self._place(fault.see, places).line}"
            comparisons += len(fault.known)
            if fault.known and comparisons <= COMPARISONS_MAX:
                hint = nearest(fault.word, fault.known, fault.what)
            mistakes.append(Mistake(fault.name, place, message, hint))
        more = len(placed) - LISTED_MAX
        if more > 0:
            message = f"{more} more mistakes in this file are not listed"
            place = placed[LISTED_MAX][0]
            mistakes.append(Mistake("syntax", place, message, "mend the first ones first"))
        return tuple(mistakes)

    def _place(self, path: Path, places: Places) -> Place:
        """Where a path stands, its keys spelled as they are written."""
        spelled = (self._written.get(path[: n + 1], key) for n, key in enumerate(path))
        return places.of(tuple(spelled))


def called(path: Path, table: Table) -> str:
    """A table as a message speaks of it: electrode 'C4', [bore], margins pair 2."""
    if not path:
        return "the trap file"
    if len(path) == 1:
        return f"[{path[0]}]"
    name = table.get("name")
    words = " ".join(str(part) for part in path[:-1])
    return f"{words} {shown(name)}" if isinstance(name, str) else f"{words} {int(path[-1]) + 1}"


def _kind(value: object) -> str:
    return shown(value) if isinstance(value, (dict, list)) else "a single value"


def _order(placed: tuple[Place, Fault]) -> tuple[Place, str, str]:
    place, fault = placed
    return place, fault.name, fault.message
