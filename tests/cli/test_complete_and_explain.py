"""Words for shells, and everything that can be explained."""

from __future__ import annotations

import subprocess
from collections.abc import Callable
from pathlib import Path
from types import SimpleNamespace

import pytest

from wellseq.base.names import RESERVED
from wellseq.base.quantity import UNITS
from wellseq.checks.judging import check_names
from wellseq.cli.completion import SHELLS
from wellseq.cli.main import command_names
from wellseq.emit.formats import format_names
from wellseq.model.headers import EXAMPLES
from wellseq.model.steps import verbs

Run = Callable[..., SimpleNamespace]


@pytest.mark.parametrize("shell", SHELLS)
def test_every_command_and_option_is_in_the_script(run: Run, shell: str) -> None:
    script = run("complete", shell)
    assert script.status == 0
    for name in command_names():
        assert name in script.out
    options = ("changed-since", "known", "tolerance", "format", "diff")
    assert all(option in script.out for option in options)
    assert all(form in script.out for form in format_names())


def completed(script: Path, *words: str) -> list[str]:
    """What bash offers for the last of these words."""
    array = " ".join(f"'{word}'" for word in words)
    code = (
        f"source {script}; COMP_WORDS=({array}); COMP_CWORD={len(words) - 1}; "
        '_wellseq; printf "%s\\n" "${COMPREPLY[@]}"'
    )
    ran = subprocess.run(
        ["bash", "-c", code], capture_output=True, text=True, check=True, cwd=script.parent
    )
    assert ran.stderr == ""
    return ran.stdout.split()


@pytest.mark.parametrize(
    ("words", "offered"),
    [
        (("wellseq", "che"), ["check"]),
        (("wellseq", "check", "--format", "s"), ["sarif"]),
        (("wellseq", "check", "--chan"), ["--changed-since"]),
        (("wellseq", "explain", "evap"), ["evaporate"]),
        (("wellseq", "complete", "z"), ["zsh"]),
        (("wellseq", "check", "some"), ["some.well"]),
    ],
)
def test_bash_completes(
    tmp_path: Path, run: Run, words: tuple[str, ...], offered: list[str]
) -> None:
    (tmp_path / "some.well").touch()
    script = tmp_path / "completion.bash"
    script.write_text(run("complete", "bash").out, "utf-8")
    assert completed(script, *words) == offered


def test_scripts_hold_no_text_that_a_shell_would_run(run: Run) -> None:
    for shell in SHELLS:
        for line in run("complete", shell).out.splitlines():
            assert "`" not in line
            assert line.count("'") % 2 == 0


def test_everything_can_be_explained(run: Run) -> None:
    listed = run("explain").out.split()
    assert listed == sorted(listed)
    assert set(listed) >= {*verbs(), *check_names(), *UNITS, *RESERVED, *EXAMPLES, "smoothly"}
    ran = run("explain", *listed)
    assert ran.status == 0
    assert ran.err == ""


@pytest.mark.parametrize(
    ("name", "says"),
    [
        ("repeat", "`repeat` stands among steps and is written: repeat 4 { … }"),
        ("cloud", "`cloud` stands outside a sequence"),
        ("known-not-met", "Take the line off the list"),
        ("µs", "1 µs = 1e-06 s"),
        ("over", "`ramp PATTERN over T"),
    ],
)
def test_explain_more(run: Run, name: str, says: str) -> None:
    assert says in run("explain", name).out
