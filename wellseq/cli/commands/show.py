"""Draw sequences and trap files: strips and a report to open in a browser, or stills.

A sequence is drawn in strips, voltages, wells and depths against its steps, and its report is
written to NAME.report.html.  A trap file is drawn in text, with what each of its parts can do.
Stills (--png, --svg, --pdf) need matplotlib: one of the stack, one of each cloud.
"""

from __future__ import annotations

import argparse
import os
import sys

from wellseq.cli import status
from wellseq.cli.common import UsageError, add_lets, complain, lets_of, status_of
from wellseq.cli.members import TYPE_CHECKING
from wellseq.cli.terminal import width_here

if TYPE_CHECKING:
    from collections.abc import Iterable
    from pathlib import Path

    from wellseq.emit.pictures.view import View

EXAMPLE = "wellseq show evening.well -o pictures --png"
KINDS = ("png", "svg", "pdf")
OURS = b'<meta name="generator" content="wellseq '


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """FILE…, -o FOLDER, --strips, --png, --svg, --pdf, --let."""
    parser.add_argument(
        "file", nargs="+", metavar="FILE", help="a sequence, or a trap file NAME.trap.toml"
    )
    parser.add_argument(
        "-o", "--output", default="", metavar="FOLDER", help="where pictures go (here)"
    )
    parser.add_argument(
        "--strips",
        choices=("auto", "braille", "ascii", "none"),
        default="auto",
        help="how strips are drawn: as the terminal can (auto), or none at all",
    )
    for kind in KINDS:
        parser.add_argument(f"--{kind}", action="store_true", help=f"stills as {kind.upper()} too")
    add_lets(parser)


def run(arguments: argparse.Namespace) -> int:
    """Draw every file; returns the exit status."""
    kinds = [kind for kind in KINDS if getattr(arguments, kind)]
    stems = [_stem(file) for file in arguments.file]
    for stem in stems:
        if stems.count(stem) > 1:
            raise UsageError(f"two of the files would be drawn to {stem}; draw one at a time")
    if kinds:
        from wellseq.emit.pictures.stills import missing

        needed = missing()
        if needed:
            complain(needed)
            return status.USAGE
    codes = []
    for number, file in enumerate(arguments.file):
        sys.stdout.write("\n" if number else "")
        draw = _trap if file.endswith(".toml") else _sequence
        codes.append(draw(file, arguments, kinds))
    return status.worst(codes)


def _stem(file: str) -> str:
    name = os.path.basename(file)
    for ending in (".trap.toml", ".toml", ".well"):
        if name.endswith(ending) and name != ending:
            return name.removesuffix(ending) + (".trap" if ending != ".well" else "")
    return name


def _trap(file: str, arguments: argparse.Namespace, kinds: list[str]) -> int:
    from wellseq.emit.stack import drawing
    from wellseq.pipeline import TrapMistakes, load_trap

    try:
        trap = load_trap(file)
    except TrapMistakes as wrong:
        for one in wrong.mistakes:
            hint = f" ({one.hint})" if one.hint else ""
            complain(f"{one.place}: {one.message}{hint} [{one.name}]")
        unreadable = any(one.name == "unreadable-file" for one in wrong.mistakes)
        return status.NO_INPUT if unreadable else status.WRONG_TRAP
    sys.stdout.write(drawing(trap, width_here()))
    if not kinds:
        return status.CLEAR
    from wellseq.emit.pictures.stage import stage
    from wellseq.emit.pictures.stills import stack_still

    shown = stage(trap)
    files = ((f"{_stem(file)}-stack.{kind}", stack_still(shown, kind)) for kind in kinds)
    return status.CLEAR if _written(files, arguments.output) else status.NO_OUTPUT


def _sequence(file: str, arguments: argparse.Namespace, kinds: list[str]) -> int:
    from wellseq.emit.pictures.page import report
    from wellseq.emit.pictures.stills import stills
    from wellseq.emit.pictures.view import view
    from wellseq.emit.waiting import waiting
    from wellseq.pipeline import compile_file

    with waiting(f"drawing {os.path.basename(file)}", 3 + len(kinds)) as work:
        case = compile_file(file, lets=lets_of(arguments))
        work.step()
        shown = view(case)
        work.step()
        files = [(f"{_stem(file)}.report.html", report(shown))]
        work.step()
        for kind in kinds:
            files += [(f"{_stem(file)}-{name}", still) for name, still in stills(shown, kind)]
            work.step()
    _say_strips(shown, arguments.strips)
    for one in shown.case.blocked:
        complain(f"{one.place}: {one.message} [{one.name}]")
    if not _written(files, arguments.output):
        return status.NO_OUTPUT
    return status_of(shown.thing)


def _say_strips(shown: View, wanted: str) -> None:
    from wellseq.emit.pictures.strips import strips

    if wanted != "none":
        braille = wanted == "braille" or (wanted == "auto" and dots_here())
        sys.stdout.write(strips(shown, width_here(), braille=braille))


def dots_here() -> bool:
    """Whether standard output is a terminal that can show braille dots."""
    if not sys.stdout.isatty() or os.environ.get("TERM", "") in ("", "dumb", "linux"):
        return False
    try:
        "\u28ff".encode(sys.stdout.encoding or "ascii")
    except (UnicodeEncodeError, LookupError):
        return False
    return True


def _written(files: Iterable[tuple[str, bytes]], output: str) -> bool:
    """Write every picture into the folder, which is made if it is not there; says where."""
    from pathlib import Path

    from wellseq.review.writing import CannotWrite, replace_file

    folder = Path(output or ".")
    try:
        folder.mkdir(exist_ok=True)
        for name, content in files:
            path = folder / name
            if name.endswith(".html") and _foreign(path):
                complain(f"{path} is there and was not written by wellseq; it is left alone")
                return False
            replace_file(path, content)
            sys.stderr.write(f"{path}: written, {len(content)} bytes\n")
    except CannotWrite as why:
        complain(str(why))
        return False
    except OSError as error:
        complain(f"{folder} cannot be written: {(error.strerror or 'no reason given').lower()}")
        return False
    return True


def _foreign(path: Path) -> bool:
    """Whether a file is there that is no report of ours."""
    try:
        with path.open("rb") as stream:
            return OURS not in stream.read(8192)
    except FileNotFoundError:
        return False
