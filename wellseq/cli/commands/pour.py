"""Pour one block of a published folder out at a fixed rate.

The folder is verified first; one with findings, or a draft, is not poured.  Samples go to standard
output, or to a new file with -o, a run at a time, however many there are.  The block's clock must
divide the rate.  Rows between two samples come late; how many and how late is said on standard
error.
"""

from __future__ import annotations

import argparse
import sys

from wellseq.cli import status
from wellseq.cli.common import UsageError, complain, status_of
from wellseq.cli.members import TYPE_CHECKING, names_in

if TYPE_CHECKING:
    from collections.abc import Iterator
    from fractions import Fraction

    from wellseq.emit.expand import Poured
    from wellseq.reread.folder import Reading

EXAMPLE = "wellseq pour evening-tables --block 2 --rate '100 kHz' --form npy -o bunch.npy"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """FOLDER, --block, --rate or --every, --form, --only, -o FILE."""
    parser.add_argument("folder", metavar="FOLDER", help="a folder made by build")
    parser.add_argument("--block", type=int, default=1, metavar="N", help="which block, from 1 (1)")
    pace = parser.add_mutually_exclusive_group(required=True)
    pace.add_argument("--rate", metavar="HZ", help="samples per second, for example '100 kHz'")
    pace.add_argument("--every", metavar="TIME", help="from sample to sample, for example '10 us'")
    parser.add_argument(
        "--form", choices=names_in("emit", "pour"), default="csv", help="of the samples (csv)"
    )
    parser.add_argument(
        "--only", metavar="NAME,…", help="these outputs and lines, in this order, and no others"
    )
    parser.add_argument("-o", "--output", metavar="FILE", help="a new file, else standard output")


def run(arguments: argparse.Namespace) -> int:
    """Verify, then pour; returns the exit status."""
    from pathlib import Path

    from wellseq.emit.single import CannotPublish, write_whole
    from wellseq.pipeline import examine

    every_s = _every_s(arguments)
    if arguments.output is None and arguments.form != "csv" and sys.stdout.isatty():
        raise UsageError(f"{arguments.form} is not for a terminal: name a file with -o, or pipe it")
    reading = examine(arguments.folder)
    if reading.meaning is None:
        return _refuse(arguments.folder, reading)
    chosen = _chosen(reading, every_s, arguments)
    try:
        pieces = _pieces(chosen, arguments.form)
        if arguments.output is None:
            for piece in pieces:
                sys.stdout.buffer.write(piece)
            sys.stdout.buffer.flush()
        else:
            write_whole(Path(arguments.output), pieces)
    except CannotPublish as why:
        complain(str(why))
        return status.NO_OUTPUT
    _tell(arguments.output or "standard output", chosen, arguments.form)
    return status.CLEAR


def _every_s(arguments: argparse.Namespace) -> Fraction:
    from wellseq.base.quantity import QuantityError, read_quantity

    text, unit = (arguments.rate, "Hz") if arguments.rate else (arguments.every, "s")
    try:
        value = read_quantity(text, unit)
    except QuantityError as why:
        raise UsageError(f"{why}; {why.hint}" if why.hint else str(why)) from why
    if value <= 0:
        raise UsageError(f"'{text}' is not above zero")
    return 1 / value if arguments.rate else value


def _refuse(folder: str, reading: Reading) -> int:
    from wellseq.emit.examined import Examined
    from wellseq.reread.folder import CHECKS

    for finding in reading.findings:
        complain(f"{finding.place}: {finding.message} [{finding.name}]")
    complain(f"{folder} does not verify; nothing was poured")
    return status_of(Examined(folder, reading.findings, CHECKS))


def _chosen(reading: Reading, every_s: Fraction, arguments: argparse.Namespace) -> Poured:
    """The block with the columns asked for."""
    from dataclasses import replace

    from wellseq.base.names import nearest
    from wellseq.pipeline import poured

    try:
        whole = poured(reading, arguments.block, every_s)
    except ValueError as why:
        raise UsageError(str(why)) from why
    if arguments.only is None:
        return whole
    rows = whole.rows
    places = {column.name: at for at, column in enumerate(rows.columns)}
    names = [name.strip() for name in arguments.only.split(",")]
    for name in names:
        if name not in places:
            raise UsageError(f"'{name}' is no output or line; {nearest(name, places)}")
    if len(set(names)) != len(names):
        raise UsageError("--only names something twice")
    order = [places[name] for name in names]
    kept = replace(
        rows,
        columns=tuple(rows.columns[at] for at in order),
        numbers=tuple(rows.numbers[at] for at in order),
    )
    return replace(whole, rows=kept)


def _pieces(chosen: Poured, form: str) -> Iterator[bytes]:
    from importlib import import_module

    from wellseq.emit.single import CannotPublish

    module = import_module(f"wellseq.emit.pour.{form}")
    needed = module.missing() if hasattr(module, "missing") else ""
    if needed:
        raise CannotPublish(needed)
    pieces: Iterator[bytes] = module.write(chosen)
    return pieces


def _tell(where: str, chosen: Poured, form: str) -> None:
    """What the samples are, and what the rate does to the rows, on standard error."""
    columns = ", ".join(column.name for column in chosen.rows.columns)
    kind = f" of {chosen.dtype.lstrip('<')}, little-endian" if form in ("raw", "npy") else ""
    sys.stderr.write(
        f"{where}: {chosen.count} samples, one every {float(chosen.every_s):.9g} s, "
        f"{len(chosen.rows.columns)} columns{kind}: {columns}\n"
    )
    between, late_s = chosen.late()
    if between:
        sys.stderr.write(
            f"{between} of {len(chosen.rows.ticks)} rows lie between two samples and come late, "
            f"by up to {float(late_s):.3g} s\n"
        )
