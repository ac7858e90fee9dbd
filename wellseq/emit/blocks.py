"""Names and times that several files of a published folder must agree on.

Exact times are written as fractions of seconds (`1/3`), beside them floats for people and plots.
"""

from __future__ import annotations

from fractions import Fraction

from wellseq.emit.escape import file_name
from wellseq.timeline.timeline import Block

ATTO = 10**18


def table_name(block: Block) -> str:
    """The file of a block's table, `block-2-bunch_arrival.csv`; the number makes it unique."""
    return f"block-{block.index + 1}-{file_name(block.trigger or 'run')}.csv"


def drives_name(block: Block) -> str:
    """The file of a block's drive table, `drives-2-bunch_arrival.csv`."""
    return f"drives-{block.index + 1}-{file_name(block.trigger or 'run')}.csv"


def exact(value: Fraction) -> str:
    """A rational number as text: `3`, `-7/2`."""
    return str(Fraction(value))


def decimal(seconds: Fraction) -> str:
    """A time in s as a decimal, exact where 18 places suffice, else rounded to the nearest."""
    whole = round(seconds * ATTO)
    sign = "-" if whole < 0 else ""
    units, places = divmod(abs(whole), ATTO)
    return f"{sign}{units}.{places:018d}".rstrip("0").rstrip(".")
