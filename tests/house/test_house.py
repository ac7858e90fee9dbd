"""The rules of the house, kept by the project, and each seen to catch a planted offender."""

from __future__ import annotations

import os
import re
import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path

import docstrings
import pytest
import rules

from wellseq.checks.judging import check_names
from wellseq.model.steps import verbs

ROOT = Path(__file__).resolve().parents[2]
PACKAGE = ROOT / rules.PACKAGE
WRITTEN = ("wellseq", "tests", "grammar", "safety", "sequences")
HEAVY = ("numpy", "lark", "scipy", "pydantic")
Rule = Callable[[Path], Iterator[str]]

KEPT: list[tuple[Rule, Path]] = [
    (rules.upward_imports, PACKAGE),
    (rules.foreign_imports, PACKAGE),
    (rules.long_things, PACKAGE),
    (rules.long_things, ROOT / "tests"),
    (rules.lonely_members, ROOT),
    (rules.strays, ROOT),
    (rules.nameless_mistakes, ROOT),
    (docstrings.undocumented, PACKAGE),
    (docstrings.unitless, PACKAGE),
    *((rules.leftovers, ROOT / folder) for folder in WRITTEN),
]


@pytest.mark.parametrize(
    ("rule", "folder"), KEPT, ids=[f"{rule.__name__}-{folder.name}" for rule, folder in KEPT]
)
def test_the_house_keeps_its_rules(rule: Rule, folder: Path) -> None:
    offences = list(rule(folder))
    assert not offences, "\n".join(offences)


def test_the_rules_look_at_the_whole_house() -> None:
    assert len(rules.python_files(PACKAGE)) > 100
    assert rules.step_verbs(ROOT) == set(verbs())
    assert rules.check_names(ROOT) == set(check_names())
    names = [name for path in rules.python_files(PACKAGE) for name in _names_in(path)]
    assert len(names) > 100
    assert {"syntax", "unknown-name", "too-large", "off-clock", "line-misused"} <= set(names)


def _names_in(path: Path) -> list[str]:
    return [name for _, name in rules.mistake_names(rules.tree_of(path))]


def standing(package: Path) -> dict[str, int]:
    """The floors that have a folder or a file."""
    present = {path.name for path in package.iterdir() if not path.name.startswith("__pyc")}
    floors = {**rules.FLOORS, **rules.AROUND}
    assert present <= set(floors), present - set(floors)
    return {name: floor for name, floor in rules.FLOORS.items() if name in present}


def drawn(page: str) -> dict[str, tuple[int, set[str]]]:
    """The map of a page: folder → its floor and its outside libraries."""
    table = page.split("<!-- floors -->")[1].split("<!-- /floors -->")[0]
    rows = [
        [cell.strip() for cell in line.strip().strip("|").split("|")]
        for line in table.strip().split("\n")
    ]
    return {
        row[1].strip("`").rstrip("/"): (int(row[0]), set(re.findall(r"\w+", row[-1])))
        for row in rows[2:]
    }


def test_the_map_in_the_developers_page_is_the_house() -> None:
    page = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    libraries = {
        name: rules.LIBRARIES.get(name, set()) - {"pydantic_core"} for name in rules.FLOORS
    }
    assert drawn(page) == {
        name: (floor, libraries[name]) for name, floor in standing(PACKAGE).items()
    }


def test_a_map_that_differs_is_seen() -> None:
    page = "<!-- floors -->\n| floor | folder |\n|---|---|\n| 3 | `base/` |\n<!-- /floors -->"
    assert drawn(page) == {"base": (3, {"base"})}
    assert drawn(page) != {"base": (0, set())}


def test_an_unknown_folder_is_seen(tmp_path: Path) -> None:
    (tmp_path / "cellar").mkdir()
    with pytest.raises(AssertionError, match="cellar"):
        standing(tmp_path)


def heavy_after(code: str, *paths: Path) -> set[str]:
    """Which heavy libraries are in memory after some code was run in a process of its own."""
    report = f"import sys; print([n for n in {HEAVY!r} if n in sys.modules], file=sys.stderr)"
    wrapped = f"try:\n    {code}\nexcept SystemExit as end:\n    assert not end.code\n{report}"
    done = subprocess.run(
        [sys.executable, "-c", wrapped],
        env={**os.environ, "PYTHONPATH": os.pathsep.join(map(str, paths))},
        capture_output=True,
        text=True,
        check=True,
    )
    assert "usage" in done.stdout.lower()
    return set(re.findall(r"\w+", done.stderr))


