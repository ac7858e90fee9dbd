"""The rules of the house, each a function over a folder → its offenders, one sentence each.

Nothing here is imported from the package: the rules read the files.  There is no list of
exceptions; whoever breaks a rule mends the file or changes the rule here, for everybody.
"""

from __future__ import annotations

import ast
import re
import sys
from collections.abc import Iterable, Iterator
from fnmatch import fnmatch
from pathlib import Path

PACKAGE = "wellseq"
FLOORS = {
    "base": 0,
    "text": 1,
    "model": 2,
    "fields": 3,
    "timeline": 4,
    "wells": 5,
    "clouds": 6,
    "rules": 7,
    "checks": 8,
    "emit": 9,
    "reread": 9,
    "pipeline.py": 10,
    "review": 11,
    "editor": 12,
    "cli": 13,
}
"""Folder, or file, of the package → its floor; a floor may wait for its folder."""
AROUND = {"version.py": 0, "__init__.py": 14, "__main__.py": 14}
"""The doors of the house: what everybody may read, and what may read everything."""
LIBRARIES = {
    "text": {"lark"},
    "model": {"pydantic", "pydantic_core"},
    "fields": {"numpy", "scipy"},
    "timeline": {"numpy"},
    "wells": {"numpy"},
    "clouds": {"numpy", "scipy"},
    "rules": {"numpy"},
    "checks": {"numpy"},
    "emit": {"numpy", "pydantic", "h5py"},
    "editor": {"pygls", "lsprotocol"},
}
LINES_MAX, FUNCTION_MAX, WIDTH_MAX = 400, 60, 100
TOP_LEVEL = {
    *("README.md", "DEVELOPERS.md", "pyproject.toml"),
    *("wellseq", "grammar", "sequences", "tests", "safety"),
}
_UNFINISHED = "TO DO|FIX ME|XX X|HA CK|Not ImplementedError|mark[.]sk ip|pytest[.]sk ip|sk ipif"
_SET_ASIDE = "x fail|importor skip|break point[(]|pd b[.]"
_PLACES = "/wo rk/|/t mp/|[.][.]/sha red"
LEFTOVERS = re.compile("|".join((_UNFINISHED, _SET_ASIDE, _PLACES)).replace(" ", ""))
"""Unfinished business, tests that are set aside, places on the machine of whoever wrote a file."""
_MODULE = re.compile(rf"{PACKAGE}(\.\w+)+\.?")
Offences = Iterator[str]


def python_files(folder: Path) -> list[Path]:
    """The Python files below a folder, in order."""
    return sorted(path for path in folder.rglob("*.py") if "__pycache__" not in path.parts)


def tree_of(path: Path) -> ast.Module:
    """The syntax tree of a file."""
    return ast.parse(path.read_text(encoding="utf-8"), str(path))


def part_of(path: Path, package: Path) -> str:
    """The folder of the package that a file is in, or its own name."""
    return path.relative_to(package).parts[0]


def imported(tree: ast.Module) -> Iterator[tuple[int, str, bool]]:
    """Line and full name of everything that a file imports, and whether at its import.

    Modules named in a text, as for `import_module`, count where they begin with the package's name.
    """
    inner = {
        id(node)
        for function in ast.walk(tree)
        if isinstance(function, ast.FunctionDef | ast.AsyncFunctionDef)
        for node in ast.walk(function)
    }
    for node in ast.walk(tree):
        at_once = id(node) not in inner
        if isinstance(node, ast.Import):
            for name in node.names:
                yield node.lineno, name.name, at_once
        elif isinstance(node, ast.ImportFrom):
            for name in node.names:
                yield node.lineno, f"{'.' * node.level}{node.module or ''}.{name.name}", at_once
        elif isinstance(node, ast.Constant) and _MODULE.fullmatch(str(node.value)):
            yield node.lineno, str(node.value), False


def upward_imports(package: Path) -> Offences:
    """Imports of a floor above, of a sibling on the same floor, or of what is on no floor."""
    floors = {**FLOORS, **AROUND}
    for path in python_files(package):
        part = part_of(path, package)
        if part not in floors:
            yield f"{path.name}: {part} is on no floor"
            continue
        for line, name, _ in imported(tree_of(path)):
            if name.startswith("."):
                yield f"{path}:{line}: a relative import"
            words = name.split(".")
            if words[0] != PACKAGE or len(words) < 2:
                continue
            other = _part_named(words[1], floors)
            if other is None:
                yield f"{path}:{line}: {name} is on no floor"
            elif other != part and floors[other] >= floors[part]:
                yield f"{path}:{line}: floor {floors[part]} imports {name} of {floors[other]}"


def _part_named(word: str, floors: dict[str, int]) -> str | None:
    if word == "__version__":
        return "version.py"
    return next((part for part in (word, f"{word}.py") if part in floors), None)


def foreign_imports(package: Path) -> Offences:
    """Outside libraries where they do not belong; scipy anywhere but inside functions."""
    for path in python_files(package):
        allowed = LIBRARIES.get(part_of(path, package), set())
        for line, name, at_once in imported(tree_of(path)):
            root = name.split(".")[0]
            if root in sys.stdlib_module_names or root in (PACKAGE, ""):
                continue
            if root not in allowed:
                yield f"{path}:{line}: {root} does not belong here"
            elif root == "scipy" and at_once:
                yield f"{path}:{line}: scipy is imported before it is needed"


