"""Names and times that several files of a published folder must agree on.

Exact times are written as fractions of seconds (`1/3`), beside them floats for people and plots.
"""

from __future__ import annotations

from fractions import Fraction

from wellseq.emit.escape import file_name
from wellseq.timeline.timeline import Block

ATTO = 10**18
ENDINGS = {"npz": "npz", "hdf5": "h5"}
"""Further forms of a table → how their files' names end."""


def table_name(block: Block) -> str:
    """The file of a block's table, `block-2-bunch_arrival.csv`; the number makes it unique."""
    return f"{_stem(block)}.csv"


def also_name(block: Block, form: str) -> str:
    """The file of a further form of a block's table, `block-2-bunch_arrival.npz`."""
    return f"{_stem(block)}.{ENDINGS[form]}"


def drives_name(block: Block) -> str:
    """The file of a block's drive table, `drives-2-bunch_arrival.csv`."""
    return f"drives-{block.index + 1}-{file_name(block.trigger or 'run')}.csv"


def metadata_name(table: str) -> str:
    """Where CSV on the Web looks for what describes a table (W3C, 2015, sec. 5.3)."""
    return f"{table}-metadata.json"


def exact(value: Fraction) -> str:
    """A rational number as text: `3`, `-7/2`."""
    return str(Fraction(value))


def decimal(seconds: Fraction) -> str:
    """A time in s as a decimal, exact where 18 places suffice, else rounded to the nearest."""
    whole = round(seconds * ATTO)
    sign = "-" if whole < 0 else ""
    units, places = divmod(abs(whole), ATTO)
    return f"{sign}{units}.{places:018d}".rstrip("0").rstrip(".")


def _stem(block: Block) -> str:
    return f"block-{block.index + 1}-{file_name(block.trigger or 'run')}"
