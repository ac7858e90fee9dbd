"""Small faults planted one at a time into the safety core: the tests must see each.

    python tests/trials/mutation.py [SHARE] [GROUP...]

Quantiser, clock, writer, second reader and judge are changed in one place of their syntax tree (a
comparison, a sign, a number, a condition, a refusal left out), and the tests of that part run in a
process of its own.  SHARE is how many of all mutants are run, 1 for all.  Printed are, per group,
how many were made, run and killed; the survivors, each with its line; and whether the canary died,
a fault that no test may miss.  Survivors that change nothing that can be seen are listed in
`EQUIVALENT` with the reason.
"""

from __future__ import annotations

import ast
import copy
import importlib.abc
import importlib.util
import os
import signal
import sys
import time
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
TIMEOUT_s = 90
GROUPS: dict[str, tuple[tuple[str, ...], tuple[str, ...]]] = {
    "clock": (("timeline/clocks.py",), ("timeline/test_clocks.py", "timeline/test_ship.py")),
    "quantiser": (
        ("timeline/ship.py",),
        ("timeline/test_ship.py", "emit/test_roundings_csv.py", "checks/test_off_clock.py"),
    ),
    "writer": (
        tuple(
            f"emit/{name}.py"
            for name in (
                *("columns", "lines", "content", "npy", "hdf5_columns", "expand", "single"),
                *("keys", "publish", "swap", "also/npz", "also/hdf5", "files/roundings_csv"),
            )
        ),
        tuple(
            f"emit/test_{name}.py"
            for name in (
                *("table_csv", "blocks_and_content", "npz", "hdf5", "expand", "single", "keys"),
                *("roundings_csv", "publish", "lock_and_swap"),
            )
        ),
    ),
    "second reader": (
        tuple(
            f"reread/{name}.py"
            for name in (
                *("claims", "content", "course", "depth", "descriptions", "drives", "folder"),
                *("forms", "hdf5", "hdf5_bytes", "meaning", "neighbours", "npz", "plan"),
                *("reading", "roundings", "rules", "steps", "table", "zipped"),
            )
        ),
        ("reread",),
    ),
    "judge": (
        ("base/finding.py", "checks/judging.py"),
        ("checks/test_judging.py", "checks/test_numbers.py", "checks/test_case.py"),
    ),
}
"""Group → (files of the package, tests that must see a fault in them)."""
CANARIES = {
    "clock": ("timeline/clocks.py", "Fraction(1, 2)", "Fraction(0)"),
    "quantiser": ("timeline/ship.py", "converter.code_V + 0.5", "converter.code_V + 1.5"),
    "writer": ("emit/columns.py", "start + slope * code", "start - slope * code"),
    "second reader": ("reread/table.py", "ticks[at] <= ticks[at - 1]", "False"),
    "judge": ("base/finding.py", "<= sign * self.value", ">= sign * self.value"),
}
"""Group → (file, what is replaced, by what): a fault that must be seen."""
EQUIVALENT: dict[str, str] = {}
"""`file:line kind` → why no test can see it."""
SWAPS: dict[type[ast.AST], type[ast.AST]] = {
    ast.Lt: ast.LtE,
    ast.LtE: ast.Lt,
    ast.Gt: ast.GtE,
    ast.GtE: ast.Gt,
    ast.Eq: ast.NotEq,
    ast.NotEq: ast.Eq,
    ast.In: ast.NotIn,
    ast.NotIn: ast.In,
    ast.Is: ast.IsNot,
    ast.IsNot: ast.Is,
    ast.Add: ast.Sub,
    ast.Sub: ast.Add,
    ast.Mult: ast.Add,
    ast.Div: ast.Mult,
    ast.FloorDiv: ast.Mult,
    ast.And: ast.Or,
    ast.Or: ast.And,
}


@dataclass(frozen=True)
class Mutant:
    """A changed module: its file, the line and kind of the change, and its source."""

    file: str
    line: int
    kind: str
    source: str

    def __str__(self) -> str:
        return f"{self.file}:{self.line} {self.kind}"


def mutants(file: str) -> Iterator[Mutant]:
    """Every mutant of a file of the package, in order of its syntax tree."""
    text = (ROOT / "wellseq" / file).read_text("utf-8")
    tree = ast.parse(text)
    sites = [(at, node) for at, node in enumerate(ast.walk(tree))]
    quiet = _quiet(tree)
    for at, node in sites:
        if at in quiet:
            continue
        for kind in _kinds(node):
            changed = copy.deepcopy(tree)
            _apply(list(ast.walk(changed))[at], kind)
            source = ast.unparse(ast.fix_missing_locations(changed))
            yield Mutant(file, getattr(node, "lineno", 0), kind, source)


def _quiet(tree: ast.Module) -> set[int]:
    """The nodes whose change is no fault: annotations, and the words of messages."""
    order = {id(node): at for at, node in enumerate(ast.walk(tree))}
    found: set[int] = set()

    def silence(node: ast.AST | None) -> None:
        if node is not None:
            found.update(order[id(inner)] for inner in ast.walk(node))

    for node in ast.walk(tree):
        if isinstance(node, ast.FunctionDef):
            silence(node.returns)
            for argument in (*node.args.args, *node.args.kwonlyargs):
                silence(argument.annotation)
            for decorator in node.decorator_list:
                silence(decorator)
        elif isinstance(node, ast.AnnAssign):
            silence(node.annotation)
        elif isinstance(node, ast.JoinedStr):
            silence(node)
        elif isinstance(node, ast.ClassDef):
            for decorator in node.decorator_list:
                silence(decorator)
    return found


