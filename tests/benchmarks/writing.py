"""How long a block of 1,000,000 rows and 33 outputs takes in every form, beside numpy.save.

    python tests/benchmarks/writing.py [ROWS] [RUNS]

prints a table: the least wall time over interleaved runs (files flushed to the disk on all sides),
ratios within one run, and the peak memory of a process that does nothing else.  Goals: NPZ and HDF5
at most 3 times numpy.save of the same integers, CSV at most 60 times.  The integers are those the
program holds, ticks and codes of 64 bits; beside them stands numpy.save of codes of 16 bits.
"""

from __future__ import annotations

import os
import resource
import sys
import tempfile
import time
from collections.abc import Callable, Iterable
from dataclasses import replace
from fractions import Fraction
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT), str(ROOT / "tests" / "emit")]

import made_case  # noqa: E402
import numpy as np  # noqa: E402

from wellseq.checks.judging import Cleared, clear  # noqa: E402
from wellseq.emit.also import hdf5, npz  # noqa: E402
from wellseq.emit.content import content_id  # noqa: E402
from wellseq.emit.files import table_csv  # noqa: E402
from wellseq.emit.single import write_new  # noqa: E402
from wellseq.model.trap import Converter  # noqa: E402
from wellseq.timeline.shipped import Shipped, ShippedBlock  # noqa: E402

OUTPUTS = 33
MOVING = 5
RAMP_ROWS = 20_000
GOALS = {"NPZ": 3.0, "HDF5": 3.0, "CSV": 60.0}
Job = Callable[[Path], None]


def ramps(rows: int) -> np.ndarray:
    """Codes (rows, 33): five outputs at a time go straight to new values, the others stand."""
    random = np.random.default_rng(7)
    codes = np.zeros((rows, OUTPUTS), np.int64)
    standing = random.integers(20_000, 40_000, OUTPUTS)
    for start in range(0, rows, RAMP_ROWS):
        stop = min(start + RAMP_ROWS, rows)
        codes[start:stop] = standing
        for output in random.choice(OUTPUTS, MOVING, replace=False):
            to = int(random.integers(0, 65536))
            line = np.linspace(standing[output], to, stop - start)
            codes[start:stop, output] = np.round(line).astype(np.int64)
            standing[output] = to
    return codes


def cleared(rows: int) -> Cleared:
    """A clear case with one block of so many rows."""
    case = made_case.case()
    assert case.trap is not None
    lv1 = case.trap.output("lv1")
    assert isinstance(lv1, Converter)
    outputs = tuple(lv1.model_copy(update={"name": f"o{n:02d}"}) for n in range(OUTPUTS))
    electrodes = tuple(
        case.trap.electrodes[0].model_copy(
            update={"name": f"E{n}", "from_m": n / 50, "to_m": n / 50 + 0.01, "output": f"o{n:02d}"}
        )
        for n in range(OUTPUTS)
    )
    changed = {"outputs": outputs, "electrodes": electrodes, "lines": (), "rest": ()}
    bare = case.trap.model_copy(update=changed)
    fields = type(bare).model_fields
    trap = type(bare).model_validate({name: getattr(bare, name) for name in fields})
    none = np.zeros((rows, 0), np.int64)
    ticks = np.cumsum(np.random.default_rng(8).integers(1, 400, rows))
    ticks[0] = 0
    block = replace(made_case.blocks()[0], drives=())
    whole = ShippedBlock(block, Fraction(1, 10**6), ticks, ramps(rows), none, none, (), ())
    shipped = Shipped(tuple(one.name for one in outputs), (), (), (whole,), {})
    key = clear(replace(case, trap=trap, shipped=shipped))
    assert key is not None
    return key


def jobs(key: Cleared) -> dict[str, Job]:
    """Name → what writes one file."""
    assert key.case.shipped is not None
    block = key.case.shipped.blocks[0]

    def save(arrays: Iterable[np.ndarray], path: Path) -> None:
        with path.open("wb") as stream:
            for array in arrays:
                np.save(stream, array, allow_pickle=False)
            stream.flush()
            os.fsync(stream.fileno())

    def form(module: object, path: Path) -> None:
        ((_, pieces),) = module.write(key)  # type: ignore[attr-defined]
        write_new(path, pieces)

    content_id(key.case.shipped)  # once for all files of a folder
    return {
        "numpy.save, 64 bits": lambda path: save((block.ticks, block.codes), path),
        "numpy.save, 16 bits": lambda path: save((block.codes.astype("<u2"),), path),
        "NPZ": lambda path: form(npz, path),
        "HDF5": lambda path: form(hdf5, path),
        "CSV": lambda path: form(table_csv, path),
    }


def measured(job: Job, folder: Path) -> tuple[float, float, float]:
    """(seconds, peak MB beyond what was there before, MB written) in a process of its own."""
    path = folder / "file"
    reading, writing = os.pipe()
    child = os.fork()
    if not child:
        before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
        start = time.perf_counter()
        job(path)
        took = time.perf_counter() - start
        peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - before
        os.write(writing, f"{took} {peak / 1e3}".encode())
        os._exit(0)
    _, status = os.waitpid(child, 0)
    assert status == 0
    os.close(writing)
    took, peak = map(float, os.read(reading, 100).split())
    os.close(reading)
    size = path.stat().st_size / 1e6
    path.unlink()
    return took, peak, size


def main() -> int:
    """Print the table; 1 when a goal is missed."""
    rows = int(sys.argv[1]) if len(sys.argv) > 1 else 1_000_000
    runs = int(sys.argv[2]) if len(sys.argv) > 2 else 3
    key = cleared(rows)
    assert key.case.shipped is not None
    start = time.perf_counter()
    content_id(key.case.shipped)
    identity_s = time.perf_counter() - start
    work = jobs(key)
    times: dict[str, list[float]] = {name: [] for name in work}
    peaks: dict[str, float] = {}
    sizes: dict[str, float] = {}
    with tempfile.TemporaryDirectory() as folder:
        for _ in range(runs):
            for name, job in work.items():
                took, peak, size = measured(job, Path(folder))
                times[name].append(took)
                peaks[name] = max(peaks.get(name, 0.0), peak)
                sizes[name] = size
    print(f"{rows} rows x {OUTPUTS} outputs, {MOVING} of them moving; {runs} interleaved runs")
    print("                       least s       MB   peak MB   x 64 bits   x 16 bits    goal")
    wide, narrow = (min(times[f"numpy.save, {bits} bits"]) for bits in (64, 16))
    missed = 0
    for name, took in times.items():
        ratio, goal = min(took) / wide, GOALS.get(name)
        missed += goal is not None and ratio > goal
        said = f"{goal:7.0f}" if goal else ""
        print(
            f"{name:22} {min(took):7.3f} {sizes[name]:8.1f} {peaks[name]:9.0f} "
            f"{ratio:11.2f} {min(took) / narrow:11.2f} {said}"
        )
    print(f"content id, worked out once for all files: {identity_s:.3f} s")
    return int(missed > 0)


if __name__ == "__main__":
    sys.exit(main())