@pytest.mark.parametrize("words", [["--help"], ["check", "--help"], ["build", "--help"]])
def test_help_imports_nothing_heavy(words: list[str]) -> None:
    code = f"from wellseq.cli.main import main; sys = main({words!r}); assert not sys, sys"
    assert heavy_after(code, ROOT) == set()


def test_something_heavy_is_seen(tmp_path: Path) -> None:
    (tmp_path / "heavy.py").write_text("import numpy\nprint('usage')\n")
    assert heavy_after("import heavy", tmp_path) == {"numpy"}


DOC = '"""What this is."""\n'
GOOD = {
    ".gitignore": "/out/\n*.egg-info/\n",
    "README.md": "",
    "wellseq/__init__.py": DOC,
    "wellseq/base/place.py": DOC + "import re\n",
    "wellseq/model/steps/__init__.py": DOC,
    "wellseq/model/steps/hold.py": DOC + "import pydantic\nfrom wellseq.base import place\n",
    "wellseq/model/steps/await_.py": DOC,
    "wellseq/checks/off_clock.py": DOC + 'SAYS = "x"\n',
    "wellseq/checks/judging.py": DOC,
    "wellseq/fields/field.py": DOC + "def solve():\n    '''Solve.'''\n    import scipy.linalg\n",
    "tests/model/steps/test_hold.py": "",
    "tests/model/steps/test_await.py": "",
    "tests/checks/test_off_clock.py": "",
    "tests/checks/test_judging.py": "",
    "grammar/steps/hold.md": "",
    "grammar/steps/await.md": "",
    "safety/checks/off-clock.md": "",
}
"""A small house that keeps all rules: file → its text."""
ABOVE = "wellseq/base/place.py"
PLANTS: list[tuple[Rule, str, str | None, str]] = [
    (rules.upward_imports, ABOVE, "import wellseq.text.scan\n", "floor 0"),
    (rules.upward_imports, ABOVE, "from wellseq import model\n", "floor 0"),
    (rules.upward_imports, ABOVE, "def f():\n    from wellseq.cli.main import main\n", "floor 0"),
    (rules.upward_imports, ABOVE, "x = import_module('wellseq.pipeline')\n", "floor 0"),
    (rules.upward_imports, ABOVE, "x = import_module(f'wellseq.checks.{x}')\n", "floor 0"),
    (rules.upward_imports, ABOVE, "from ..text import scan\n", "relative"),
    (rules.upward_imports, ABOVE, "from wellseq.cellar import wine\n", "on no floor"),
    (rules.upward_imports, "wellseq/emit/csv.py", "import wellseq.reread.bytes\n", "floor 9"),
    (rules.upward_imports, "wellseq/cellar/wine.py", "", "on no floor"),
    (rules.foreign_imports, ABOVE, "import numpy as np\n", "numpy"),
    (rules.foreign_imports, "wellseq/text/scan.py", "from pydantic import Field\n", "pydantic"),
    (rules.foreign_imports, "wellseq/cli/main.py", "def f():\n    import rich\n", "rich"),
    (rules.foreign_imports, "wellseq/fields/field.py", "from scipy import linalg\n", "before"),
    (rules.long_things, ABOVE, "x = 1\n" * 401, "401 lines"),
    (rules.long_things, ABOVE, "def f():\n" + "    x = 1\n" * 60, "61 lines"),
    (rules.long_things, ABOVE, f"x = '{'y' * 95}'\n", "101 characters"),
    (rules.lonely_members, "wellseq/model/steps/throw.py", DOC, "'throw' has no test"),
    (rules.lonely_members, "wellseq/model/steps/throw.py", DOC, "'throw' has no page"),
    (rules.lonely_members, "tests/model/steps/test_await.py", None, "'await' has no test"),
    (rules.lonely_members, "tests/model/steps/test_leap.py", "", "'leap' has no step"),
    (rules.lonely_members, "grammar/steps/leap.md", "", "'leap' has no step"),
    (rules.lonely_members, "grammar/steps/hold.md", None, "'hold' has no page"),
    (rules.lonely_members, "tests/checks/test_off_clock.py", None, "'off_clock' has no test"),
    (rules.lonely_members, "safety/checks/off-clock.md", None, "'off-clock' has no page"),
    (rules.lonely_members, "safety/checks/too-cold.md", "", "'too-cold' has no check"),
    (rules.lonely_members, "tests/checks/test_too_cold.py", "", "'too_cold' has no check"),
    (rules.strays, "NOTES.md", "", "NOTES.md"),
    (rules.strays, "docs/index.md", "", "docs"),
    (rules.nameless_mistakes, ABOVE, "Mistake('too-cold', place, 'x')\n", "too-cold"),
    (rules.nameless_mistakes, ABOVE, "pen.refuse('too-cold', 'x')\n", "too-cold"),
    (rules.nameless_mistakes, ABOVE, "yield Objection('to', 'too-cold', 'x')\n", "too-cold"),
    (rules.nameless_mistakes, ABOVE, "names.report('too-cold', place, 'x')\n", "too-cold"),
    (rules.nameless_mistakes, ABOVE, "self.wrong('too-cold', place, 'x')\n", "too-cold"),
    (rules.nameless_mistakes, ABOVE, "self.mistakes.add('too-cold', place, 'x')\n", "too-cold"),
    (rules.nameless_mistakes, ABOVE, "self._bad(1, 2, 'x', name='too-cold')\n", "too-cold"),
    (rules.nameless_mistakes, ABOVE, "Mistake('off-clock' if x else 'so', p, 'x')\n", "'so'"),
    (docstrings.undocumented, "wellseq/base/new.py", "x = 1\n", "new.py has no"),
    (docstrings.undocumented, ABOVE, DOC + "def f(): pass\n", "f has no"),
    (docstrings.undocumented, ABOVE, DOC + "class A:\n    x = 1\n", "A has no"),
    (docstrings.undocumented, ABOVE, f"{DOC}class A:\n    {DOC}    def f(self): ...\n", "f has no"),
    (docstrings.unitless, ABOVE, f"{DOC}def depth_V():\n    {DOC}", "'V'"),
    (docstrings.unitless, ABOVE, f"{DOC}def f(wait_s):\n    {DOC}", "'s'"),
    (docstrings.unitless, ABOVE, f"{DOC}def f(*, slope_V_per_s):\n    {DOC}", "'V'"),
    *(
        (rules.leftovers, f"wellseq/{name}", word.replace(" ", ""), word.replace(" ", ""))
        for name, word in {
            "a.py": "TO DO",
            "b.md": "FIX ME",
            "c.lark": "XX X",
            "d.py": "Not ImplementedError",
            "e.py": "mark.sk ip",
            "f.py": "x fail",
            "g.md": "/wo rk/",
        }.items()
    ),
]


