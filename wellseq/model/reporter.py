"""Mistakes, as they are met → each once, by file and place, no more than a person can read."""

from __future__ import annotations

from collections.abc import Collection, Sequence

from wellseq.base.finding import Mistake
from wellseq.base.names import nearest
from wellseq.base.place import Place

LISTED_MAX = 100
"""Mistakes of one file that are listed; the others are counted."""
KEPT_MAX = 2000
COMPARISONS_MAX = 20_000
"""Names compared in search of the nearest, in one run; a mistake beyond gets no such hint."""


class Reporter:
    """Collects mistakes; the same mistake met twice (in two passes, say) is kept once."""

    def __init__(self) -> None:
        self._found: dict[tuple[str, Place, str], Mistake] = {}
        self._comparisons = 0

    def __len__(self) -> int:
        return len(self._found)

    def add(self, mistake: Mistake) -> None:
        """Keep a mistake, unless the same was said of the same place before."""
        if len(self._found) < KEPT_MAX:
            key = (mistake.name, mistake.place, mistake.message)
            self._found.setdefault(key, mistake)

    def may_compare(self, count: int) -> bool:
        """Whether so many names may still be compared with one that is not known."""
        self._comparisons += count
        return self._comparisons <= COMPARISONS_MAX

    def near(self, name: str, known: Collection[str], what: str) -> str:
        """A hint that offers the nearest known name, while looking for it costs little."""
        return nearest(name, known, what) if self.may_compare(len(known)) else ""

    def hints(self) -> frozenset[str]:
        """What the mistakes so far were answered with."""
        return frozenset(mistake.hint for mistake in self._found.values())

    def listed(self, files: Sequence[str]) -> tuple[Mistake, ...]:
        """Mistakes in the order of these files (others after them) and of their places.

        Beyond LISTED_MAX in one file, one more mistake says how many are left.
        """
        order = {file: number for number, file in enumerate(files)}
        by_file: dict[str, list[Mistake]] = {}
        for mistake in self._found.values():
            by_file.setdefault(mistake.place.file, []).append(mistake)
        result: list[Mistake] = []
        for file in sorted(by_file, key=lambda file: (order.get(file, len(order)), file)):
            met = sorted(by_file[file], key=lambda mistake: (mistake.place, mistake.message))
            result += met[:LISTED_MAX]
            left = len(met) - LISTED_MAX
            if left > 0:
                count = f"at least {left}" if len(self._found) >= KEPT_MAX else str(left)
                message = f"{count} more mistakes in this file are not listed"
                place = met[LISTED_MAX].place
                result.append(Mistake("syntax", place, message, "mend the first ones first"))
        return tuple(result)
