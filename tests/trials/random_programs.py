"""Random valid programs: every table against the slow interpreter, to `staircase` plus half a code.

    python tests/trials/random_programs.py [PROGRAMS] [FIRST]

The programs of `tests/differential` with numbers its tests do not use.  What was drawn must agree
exactly in time and to 1e-9 V; what is shipped may differ by `staircase` plus half a code and by
half a tick.
"""

from __future__ import annotations

import sys
import tempfile
from collections import Counter
from functools import cache
from pathlib import Path
from random import Random

ROOT = Path(__file__).resolve().parents[2]
HERE = [str(ROOT), str(ROOT / "tests" / "differential")]
sys.path[:0] = [path for path in HERE if path not in sys.path]

from comparison import drawn_differences, shipped_differences  # noqa: E402
from programs import program  # noqa: E402
from test_differential import Runner  # noqa: E402

from wellseq.model import build as model  # noqa: E402


def trial(home: Path, first: int, count: int) -> tuple[Counter[str], list[str]]:
    """(steps played, by verb; differences found) of so many programs from a number on."""
    runner, verbs, wrong = Runner(home), Counter[str](), []
    for number in range(first, first + count):
        made = program(number)
        both = runner.run(made)
        found = drawn_differences(both.played, both.timeline, Random(number))
        found += shipped_differences(both.played, both.shipped)
        if found:
            wrong.append(f"program {number}: {found}")
        verbs.update(origin.step for origin in both.timeline.origins)
    return verbs, wrong


def main() -> int:
    """Run the long trial and print its figures; 1 when anything differs."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 20_000
    first = int(sys.argv[2]) if len(sys.argv) > 2 else 10_000
    model.read_trap = cache(model.read_trap)
    with tempfile.TemporaryDirectory() as home:
        verbs, wrong = trial(Path(home), first, count)
    print(f"{count} programs, {sum(verbs.values())} steps, {len(wrong)} differ;", dict(verbs))
    print("\n".join(wrong[:3]))
    return int(bool(wrong))


if __name__ == "__main__":
    sys.exit(main())
