"""Trap file → `Trap`, or every mistake of the file at once, each at its line and column.

Each table is read on its own, and the trap as a whole is judged on what could be read, so a bad
value in one place hides nothing in another.  What follows from a mistake already told (a key that
is missing because it is misspelt, an output that is unused because its mention is) is not told
again.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field
from itertools import islice
from pathlib import Path as FilePath
from typing import Annotated, Any, TypeVar

from pydantic import Field, ValidationError
from pydantic_core import ErrorDetails

from wellseq.base.finding import Mistake
from wellseq.base.names import nearest, normal, printable
from wellseq.base.place import Place
from wellseq.model.bounds import bounds
from wellseq.model.hardware import Converter, Electrode, Line, Part, Rest, Stretch, Switch, Trigger
from wellseq.model.margins import Margins, PairMargin
from wellseq.model.surroundings import Bore, MagneticField, Site
from wellseq.model.text_file import read_text
from wellseq.model.toml_places import Path, Places
from wellseq.model.toml_text import parse
from wellseq.model.trap import Trap
from wellseq.model.trap_sound import STRAYS_MAX, Entry, Fault, faults_of, meant_by
from wellseq.model.written import FAULT, WRITTEN, is_name, shown, sound, text, whole
from wellseq.text.mistakes import LISTED_MAX

VERSION = 1
BYTES_MAX = 1_000_000
TABLES_MAX = 1000
COMPARISONS_MAX = 20_000
"""Names compared in search of the nearest, in one file; a mistake beyond gets no such hint."""
LISTS = ("electrode", "output", "line", "trigger")
SECTION_KEYS = (*LISTS, "field", "bore", "site", "margins", "rest")
MODELS: dict[str, type[Part]] = {"electrode": Electrode, "line": Line, "trigger": Trigger}
"""Lists whose tables are all of one model; an output is of two kinds."""

Read = tuple[Trap | None, tuple[Mistake, ...]]
Table = dict[str, Any]
P = TypeVar("P", bound=Part)


class Heading(Part):
    """What stands above the first table."""

    version: Annotated[
        int, whole(bounds()), sound(lambda v: v == VERSION, "this version of the file is not known")
    ] = Field(alias="wellseq-trap")
    name: Annotated[str, text(100), sound(lambda name: name.strip() != "", "the name is empty")]


def read_trap(path: FilePath, shown: str) -> Read:
    """Read a trap file; `shown` is the name under which places report it.

    Gives the trap and no mistake, or no trap and all mistakes in order of place.  Never raises.
    """
    source = read_text(path, shown, BYTES_MAX)
    if isinstance(source, Mistake):
        return None, (source,)
    return trap_from(source, shown)


def trap_from(source: str, shown: str) -> Read:
    """Like `read_trap`, for the text of a trap file.  Never raises."""
    parsed = parse(source, shown)
    if isinstance(parsed, Mistake):
        return None, (parsed,)
    raw, places = parsed
    draft = _Draft()
    fields = draft.read(raw)
    if draft.faults:
        return None, _mistakes(draft.faults, places)
    return Trap(file=shown, source=source, **fields), ()


@dataclass
class _Draft:
    """Collects the faults of one file while its tables are read."""

    faults: list[Fault] = field(default_factory=list)
    meant: set[str | None] = field(default_factory=set)
    """Keys at the top of the file that are there, but misspelt."""

    def read(self, raw: Table) -> dict[str, Any]:
        """All tables; gives the fields of a `Trap`, complete only when there is no fault."""
        heading = self.part((), Heading, raw, SECTION_KEYS)
        self.meant = _meant(fault.word for fault in self.faults if len(fault.path) == 1)
        entries = [entry for key in LISTS for entry in self.entries(key, raw)]
        pairs, margins = self.margins(raw)
        rest = tuple(self.rest(raw))
        for fault in faults_of(entries, pairs, rest):
            if not self.explained(fault):
                self.faults.append(fault)
        parts = [entry.part for entry in entries]
        return {
            "name": heading.name if heading else "",
            "field": self.single("field", MagneticField, raw, needed=True),
            "bore": self.single("bore", Bore, raw),
            "site": self.single("site", Site, raw),
            "electrodes": tuple(part for part in parts if isinstance(part, Electrode)),
            "outputs": tuple(part for part in parts if isinstance(part, Converter | Switch)),
            "lines": tuple(part for part in parts if isinstance(part, Line)),
            "triggers": tuple(part for part in parts if isinstance(part, Trigger)),
            "margins": margins,
            "rests": rest,
        }

    def explained(self, fault: Fault) -> bool:
        """Whether a fault of the trap as a whole comes from a list whose key is misspelt."""
        if len(fault.path) == 1:
            return fault.path[0] in self.meant
        about_names = fault.name in ("unknown-name", "name-unused") and fault.path[0] != "line"
        return about_names and not self.meant.isdisjoint(("electrode", "output"))

    def part(self, path: Path, model: type[P], table: Table, more: Sequence[str] = ()) -> P | None:
        """Read one table as a model; None when a value of it cannot be read."""
        own = {info.alias or name for name, info in model.model_fields.items()}
        known = tuple(sorted({*own, *more}))
        called = _called(path, table)
        strays = [key for key in table if key not in known]
        for key in strays:
            message = f"{shown(key)} is not a key of {called}"
            self.add((*path, key), "unknown-name", message, word=key, known=known, what="keys")
        try:
            mine = {key: value for key, value in table.items() if key in own}
            return model.model_validate(mine, context=WRITTEN)
        except ValidationError as error:
            meant = _meant(strays, known)
            for item in error.errors(include_url=False, include_input=False):
                self.fault_of(item, path, called, meant if strays else None)
            return None

    def fault_of(
        self, item: ErrorDetails, path: Path, called: str, meant: set[str | None] | None
    ) -> None:
        """Keep one error of a model as a fault, unless a misspelt key of its table explains it."""
        loc = item["loc"]
        if item["type"] == "missing":
            if not meant or loc[0] not in meant:
                self.add(path, "syntax", f"{called} has no '{loc[0]}'")
        elif item["type"] == FAULT:
            if loc or meant is None:
                subject = f"'{loc[0]}' of {called}" if loc else called
                said = item["ctx"]
                message = f"{subject}: {said['message']}"
                self.add((*path, *loc), said["name"], message, said["hint"])
        else:
            self.add((*path, *loc), "syntax", f"{called}: {printable(item['msg'])}")

    def add(self, path: Path, name: str, message: str, hint: str = "", **more: Any) -> None:
        """Keep a fault."""
        self.faults.append(Fault(path, name, message, hint, **more))

    def single(self, key: str, model: type[P], raw: Table, *, needed: bool = False) -> P | None:
        """Read a table that stands once; its defaults when it is absent and not needed."""
        if key in raw:
            table = self.table((key,), raw[key])
            return None if table is None else self.part((key,), model, table)
        if needed and key not in self.meant:
            self.add((key,), "syntax", f"the trap has no {key}", f"write [{key}]")
        return None if needed else model()

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

    def entries(self, section: str, raw: Table) -> Iterator[Entry]:
        """Read the tables of one list; what cannot be read still counts by its name."""
        for number, table in self.tables((section,), raw.get(section, [])):
            path = (section, number)
            model = MODELS.get(section) or self.output_model(path, table)
            part: Part | None = self.part(path, model, table)
            if part is None and model is Electrode:
                part = _ends_of(table)
            name = table.get("name")
            name = normal(name) if isinstance(name, str) else None
            yield Entry(model, number, name, part, _mentions(model, table))

    def output_model(self, path: Path, table: Table) -> type[Converter] | type[Switch]:
        """Whether an output is a converter or a switch; by its other keys where `kind` fails."""
        kind = table.get("kind")
        if kind in ("converter", "switch"):
            return Switch if kind == "switch" else Converter
        if "range" in table or not {"levels", "edge"} & table.keys():
            return Converter
        if kind is None and "kind" not in _meant(table, ("kind",)):
            message = f"{_called(path, table)} has levels but no 'kind'"
            self.add(path, "syntax", message, 'write kind = "switch"')
        return Switch

    def margins(self, raw: Table) -> tuple[tuple[tuple[int, PairMargin], ...], Margins | None]:
        """The margins and their pairs, each pair with its number in the file."""
        table = self.table(("margins",), raw.get("margins", {})) or {}
        path: Path = ("margins", "pair")
        pairs: list[tuple[int, PairMargin]] = []
        for number, row in self.tables(path, table.get("pair", [])):
            pair = self.part((*path, number), PairMargin, row)
            if pair is not None:
                pairs.append((number, pair))
        rest = {key: value for key, value in table.items() if key != "pair"}
        margins = self.part(("margins",), Margins, rest)
        if margins is not None:
            margins = margins.model_copy(update={"pairs": tuple(pair for _, pair in pairs)})
        return tuple(pairs), margins

    def rest(self, raw: Table) -> Iterator[Rest]:
        """Where outputs stand at first, by electrode or output."""
        table = self.table(("rest",), raw.get("rest", {})) or {}
        if len(table) > TABLES_MAX:
            message = f"[rest] has {len(table)} keys"
            self.add(("rest",), "too-large", message, f"at most {TABLES_MAX}")
        for key, value in islice(table.items(), TABLES_MAX):
            try:
                yield Rest.model_validate({"name": key, "level": value}, context=WRITTEN)
            except ValidationError as error:
                for item in error.errors(include_url=False, include_input=False):
                    said = item["ctx"]
                    message = f"rest of {shown(key)}: {said['message']}"
                    self.add(("rest", key), said["name"], message, said["hint"])


def _ends_of(table: Table) -> Stretch | None:
    """Where an electrode lies, when that is all that can be read of it."""
    try:
        ends = {key: value for key, value in table.items() if key in ("from", "to")}
        return Stretch.model_validate(ends, context=WRITTEN)
    except ValidationError:
        return None


def _meant(strays: Iterable[str], known: Sequence[str] = SECTION_KEYS) -> set[str | None]:
    return {meant_by(word, known) for word in islice(strays, STRAYS_MAX)}


def _mentions(model: type[Part], table: Table) -> tuple[tuple[Path, str], ...] | None:
    """The outputs that a table names, as far as they can be read; None when they cannot be."""
    if model is Electrode:
        output = table.get("output")
        return ((("output",), normal(output)),) if isinstance(output, str) else None
    if model is not Switch:
        return ()
    levels = table.get("levels")
    if not isinstance(levels, list):
        return None
    words = [(n, normal(item)) for n, item in enumerate(levels) if isinstance(item, str)]
    return tuple((("levels", n), word) for n, word in words if is_name(word))


def _called(path: Path, table: Table) -> str:
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


def _mistakes(faults: list[Fault], places: Places) -> tuple[Mistake, ...]:
    """Faults in order of their places, as mistakes; beyond a number of them only counted."""
    placed = sorted(((places.of(fault.path), fault) for fault in faults), key=_order)
    comparisons = 0
    mistakes: list[Mistake] = []
    for place, fault in placed[:LISTED_MAX]:
        message, hint = fault.message, fault.hint
        if fault.see is not None:
            message += f", line {places.of(fault.see).line}"
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


def _order(placed: tuple[Place, Fault]) -> tuple[Place, str, str]:
    place, fault = placed
    return place, fault.name, fault.message
