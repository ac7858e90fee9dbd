"""Beside every table of numbers, `TABLE.csv-metadata.json`: what its columns are, for any reader.

Ticks in s by their scale, codes and volts in V with their ranges, levels and states by their words,
drives in s, Hz, V and degrees, roundings in s and V.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.emit.blocks import drives_name, exact, metadata_name, table_name
from wellseq.emit.columns import Column, Kind, rows_of
from wellseq.emit.content import content_id
from wellseq.emit.csvw import Described, column, description
from wellseq.emit.files import drives_csv, roundings_csv
from wellseq.emit.keys import Key
from wellseq.emit.lines import titles
from wellseq.timeline.shipped import ShippedBlock
from wellseq.timeline.timeline import Block


def write(key: Key) -> Iterator[tuple[str, list[bytes]]]:
    """(name, content) of the description of every CSV of the folder."""
    trap, shipped = key.case.trap, key.case.shipped
    if trap is None or shipped is None:
        return
    identity = content_id(shipped)
    for block in shipped.blocks:
        table = table_name(block.block)
        described = [_tick(block)]
        for one in rows_of(trap, shipped, block).columns:
            described += _of(one)
        yield metadata_name(table), [description(table, described, identity, "tick")]
        if block.block.drives:
            table = drives_name(block.block)
            yield metadata_name(table), [description(table, _drive(block.block), identity)]
    for table, head in roundings_csv.HEADS.items():
        yield metadata_name(table), [description(table, map(_rounding, head), identity)]


def _tick(block: ShippedBlock) -> Described:
    scale = {
        "scale_factor": float(block.tick_s),
        "add_offset": 0.0,
        "units": "s",
        "exact_s": exact(block.tick_s),
    }
    most = int(block.ticks[-1])
    return column("tick", {"base": "integer", "minimum": 0, "maximum": most}, properties=scale)


def _of(one: Column) -> list[Described]:
    whole = {"base": "integer", "minimum": 0, "maximum": one.most}
    heads = titles(one)
    if one.kind is Kind.CODE:
        scale = {
            "scale_factor": one.scale_factor_V,
            "add_offset": one.add_offset_V,
            "units": "V",
            "between_rows": "line" if one.draws else "hold",
        }
        low, high = sorted(one.volts([0, one.most]))
        volts = {"base": "double", "minimum": low, "maximum": high}
        return [column(heads[0], whole, properties=scale), column(heads[1], volts, "V")]
    if one.kind is Kind.LEVEL:
        words = {f"level {at}": word for at, word in enumerate(one.words)}
        return [column(heads[0], whole, properties=words)]
    return [column(heads[0], {"base": "string", "format": "|".join(one.words)})]


def _drive(block: Block) -> Iterator[Described]:
    sectors = max(len(drive.phases_deg) for drive in block.drives)
    for name in drives_csv.head(len(drives_csv.HEAD) + sectors):
        unit = name.rpartition("_")[2]
        if name == "ring":
            yield column(name, "string")
        elif name == "order":
            yield column(name, {"base": "integer", "minimum": 1, "maximum": 2})
        else:
            yield column(name, "double", unit, required=unit != "deg")


def _rounding(name: str) -> Described:
    unit = name.rpartition("_")[2]
    if unit in ("s", "V"):
        return column(name, "decimal" if unit == "s" else "double", unit)
    return column(name, "integer" if name in ("block", "line", "code") else "string")
