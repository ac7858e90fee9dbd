"""A CSV of a published folder → its description for CSV on the Web: types, ranges, units, scale.

Source: Metadata Vocabulary for Tabular Data (W3C Recommendation, 17 December 2015); units by
schema.org's unitText and UN/CEFACT codes (Recommendation 20); scale_factor and add_offset as in the
NetCDF CF Conventions, sec. 8.1: value = number · scale_factor + add_offset.
"""

from __future__ import annotations

import json
from collections.abc import Iterable, Mapping
from urllib.parse import quote

CONTEXT = ["http://www.w3.org/ns/csvw", {"@language": "en"}]
CODES = {"V": "VLT", "s": "SEC", "Hz": "HTZ", "deg": "DD"}
"""Unit → its UN/CEFACT code."""
DIALECT = {
    "delimiter": ",",
    "doubleQuote": True,
    "encoding": "utf-8",
    "header": True,
    "lineTerminators": ["\r\n"],
    "quoteChar": '"',
}
Described = dict[str, object]


def column(
    title: str,
    datatype: Mapping[str, object] | str,
    unit: str = "",
    properties: Mapping[str, object] | None = None,
    *,
    required: bool = True,
) -> Described:
    """One column: `datatype` with its range, the unit of its numbers, further `properties`."""
    found: Described = {
        # A name is a variable of a URI template (RFC 6570): letters of other scripts are encoded.
        "name": quote(title, safe="."),
        "titles": title,
        "datatype": datatype if isinstance(datatype, str) else dict(datatype),
        "required": required,
    }
    if unit:
        found |= {"schema:unitText": unit, "schema:unitCode": CODES[unit]}
    if properties:
        found["schema:additionalProperty"] = [
            {"@type": "schema:PropertyValue", "schema:name": name, "schema:value": value}
            for name, value in properties.items()
        ]
    return found


def description(
    table: str, columns: Iterable[Described], content_id: str, key: str | list[str] | None = None
) -> bytes:
    """The whole document for a file `table`; `key` names the columns that tell rows apart."""
    schema: dict[str, object] = {"columns": list(columns)}
    if key is not None:
        schema["primaryKey"] = key
    document = {
        "@context": CONTEXT,
        "url": table,
        "dialect": DIALECT,
        "dcterms:identifier": content_id,
        "tableSchema": schema,
    }
    text = json.dumps(document, indent=1, sort_keys=True, ensure_ascii=False, allow_nan=False)
    return f"{text}\n".encode()
