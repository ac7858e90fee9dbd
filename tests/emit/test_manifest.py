"""The manifest: canonical, sealed, complete, and independent of where the program was started."""

from __future__ import annotations

import hashlib
import json
from dataclasses import replace
from fractions import Fraction
from pathlib import Path

import made_case

from wellseq.checks.case import Case
from wellseq.checks.judging import clear
from wellseq.emit.manifest import Written, manifest

FILES = {"block-1-run.csv": Written("ab" * 32, 7)}


def document(case: Case | None = None) -> dict[str, object]:
    key = clear(case if case is not None else made_case.case())
    assert key is not None
    read: dict[str, object] = json.loads(manifest(key, FILES))
    return read


def test_it_is_canonical_json_and_sealed_by_its_digest() -> None:
    content = manifest(made_case.cleared(), FILES)
    read = json.loads(content)
    assert content == _canonical(read)
    digest = read.pop("digest")
    assert hashlib.sha256(_canonical(read)).hexdigest() == digest
    read["lets"] = {"wall": "81 V"}
    assert hashlib.sha256(_canonical(read)).hexdigest() != digest


def _canonical(read: object) -> bytes:
    text = json.dumps(read, indent=1, sort_keys=True, ensure_ascii=False)
    return f"{text}\n".encode()


def test_it_says_what_was_not_examined() -> None:
    said = " ".join(str(one) for one in document()["not_examined"])
    assert "No forecast of any cloud was made" in said
    assert "No forecast of any cloud was made" in said


def test_it_tells_allowances_assumptions_lets_and_counts() -> None:
    read = document()
    assert read["allowances"] == [
        {
            "name": "off-clock",
            "reason": "dumped | next",
            "file": "night.well",
            "line": 6,
            "column": 3,
            "covers": 1,
            "steps": [1, 2],
        }
    ]
    (assumed,) = read["assumed"]
    assert (assumed["quantity"], assumed["value"], assumed["unit"]) == ("temperature", 140.0, "K")
    assert read["lets"] == {"wall": "80 V"}
    assert read["verdicts"] == {"pass": 2, "allowed": 1}


def test_times_are_exact_and_the_largest_roundings_come_first() -> None:
    read = document()
    run, caught = read["blocks"]
    assert (run["tick_s"], run["tick_decimal_s"]) == ("1/100000000", "0.00000001")
    assert (caught["latency_s"], caught["within_s"]) == ("1/4000000", "130")
    errors = [abs(Fraction(one["error_s"])) for one in read["roundings_largest"]]
    assert errors == sorted(errors, reverse=True)
    assert errors[0] > 0


def test_the_end_is_what_the_last_row_leaves() -> None:
    end = document()["end"]
    assert end["levels"] == {"hv": 0}
    assert end["states"] == {"shutter": "open", "vacuum_ok": "on"}


def test_started_elsewhere_it_says_the_same() -> None:
    case = made_case.case()
    assert case.sequence is not None
    assert case.trap is not None
    far = "../some/where"
    sources = tuple(
        replace(source, shown=f"{far}/{source.shown}") for source in case.sequence.sources
    )
    trap = case.trap.model_copy(update={"file": f"{far}/gorse.trap.toml"})
    allowances = tuple(
        replace(one, place=replace(one.place, file=f"{far}/night.well"))
        for one in case.sequence.allowances
    )
    elsewhere = replace(
        case,
        path=Path(far) / "night.well",
        shown=f"{far}/night.well",
        trap=trap,
        sequence=replace(
            case.sequence,
            file=f"{far}/night.well",
            trap=trap,
            sources=sources,
            allowances=allowances,
        ),
        sources=sources,
    )
    there, here = document(elsewhere), document(case)
    # The step's place names the file where it was, so that `covers` differs and is left out.
    assert [one["file"] for one in there["allowances"]] == ["night.well"]
    for read in (there, here):
        read.pop("digest")
        read.pop("allowances")
    assert there == here
