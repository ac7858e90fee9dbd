"""Names: comparison after NFC, and the nearest known name for a hint."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable
from difflib import get_close_matches

RESERVED_TEXT = (
    "to from over for at with on through using between and closing after until within around "
    "beside in of above below because keeping allow is"
)
RESERVED = frozenset(RESERVED_TEXT.split())
"""Words that begin a clause; no name may be one of them."""


def normal(name: str) -> str:
    """The form in which names are compared (Unicode NFC, UAX #15)."""
    return unicodedata.normalize("NFC", name)


def nearest(name: str, known: Iterable[str], what: str = "") -> str:
    """A hint that offers the nearest known name, or lists the known ones when none is near."""
    names = sorted(set(known))
    close = get_close_matches(name, names, n=1, cutoff=0.6)
    if close:
        return f"did you mean '{close[0]}'?"
    if not names:
        return f"no {what} is known here" if what else ""
    shown = ", ".join(names[:12]) + (", …" if len(names) > 12 else "")
    return f"{what or 'known'}: {shown}"


def printable(text: str) -> str:
    """Escape control and bidirectional characters, so that a name cannot steer a terminal."""
    return "".join(
        char if unicodedata.category(char) not in ("Cc", "Cf", "Cs") else f"\\u{ord(char):04x}"
        for char in text
    )
