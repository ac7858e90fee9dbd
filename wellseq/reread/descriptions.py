"""The descriptions beside the tables (CSV on the Web), word for word as the manifest has them.

Every one is worked out here again from the manifest, ranges in V and ticks in s included.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from fractions import Fraction
from urllib.parse import quote

from wellseq.reread.forms import most, scale, words
from wellseq.reread.plan import BlockPlan, Converter, Line, Plan
from wellseq.reread.reading import Unsound, canonical
from wellseq.reread.roundings import HEADS
from wellseq.reread.table import Table

UNSOUND = "description-unsound"
ENDING = "-metadata.json"
UNITS = {"V": "VLT", "s": "SEC", "Hz": "HTZ", "deg": "DD"}
Json = dict[str, object]


def judge_description(
    content: bytes, table: str, plan: Plan, block: Table | None, sectors: int
) -> Iterator[Unsound]:
    """Whether what describes a CSV named `table` says what it should.

    `block` is the block whose rows or drives it holds, None for a report of roundings; `sectors`
    counts the phases of a drive table.
    """
    right = canonical(_document(table, plan, block, sectors))
    if content != right:
        line = next(
            (
                number
                for number, (one, other) in enumerate(
                    zip(content.split(b"\n"), right.split(b"\n"), strict=False), 1
                )
                if one != other
            ),
            1,
        )
        message = "this does not describe its table as the manifest does"
        yield Unsound(UNSOUND, f"{table}{ENDING}", message, line)


def _document(table: str, plan: Plan, block: Table | None, sectors: int) -> Json:
    schema: Json
    if block is None:
        schema = {"columns": [_rounding(name) for name in HEADS[table]]}
    elif table == block.block.table:
        schema = {"columns": list(_table(plan, block.block, block)), "primaryKey": "tick"}
    else:
        schema = {"columns": list(_drives(sectors))}
    return {
        "@context": ["http://www.w3.org/ns/csvw", {"@language": "en"}],
        "url": table,
        "dialect": {
            "delimiter": ",",
            "doubleQuote": True,
            "encoding": "utf-8",
            "header": True,
            "lineTerminators": ["\r\n"],
            "quoteChar": '"',
        },
        "dcterms:identifier": plan.content_id,
        "tableSchema": schema,
    }


def _column(
    title: str,
    datatype: object,
    unit: str = "",
    more: Mapping[str, object] | None = None,
    required: bool = True,
) -> Json:
    found: Json = {"name": quote(title, safe="."), "titles": title}
    found |= {"datatype": datatype, "required": required}
    if unit:
        found |= {"schema:unitText": unit, "schema:unitCode": UNITS[unit]}
    if more:
        found["schema:additionalProperty"] = [
            {"@type": "schema:PropertyValue", "schema:name": key, "schema:value": value}
            for key, value in more.items()
        ]
    return found


def _whole(largest: int) -> Json:
    return {"base": "integer", "minimum": 0, "maximum": largest}


def _table(plan: Plan, block: BlockPlan, table: Table) -> Iterator[Json]:
    tick: Json = {"scale_factor": float(block.tick_s), "add_offset": 0.0, "units": "s"}
    yield _column("tick", _whole(table.ticks[-1]), more=tick | {"exact_s": str(block.tick_s)})
    for one in plan.converters:
        yield from _converter(one)
    for switch in plan.switches:
        levels = {f"level {at}": word for at, word in enumerate(words(switch))}
        yield _column(f"{switch.name}.level", _whole(most(switch)), more=levels)
    for line in plan.lines:
        yield _line(line)


def _converter(one: Converter) -> Iterator[Json]:
    factor, offset = scale(one)
    more = {"scale_factor": factor, "add_offset": offset, "units": "V"}
    yield _column(
        f"{one.name}.code",
        _whole(one.code_max),
        more=more | {"between_rows": "hold" if one.holds else "line"},
    )
    start, slope, bottom = one.whole
    ends = sorted((Fraction(start, bottom), Fraction(start + slope * one.code_max, bottom)))
    low, high = map(float, ends)
    yield _column(f"{one.name}.V", {"base": "double", "minimum": low, "maximum": high}, "V")


def _line(line: Line) -> Json:
    return _column(line.name, {"base": "string", "format": "|".join(line.states)})


def _drives(sectors: int) -> Iterator[Json]:
    yield _column("ring", "string")
    for name in ("start_s", "stop_s", "from_Hz", "to_Hz", "amplitude_V"):
        yield _column(name, "double", name.split("_")[1])
    yield _column("order", {"base": "integer", "minimum": 1, "maximum": 2})
    for at in range(sectors):
        yield _column(f"phase_{at + 1}_deg", "double", "deg", required=False)


def _rounding(name: str) -> Json:
    if name.endswith("_s"):
        return _column(name, "decimal", "s")
    if name.endswith("_V"):
        return _column(name, "double", "V")
    return _column(name, "integer" if name in ("block", "line", "code") else "string")
