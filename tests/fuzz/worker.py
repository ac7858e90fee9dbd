"""Run in a process of its own with bounded memory: compile many damaged files and report on it.

Usage: worker.py STAGE FIRST LAST.  Writes one JSON object: how many files were sound, mistaken and
at fault, the slowest (CPU seconds), and the greatest resident memory (bytes).
"""

from __future__ import annotations

import json
import re
import resource
import sys
import tempfile
import time
import traceback
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path

from monsters import monsters
from mutations import BENCH, GOOD, SEQUENCES, mutated

from wellseq.base.finding import Mistake
from wellseq.base.place import Place

MEMORY_BYTES = 512 * 2**20
SECONDS_MAX = 2.0
Texts = dict[str, bytes]
"""The files that a place may point into, by the name that places bear."""
Outcome = tuple[bool, Iterable[Place]]
"""Whether the file is sound, and the places of what is wrong with it."""


def place_fault(place: Place, texts: Texts) -> str:
    """Why a place is not inside its file; empty when it is."""
    if place.file not in texts:
        return f"{place} is in no file that was read"
    text = texts[place.file].decode("utf-8", "replace").removeprefix("\ufeff")
    lines = re.split(r"\r\n|\n|\r", text)
    start, end = (place.line, place.column), (place.end_line, place.end_column)
    for line, column in (start, end):
        if not 1 <= line <= len(lines):
            return f"line {line} of {place} is outside the file"
        line_end = line < len(lines) and start < end == (
            line,
            column,
        )  # the end of a line may be meant
        if not 1 <= column <= len(lines[line - 1]) + 1 + line_end:
            return f"{line}:{column} of {place} is outside its line"
    return f"{place} ends before it begins" if end < start else ""


@dataclass(frozen=True)
class Examined:
    """What came of one file: its fault (empty when there is none), CPU seconds, sound or not."""

    fault: str
    spent_s: float
    sound: bool = False


def examine(
    call: Callable[[], Outcome], texts: Texts, seconds_max: float = SECONDS_MAX
) -> Examined:
    """Call, and see that it ends in time, with a sound file or with a place that is inside it."""
    start = time.process_time()
    try:
        sound, places = call()
        places = list(places)
    except BaseException as error:
        fault = f"{type(error).__name__}: {traceback.format_exc(limit=-3)}"
        return Examined(fault, time.process_time() - start)
    spent_s = time.process_time() - start
    if spent_s > seconds_max:
        return Examined(f"took {spent_s:.1f} s", spent_s)
    if not sound and not places:
        return Examined("not sound, and nothing says why", spent_s)
    fault = next(filter(None, (place_fault(place, texts) for place in places)), "")
    return Examined(fault, spent_s, sound)


def sequence_outcome(data: bytes, path: Path) -> Outcome:
    """A sequence file through the front: decoded, parsed, built."""
    from wellseq.model import build as model
    from wellseq.text.parse import parse
    from wellseq.text.read import decode

    text = decode(data, path.name)
    if isinstance(text, Mistake):
        return False, [text.place]
    built = model.build(parse(text, path.name), path, known_findings=("well-too-shallow",))
    return not built.mistakes, [mistake.place for mistake in built.mistakes]


def trap_outcome(data: bytes, path: Path) -> Outcome:
    """A trap file; only what is no UTF-8 is read from the disk."""
    from wellseq.model.trap_file import read_trap, trap_from

    try:
        trap, mistakes = trap_from(data.decode("utf-8"), path.name)
    except UnicodeDecodeError:
        path.write_bytes(data)
        trap, mistakes = read_trap(path, path.name)
    assert (trap is None) == bool(mistakes)
    return trap is not None, [mistake.place for mistake in mistakes]


def check_outcome(data: bytes, path: Path) -> Outcome:
    """A sequence file through the whole compiler."""
    from wellseq.pipeline import compile_file

    path.write_bytes(data)
    case = compile_file(path)
    places = [finding.place for finding in case.findings if finding.blocks]
    name = path.as_posix()
    folder = f"{path.parent.as_posix()}/"
    return not places, [_renamed(place, name, folder) for place in places]


def _renamed(place: Place, name: str, folder: str) -> Place:
    """The same place, in a file named without its folder."""
    assert place.file.startswith(folder), (place, name)
    return replace(place, file=place.file.removeprefix(folder))


OUTCOMES = {"sequence": sequence_outcome, "check": check_outcome}


def files_of(stage: str, first: int, last: int) -> Iterator[tuple[str, bool, bytes]]:
    """Name, whether it is a trap file, and content of the files of a stage."""
    if stage == "monsters":
        for name, (is_trap, data) in list(monsters().items())[first:last]:
            yield name, is_trap, data
        return
    bases = (BENCH,) if stage == "trap" else SEQUENCES
    for number in range(first, last):
        yield f"{stage} {number}", stage == "trap", mutated(number, bases)


def run(stage: str, first: int, last: int, folder: Path) -> dict:
    """Examine the files of a stage from the first up to, not including, the last."""
    from wellseq.model import build as model

    (folder / "bench.trap.toml").write_bytes(BENCH)
    (folder / "good.well").write_bytes(GOOD)
    (folder / "run.well").write_bytes(SEQUENCES[0])
    model.read_trap = cache(model.read_trap)  # the sound one, thousands of times
    report = {"sound": 0, "mistaken": 0, "faults": [], "slowest_s": 0.0, "slowest": ""}
    for name, is_trap, data in files_of(stage, first, last):
        path = folder / ("damaged.trap.toml" if is_trap else "run.well")
        outcome = trap_outcome if is_trap else OUTCOMES.get(stage, sequence_outcome)
        texts = {path.name: data, "bench.trap.toml": BENCH, "good.well": GOOD}
        examined = examine(lambda: outcome(data, path), texts)  # noqa: B023  called at once
        if examined.spent_s > report["slowest_s"]:
            report["slowest_s"], report["slowest"] = examined.spent_s, name
        if examined.fault:
            report["faults"].append(f"{name}: {examined.fault}")
        else:
            report["sound" if examined.sound else "mistaken"] += 1
    report["memory_bytes"] = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * 1024
    return report


def bound_memory(more_bytes: int = MEMORY_BYTES) -> None:
    """No more address space than is in use now, and so much."""
    pages = int(Path("/proc/self/statm").read_text().split()[0])
    limit = pages * resource.getpagesize() + more_bytes
    resource.setrlimit(resource.RLIMIT_AS, (limit, limit))


def main(stage: str, first: str, last: str) -> None:
    """Run one stage in a folder of its own."""
    if stage == "check":
        import wellseq.pipeline  # noqa: F401  its libraries are no part of what a file costs
    bound_memory()
    with tempfile.TemporaryDirectory() as folder:
        print(json.dumps(run(stage, int(first), int(last), Path(folder))))


if __name__ == "__main__":
    main(*sys.argv[1:])