def _kinds(node: ast.AST) -> Iterator[str]:
    if isinstance(node, ast.Compare) and len(node.ops) == 1:
        yield "comparison"
    elif isinstance(node, ast.Compare):
        yield from (f"comparison {at}" for at in range(len(node.ops)))
    elif (isinstance(node, ast.BinOp) and type(node.op) in SWAPS) or isinstance(node, ast.BoolOp):
        yield "operator"
    elif isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.Not):
        yield "not left out"
    elif isinstance(node, ast.Constant) and type(node.value) is int:
        yield "number"
    elif isinstance(node, ast.Constant) and type(node.value) is bool:
        yield "flag"
    elif isinstance(node, ast.If):
        yield "never"
    elif isinstance(node, ast.Raise):
        yield "refusal left out"


def _apply(node: ast.AST, kind: str) -> None:
    if isinstance(node, ast.Compare):
        at = int(kind.rpartition(" ")[2]) if " " in kind else 0
        node.ops[at] = SWAPS[type(node.ops[at])]()  # type: ignore[call-overload]
    elif isinstance(node, ast.BinOp | ast.BoolOp):
        node.op = SWAPS[type(node.op)]()  # type: ignore[assignment]
    elif isinstance(node, ast.UnaryOp):
        node.op, node.operand = ast.Not(), ast.UnaryOp(ast.Not(), node.operand)
    elif isinstance(node, ast.Constant):
        node.value = not node.value if type(node.value) is bool else node.value + 1
    elif isinstance(node, ast.If):
        node.test = ast.Constant(False)
    elif isinstance(node, ast.Raise):
        node.exc, node.cause = ast.parse("StopIteration").body[0].value, None  # type: ignore


class Planted(importlib.abc.MetaPathFinder, importlib.abc.Loader):
    """Serves one module of the package from a changed source."""

    def __init__(self, mutant: Mutant) -> None:
        self.mutant = mutant
        self.name = "wellseq." + mutant.file.removesuffix(".py").replace("/", ".")

    def find_spec(self, name: str, path: object, target: object = None) -> object:
        if name != self.name:
            return None
        file = str(ROOT / "wellseq" / self.mutant.file)
        return importlib.util.spec_from_file_location(name, file, loader=self)

    def create_module(self, spec: object) -> None:
        return None

    def exec_module(self, module: object) -> None:
        file = str(ROOT / "wellseq" / self.mutant.file)
        exec(compile(self.mutant.source, file, "exec"), module.__dict__)


def survives(mutant: Mutant | None, tests: tuple[str, ...]) -> bool:
    """Whether all tests pass with a mutant in place; None for the house as it stands."""
    child = os.fork()
    if not child:
        _run(mutant, tests)
    over = time.monotonic() + TIMEOUT_s
    while time.monotonic() < over:
        done, status = os.waitpid(child, os.WNOHANG)
        if done:
            return status == 0
        time.sleep(0.02)
    os.killpg(child, signal.SIGKILL)
    os.waitpid(child, 0)
    return False


def _run(mutant: Mutant | None, tests: tuple[str, ...]) -> None:
    os.setpgid(0, 0)
    code = 70
    try:
        import pytest

        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, 1)
        os.dup2(nowhere, 2)
        if mutant is not None:
            sys.meta_path.insert(0, Planted(mutant))
        paths = [str(ROOT / "tests" / test) for test in tests]
        options = ["-x", "-q", "--hypothesis-seed=0", "--assert=plain", f"--rootdir={ROOT}"]
        code = int(pytest.main([*options, *paths]))
    finally:
        os._exit(code)


def canary(group: str) -> Mutant:
    """The fault of a group that must be seen."""
    file, old, new = CANARIES[group]
    text = (ROOT / "wellseq" / file).read_text("utf-8")
    assert old in text, (file, old)
    return Mutant(file, 0, "canary", text.replace(old, new))


def warm() -> None:
    """Load what every run needs and no mutant changes, once for all."""
    sys.path.insert(0, str(ROOT))
    for name in ("pytest", "numpy", "h5py", "lark", "pydantic", "jsonschema"):
        importlib.import_module(name)


def main() -> int:
    """Run the trial and print its figures; 1 when a canary lives or a group stays below 90 %."""
    share = float(sys.argv[1]) if len(sys.argv) > 1 else 1.0
    chosen = sys.argv[2:] or list(GROUPS)
    warm()
    poor = 0
    for group in chosen:
        files, tests = GROUPS[group]
        assert survives(None, tests), f"the tests of the {group} fail as the house stands"
        assert not survives(canary(group), tests), f"the canary of the {group} lives"
        every = [mutant for file in files for mutant in mutants(file)]
        step = max(1, round(1 / share))
        picked = every[step // 2 :: step]
        run, alive = 0, []
        for mutant in picked:
            run += 1
            if survives(mutant, tests) and str(mutant) not in EQUIVALENT:
                alive.append(mutant)
        assert run == len(picked)
        killed = run - len(alive)
        poor += killed < 0.9 * run
        said = f"{len(every)} made, {len(picked)} to be run, {run} run, {killed} killed"
        print(f"{group}: {said} ({killed / run:.1%}); the canary died")
        for mutant in alive:
            print(f"    survives {mutant}")
        sys.stdout.flush()
    return int(poor > 0)


if __name__ == "__main__":
    sys.exit(main())
