"""Trap file → `Trap`, or every mistake of the file at once, each at its line and column.

Each table is read on its own, and the trap as a whole is judged on what could be read, so a bad
value in one place hides nothing in another.
"""

from __future__ import annotations

from collections.abc import Iterator
from functools import lru_cache
from itertools import islice
from pathlib import Path as FilePath
from typing import Annotated, Any

from pydantic import Field, ValidationError

from wellseq.base.finding import Mistake
from wellseq.base.names import normal
from wellseq.model.bounds import bounds
from wellseq.model.hardware import (
    Converter,
    Electrode,
    Line,
    Part,
    Rest,
    Stretch,
    Switch,
    Trigger,
)
from wellseq.model.margins import Margins, PairMargin
from wellseq.model.surroundings import Bore, MagneticField, Site
from wellseq.model.text_file import read_text
from wellseq.model.toml_places import Path
from wellseq.model.toml_text import parse
from wellseq.model.trap import Trap
from wellseq.model.trap_draft import TABLES_MAX, Draft, P, Table, called, keys_of
from wellseq.model.trap_sound import STRAYS_MAX, Entry, Numbered, faults_of, meant_by
from wellseq.model.written import WRITTEN, is_name, shown, sound, text, whole

VERSION = 1
BYTES_MAX = 1_000_000
LISTS = ("electrode", "output", "line", "trigger")
SECTIONS = (*LISTS, "field", "bore", "site", "margins", "rest")
MODELS: dict[str, type[Part]] = {"electrode": Electrode, "line": Line, "trigger": Trigger}
"""Lists whose tables are all of one model; an output is of two kinds."""

Read = tuple[Trap | None, tuple[Mistake, ...]]


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


@lru_cache(maxsize=8)
def trap_from(source: str, shown: str) -> Read:
    """Like `read_trap`, for the text of a trap file.  Never raises."""
    parsed = parse(source, shown)
    if isinstance(parsed, Mistake):
        return None, (parsed,)
    raw, places = parsed
    draft = Draft()
    fields = _fields(draft, raw)
    if draft.faults:
        return None, draft.mistakes(places)
    return Trap(file=shown, source=source, **fields), ()


def _fields(draft: Draft, raw: Table) -> dict[str, Any]:
    """The fields of a `Trap` from all tables; complete only when the draft has no fault."""
    raw = draft.mend((), raw, (*keys_of(Heading), *SECTIONS))
    heading = draft.part((), Heading, {key: raw[key] for key in keys_of(Heading) if key in raw})
    entries = [entry for section in LISTS for entry in _entries(draft, section, raw)]
    pairs, margins = _margins(draft, raw)
    rests = tuple(_rests(draft, raw))
    draft.faults.extend(faults_of(entries, pairs, rests))
    parts = [entry.part for entry in entries]
    if "field" not in raw:
        draft.add(("field",), "syntax", "the trap has no field", "write [field]")
    return {
        "name": heading.name if heading else "",
        "field": _single(draft, "field", MagneticField, raw) if "field" in raw else None,
        "bore": _single(draft, "bore", Bore, raw),
        "site": _single(draft, "site", Site, raw),
        "electrodes": tuple(part for part in parts if isinstance(part, Electrode)),
        "outputs": tuple(part for part in parts if isinstance(part, Converter | Switch)),
        "lines": tuple(part for part in parts if isinstance(part, Line)),
        "triggers": tuple(part for part in parts if isinstance(part, Trigger)),
        "margins": margins,
        "rests": rests,
    }


def _single(draft: Draft, key: str, model: type[P], raw: Table) -> P | None:
    """Read a table that stands once; its defaults when it is absent."""
    table = draft.table((key,), raw.get(key, {}))
    if table is None:
        return None
    return draft.part((key,), model, draft.mend((key,), table, keys_of(model)))


def _entries(draft: Draft, section: str, raw: Table) -> Iterator[Entry]:
    """Read the tables of one list; what cannot be read still counts by its name."""
    for number, table in draft.tables((section,), raw.get(section, [])):
        path = (section, number)
        model = MODELS.get(section) or _output_model(table)
        table = draft.mend(path, table, keys_of(model))
        if model is Switch and "kind" not in table:
            message = f"{called(path, table)} has levels but no 'kind'"
            draft.add(path, "syntax", message, 'write kind = "switch"')
        part: Part | None = draft.part(path, model, table)
        if part is None and model is Electrode:
            part = _ends_of(table)
        name = table.get("name")
        name = normal(name) if isinstance(name, str) else None
        yield Entry(model, number, name, part, _mentions(model, table))


def _output_model(table: Table) -> type[Converter] | type[Switch]:
    """Whether an output is a converter or a switch; by its other keys where `kind` fails."""
    known = keys_of(Converter, Switch)
    strays = islice((key for key in table if key not in known), STRAYS_MAX)
    words = ["kind", *(key for key in strays if meant_by(key, known) == "kind")]
    kinds = [table[key] for key in words if key in table]
    if "switch" in kinds or "converter" in kinds:
        return Switch if "switch" in kinds else Converter
    return Switch if {"levels", "edge"} & table.keys() and "range" not in table else Converter


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


def _ends_of(table: Table) -> Stretch | None:
    """Where an electrode lies, when that is all that can be read of it."""
    try:
        ends = {key: table[key] for key in ("from", "to") if key in table}
        return Stretch.model_validate(ends, context=WRITTEN)
    except ValidationError:
        return None


def _margins(draft: Draft, raw: Table) -> tuple[Numbered, Margins | None]:
    """The margins and their pairs, each pair with its number in the file."""
    table = draft.table(("margins",), raw.get("margins", {})) or {}
    table = draft.mend(("margins",), table, keys_of(Margins))
    pairs: list[tuple[int, PairMargin]] = []
    for number, row in draft.tables(("margins", "pair"), table.pop("pair", [])):
        path = ("margins", "pair", number)
        pair = draft.part(path, PairMargin, draft.mend(path, row, keys_of(PairMargin)))
        if pair is not None:
            pairs.append((number, pair))
    margins = draft.part(("margins",), Margins, table)
    if margins is not None:
        margins = margins.model_copy(update={"pairs": tuple(pair for _, pair in pairs)})
    return tuple(pairs), margins


def _rests(draft: Draft, raw: Table) -> Iterator[Rest]:
    """Where outputs stand at first, by electrode or output."""
    table = draft.table(("rest",), raw.get("rest", {})) or {}
    if len(table) > TABLES_MAX:
        message = f"[rest] has {len(table)} keys"
        draft.add(("rest",), "too-large", message, f"at most {TABLES_MAX}")
    for key, value in islice(table.items(), TABLES_MAX):
        try:
            yield Rest.model_validate({"name": key, "level": value}, context=WRITTEN)
        except ValidationError as error:
            for item in error.errors(include_url=False, include_input=False):
                said = item["ctx"]
                message = f"rest of {shown(key)}: {said['message']}"
                draft.add(("rest", key), said["name"], message, said["hint"])