def long_things(folder: Path) -> Offences:
    """Files, functions and lines that are too long to be read."""
    for path in python_files(folder):
        lines = path.read_text(encoding="utf-8").split("\n")
        if len(lines) - 1 > LINES_MAX:
            yield f"{path} has {len(lines) - 1} lines"
        for number, line in enumerate(lines, 1):
            if len(line) > WIDTH_MAX:
                yield f"{path}:{number} is {len(line)} characters wide"
        for node in ast.walk(tree_of(path)):
            if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
                length = (node.end_lineno or node.lineno) - node.lineno + 1
                if length > FUNCTION_MAX:
                    yield f"{path}:{node.lineno}: {node.name} has {length} lines"


def step_verbs(root: Path) -> set[str]:
    """The verbs that have a file."""
    files = (root / PACKAGE / "model" / "steps").glob("*.py")
    return {path.stem.removesuffix("_") for path in files if path.stem != "__init__"}


def check_names(root: Path) -> set[str]:
    """The checks: the modules of their folder that say what they refuse."""
    names = set()
    for path in (root / PACKAGE / "checks").glob("*.py"):
        targets = [
            target.id
            for node in tree_of(path).body
            if isinstance(node, ast.Assign)
            for target in node.targets
            if isinstance(target, ast.Name)
        ]
        if "SAYS" in targets:
            names.add(path.stem.replace("_", "-"))
    return names


def lonely_members(root: Path) -> Offences:
    """Steps and checks without a test or a page, and tests and pages without a step or check."""
    verbs, checks = step_verbs(root), check_names(root)
    tests, pages = root / "tests", root / "grammar" / "steps"
    yield from _unlike("step", verbs, "test", _tests(tests / "model" / "steps"))
    yield from _unlike("step", verbs, "page", {path.stem for path in pages.glob("*.md")})
    house = {path.stem for path in (root / PACKAGE / "checks").glob("*.py")}
    # The machinery of checks has tests of its own in the same folder.
    own = {name for name in _tests(tests / "checks") if name not in house - _modules(checks)}
    yield from _unlike("check", _modules(checks), "test", own)
    safety = root / "safety" / "checks"
    yield from _unlike("check", checks, "page", {path.stem for path in safety.glob("*.md")})


def _modules(names: Iterable[str]) -> set[str]:
    return {name.replace("-", "_") for name in names}


def _tests(folder: Path) -> set[str]:
    return {path.stem.removeprefix("test_") for path in folder.glob("test_*.py")}


def _unlike(what: str, members: set[str], other: str, found: set[str]) -> Offences:
    for name in sorted(members - found):
        yield f"the {what} '{name}' has no {other}"
    for name in sorted(found - members):
        yield f"the {other} '{name}' has no {what}"


def leftovers(folder: Path) -> Offences:
    """Words that say that something is not finished, or where it was written."""
    for path in sorted(folder.rglob("*")):
        if path.suffix not in (".py", ".md", ".toml", ".lark", ".well", ".txt", ".rules"):
            continue
        for number, line in enumerate(path.read_text(encoding="utf-8").split("\n"), 1):
            match = LEFTOVERS.search(line)
            if match:
                yield f"{path}:{number}: {match[0]}"


def strays(root: Path) -> Offences:
    """Entries of the top folder that are not permitted there, as far as they are not ignored."""
    ignored = [
        line.strip().strip("/")
        for line in (root / ".gitignore").read_text(encoding="utf-8").split("\n")
        if line.strip()
    ]
    for path in sorted(root.iterdir()):
        fine = path.name in TOP_LEVEL or path.name.startswith(".")
        if not fine and not any(fnmatch(path.name, pattern) for pattern in ignored):
            yield f"{path.name} does not belong at the top"


def nameless_mistakes(root: Path) -> Offences:
    """Mistakes under a name that is no check's."""
    known = check_names(root)
    for path in python_files(root / PACKAGE):
        for line, name in mistake_names(tree_of(path)):
            if name not in known:
                yield f"{path}:{line}: no check is named '{name}'"


def mistake_names(tree: ast.Module) -> Iterator[tuple[int, str]]:
    """Line and name of every mistake that a file can make."""
    for node in ast.walk(tree):
        if not isinstance(node, ast.Call):
            continue
        given = [node.args[n] for n in _name_positions(node) if n < len(node.args)]
        given += [word.value for word in node.keywords if word.arg == "name"]
        for value in given:
            choices = [value.body, value.orelse] if isinstance(value, ast.IfExp) else [value]
            for choice in choices:
                if isinstance(choice, ast.Constant) and isinstance(choice.value, str):
                    yield node.lineno, choice.value


def _name_positions(call: ast.Call) -> tuple[int, ...]:
    """Which arguments of a call are names of mistakes."""
    function = call.func
    if isinstance(function, ast.Name):
        return {"Mistake": (0,), "Objection": (1,), "Fault": (1,)}.get(function.id, ())
    if not isinstance(function, ast.Attribute):
        return ()
    owner = function.value
    owner_name = owner.attr if isinstance(owner, ast.Attribute) else getattr(owner, "id", "")
    told = {("mistakes", "add"): (0,), ("names", "report"): (0,), ("self", "add"): (1,)}
    if function.attr in ("wrong", "_wrong"):  # with a place and a message, it is about a text
        return (0,) if len(call.args) >= 3 else ()
    return (0,) if function.attr == "refuse" else told.get((owner_name, function.attr), ())