def build_house(folder: Path, files: dict[str, str | None]) -> None:
    """Write files; None stands for a file that is missing."""
    for name, text in files.items():
        if text is not None:
            path = folder / name
            path.parent.mkdir(parents=True, exist_ok=True)
            path.write_text(text, encoding="utf-8")


def _folder_of(rule: Rule, root: Path) -> Path:
    whole = (rules.lonely_members, rules.strays, rules.nameless_mistakes, rules.leftovers)
    return root if rule in whole else root / "wellseq"


@pytest.mark.parametrize("rule", sorted({rule for rule, _ in KEPT}, key=lambda r: r.__name__))
def test_a_good_house_breaks_no_rule(rule: Rule, tmp_path: Path) -> None:
    build_house(tmp_path, GOOD)
    assert list(rule(_folder_of(rule, tmp_path))) == []


@pytest.mark.parametrize(
    ("rule", "name", "text", "said"),
    PLANTS,
    ids=[f"{p[0].__name__}-{n}" for n, p in enumerate(PLANTS)],
)
def test_a_planted_offender_is_caught(
    rule: Rule, name: str, text: str | None, said: str, tmp_path: Path
) -> None:
    build_house(tmp_path, {**GOOD, name: text})
    offences = list(rule(_folder_of(rule, tmp_path)))
    assert any(said in offence for offence in offences), offences


def test_every_rule_has_an_offender() -> None:
    assert {rule for rule, _ in KEPT} == {rule for rule, *_ in PLANTS}


def test_what_is_ignored_may_lie_about(tmp_path: Path) -> None:
    build_house(tmp_path, {**GOOD, "out/a.csv": "", "x.egg-info/y": "", ".ci/run": ""})
    assert list(rules.strays(tmp_path)) == []
