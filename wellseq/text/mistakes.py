"""The mistakes of one file, as they are met → in order of place, at most a hundred of them."""

from __future__ import annotations

from wellseq.base.finding import Mistake
from wellseq.base.names import printable
from wellseq.base.place import Place

LISTED_MAX = 100
READING_STOPS_AT = 1000
QUOTED_MAX = 40


class ReadingStops(Exception):
    """The rest of a file is not worth reading; never leaves this floor."""


class Mistakes:
    """Collects what is wrong with one file; the names issued are those of the language floor."""

    def __init__(self, file: str) -> None:
        self.file = file
        self._met: list[Mistake] = []
        self._stopped_early = False

    def add(self, name: str, place: Place, message: str, hint: str = "") -> None:
        """Take one mistake in.

        Raises ReadingStops once there are so many that the file is no sequence at all.
        """
        self._met.append(Mistake(name, place, message, hint))
        if len(self._met) >= READING_STOPS_AT:
            self._stopped_early = True
            raise ReadingStops

    def give_up(self, name: str, place: Place, message: str, hint: str = "") -> None:
        """Take in a mistake after which reading on has no sense.  Always raises ReadingStops."""
        self.add(name, place, message, hint)
        raise ReadingStops

    def listed(self) -> tuple[Mistake, ...]:
        """All mistakes by place, or the first hundred and one more that counts the others."""
        met = sorted(self._met, key=lambda mistake: (mistake.place, mistake.message))
        left = len(met) - LISTED_MAX
        if left <= 0:
            return tuple(met)
        count = f"at least {left}" if self._stopped_early else str(left)
        place = met[LISTED_MAX].place
        message = f"{count} more mistakes in this file are not listed"
        return (*met[:LISTED_MAX], Mistake("syntax", place, message, "mend the first ones first"))


def quoted(text: str) -> str:
    """The text between quotation marks, cut short and harmless to a terminal."""
    shown = text if len(text) <= QUOTED_MAX else text[:QUOTED_MAX] + "…"
    return f"'{printable(shown)}'"
