"""The command line as a whole: quick help, exit statuses, never a traceback."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from types import SimpleNamespace

import pytest

from wellseq.cli import main as main_module
from wellseq.cli.main import command, command_names, main
from wellseq.version import __version__

ROOT = str(Path(main_module.__file__).parents[2])
ENVIRONMENT = {**os.environ, "PYTHONPATH": ROOT}
HEAVY = {"numpy", "scipy", "lark", "pydantic", "rich", "wellseq.pipeline"}


def loaded_by(*arguments: str) -> set[str]:
    code = (
        "import sys; from wellseq.cli.main import main; "
        f"status = main({list(arguments)!r}); print(*sorted(sys.modules), file=sys.stderr)"
    )
    run = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, env=ENVIRONMENT
    )
    return set(run.stderr.split())


@pytest.mark.parametrize("arguments", [["--help"], ["--version"], ["check", "--help"]])
def test_help_loads_nothing_heavy(arguments: list[str]) -> None:
    assert not loaded_by(*arguments) & HEAVY


def test_a_check_does_load_it(bench: Path) -> None:
    # Companion: the yardstick above can fail.
    assert loaded_by("check", str(bench / "first.well")) >= HEAVY - {"rich", "scipy"}


def test_version(run: Callable[..., SimpleNamespace]) -> None:
    assert run("--version").out == f"wellseq {__version__}\n"


def test_every_command_has_help_with_an_example(run: Callable[..., SimpleNamespace]) -> None:
    assert set(command_names()) >= {"build", "check", "explain", "new", "show", "verify"}
    for name in command_names():
        ran = run(name, "--help")
        assert ran.status == 0
        assert f"example: wellseq {name}" in ran.out
        assert command(name).EXAMPLE.startswith(f"wellseq {name} ")


@pytest.mark.parametrize(
    "arguments",
    [
        [],
        ["check"],
        ["build", "a.well"],
        ["verify"],
        ["nonsense"],
        ["check", "a.well", "--let", "wall"],
        ["check", "a.well", "--let", "=3 V"],
        ["check", "a.well", "--format", "xml"],
        ["check", "a.well", "--form", "json"],
    ],
)
def test_wrong_usage_is_64(run: Callable[..., SimpleNamespace], arguments: list[str]) -> None:
    ran = run(*arguments)
    assert ran.status == 64
    assert ran.out == ""
    assert ran.err.startswith("usage: wellseq")


@pytest.fixture
def broken(monkeypatch: pytest.MonkeyPatch) -> Callable[[BaseException], None]:
    """Makes the next command raise."""

    def breaks(error: BaseException) -> None:
        def run(argv: object) -> int:
            raise error

        monkeypatch.setattr(main_module, "_run", run)

    return breaks


def test_a_fault_of_ours_is_one_sentence_and_70(
    broken: Callable[[BaseException], None],
    capsys: pytest.CaptureFixture[str],
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    broken(RuntimeError("two\nlines"))
    assert main([]) == 70
    error = capsys.readouterr().err
    assert error.count("\n") == 1
    assert "RuntimeError: two lines" in error
    assert "Traceback" not in error
    monkeypatch.setenv("WELLSEQ_DEBUG", "1")
    assert main([]) == 70
    assert "Traceback" in capsys.readouterr().err


def test_an_interrupt_is_130(
    broken: Callable[[BaseException], None], capsys: pytest.CaptureFixture[str]
) -> None:
    broken(KeyboardInterrupt())
    assert main([]) == 130
    assert capsys.readouterr() == ("", "")


def shell(command: str, folder: Path) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        ["bash", "-c", command.replace("WELLSEQ", f"{sys.executable} -m wellseq")],
        capture_output=True,
        text=True,
        check=False,
        cwd=folder,
        env=ENVIRONMENT,
    )


def test_a_closed_pipe_is_quiet(bench: Path) -> None:
    ran = shell("WELLSEQ check first.well --margins | true; echo ${PIPESTATUS[0]}", bench)
    assert ran.stdout == "73\n"
    assert ran.stderr == ""


def test_a_full_standard_output_is_73(bench: Path) -> None:
    ran = shell("WELLSEQ check first.well > /dev/full", bench)
    assert ran.returncode == 73
    assert ran.stderr == "wellseq: standard output cannot be written: no space left on device\n"


@pytest.mark.parametrize("locale", ["C", "POSIX", "tr_TR.UTF-8"])
def test_output_is_utf_8_whatever_the_locale(bench: Path, locale: str) -> None:
    (bench / "bad.well").write_text('wellseq 1\ntrap "bench.trap.toml"\nclöud µ\n', "utf-8")
    ran = shell(f"LC_ALL={locale} LANG={locale} WELLSEQ check bad.well", bench)
    assert "clöud µ" in ran.stdout
    assert ran.stderr == ""
