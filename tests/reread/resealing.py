"""A forger's tool: change a published folder and make every hash fit again.

What the second reader still finds after that, it finds by meaning and not by hash.
"""

from __future__ import annotations

import hashlib
import json
import struct
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path
from typing import Any

Document = dict[str, Any]


def reseal(folder: Path, change: Callable[[Document], None] | None = None) -> None:
    """Recompute hashes, content id and digest; `change` may edit the manifest before that."""
    path = folder / "manifest.json"
    manifest = json.loads(path.read_bytes())
    before, manifest["content_id"] = manifest["content_id"], content_id(folder, manifest)
    for described in folder.glob("*-metadata.json"):
        text = described.read_bytes().replace(before.encode(), manifest["content_id"].encode())
        described.write_bytes(text)
    for name in manifest["files"]:
        content = (folder / name).read_bytes()
        sha256 = hashlib.sha256(content).hexdigest()
        manifest["files"][name] = {"sha256": sha256, "bytes": len(content)}
    if change is not None:
        change(manifest)
    manifest.pop("digest")
    manifest["digest"] = hashlib.sha256(canonical(manifest)).hexdigest()
    path.write_bytes(canonical(manifest))


def canonical(document: Document) -> bytes:
    return (json.dumps(document, indent=1, sort_keys=True, ensure_ascii=False) + "\n").encode()


def content_id(folder: Path, manifest: Document) -> str:
    """The id by its definition in words, with neither the writer's code nor the reader's."""
    digest = hashlib.sha256()
    trap = manifest["trap"]
    states = {line["name"]: line["states"] for line in trap["lines"]}
    for block in manifest["blocks"]:
        head, *rows = [
            line.split(",") for line in (folder / block["table"]).read_text().splitlines()
        ]
        kept = [at for at, name in enumerate(head) if not name.endswith(".V")]
        drives = []
        if block["drives"]:
            lines = (folder / block["drives"]).read_text().splitlines()[1:]
            drives = [[cell for cell in line.split(",") if cell] for line in lines]
        first = {
            "converters": [one["name"] for one in trap["converters"]],
            "drives": drives,
            "lines": [one["name"] for one in trap["lines"]],
            "rows": len(rows),
            "switches": [one["name"] for one in trap["switches"]],
            "tick_s": block["tick_s"],
            "trigger": block["trigger"],
        }
        text = json.dumps(first, sort_keys=True, ensure_ascii=False, separators=(",", ":"))
        digest.update(text.encode() + b"\n")
        for row in rows:
            for at in kept:
                words = states.get(head[at])
                number = words.index(row[at]) if words and row[at] in words else row[at]
                try:
                    digest.update(struct.pack("<q", int(number)))
                except (ValueError, struct.error):
                    digest.update(b"not a number")
    return digest.hexdigest()


def edit_cell(folder: Path, table: str, row: int, column: str, text: str) -> None:
    """Replace one cell of a table; row 0 is the first after the header."""
    edit_cells(folder, table, {(row, column): text})


def edit_cells(folder: Path, table: str, cells: dict[tuple[int, str], str]) -> None:
    """Replace cells of a table by (row, column)."""
    path = folder / table
    head, *rows = [line.split(",") for line in path.read_bytes().decode().split("\r\n")]
    for (row, column), text in cells.items():
        rows[row][head.index(column)] = text
    path.write_bytes("\r\n".join(",".join(line) for line in (head, *rows)).encode())


def edit_code(folder: Path, table: str, row: int, name: str, code: int) -> None:
    """Replace a code together with its volts, so that only what it means is wrong."""
    edit_codes(folder, table, name, {row: code})


def edit_codes(folder: Path, table: str, name: str, codes: dict[int, int]) -> None:
    """Replace codes by row, each together with its volts."""
    manifest = json.loads((folder / "manifest.json").read_bytes())
    (one,) = [one for one in manifest["trap"]["converters"] if one["name"] == name]
    cells = {(row, f"{name}.code"): str(code) for row, code in codes.items()}
    cells |= {(row, f"{name}.V"): volts(one, code) for row, code in codes.items()}
    edit_cells(folder, table, cells)


def volts(one: Document, code: int) -> str:
    """Electrode volts of a code by exact rationals, as a table writes them."""
    low, high, gain, offset = (
        Fraction(one[key]) for key in ("low_V", "high_V", "gain", "offset_V")
    )
    exact = gain * (low + code * (high - low) / (2 ** one["bits"] - 1)) + offset
    return repr(float(exact))
