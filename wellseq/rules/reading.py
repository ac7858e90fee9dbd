"""Conditions → when they are surely true on a run, and when they may be.

Kleene's three values: surely, perhaps, surely not (Kleene, Introduction to Metamathematics, 1952,
sec. 64).  Before the first row and after the last nothing is known of lines, voltages and clouds:
everything may be true there, and nothing surely is.
"""

from __future__ import annotations

from collections.abc import Callable

from wellseq.model import rulebook as book
from wellseq.rules import cuts
from wellseq.rules.axis import Run
from wellseq.rules.course import Sets
from wellseq.rules.cuts import Cuts
from wellseq.rules.signals import Signals

FAR = 1 << 400
"""Further than any time that a rule can look at."""
Window = Callable[[Cuts, int], Cuts]


class Reading:
    """Conditions read on one run; the atoms are laid out once."""

    def __init__(self, signals: Signals, run: Run) -> None:
        self.signals, self.axis, self.run = signals, signals.axis, run
        self._atoms: dict[book.Atom, Sets] = {}

    def atom(self, atom: book.Atom) -> Sets:
        """When an atom is true, on this run and beyond it."""
        if atom not in self._atoms:
            truth = self.signals.truth(atom)
            surely = self.axis.laid_out(truth.surely, self.run)
            perhaps = surely
            if truth.perhaps is not truth.surely:
                perhaps = self.axis.laid_out(truth.perhaps, self.run)
            self._atoms[atom] = surely, self._with_beyond(atom, perhaps)
        return self._atoms[atom]

    def _with_beyond(self, atom: book.Atom, perhaps: Cuts) -> Cuts:
        """A set of instants of the run, and all before and after it at which it may be true too.

        Steps, drives, waits and blocks are those of this table, so that before and after it there
        are none; only of what a run leaves out nothing is known.
        """
        low, high = self.run.low, self.run.high
        found = perhaps
        played = isinstance(atom, book.Playing | book.Driven | book.Awaiting | book.InBlock)
        if not played or low > 0:
            found = (-FAR, *found[1:]) if found and found[0] == low else (-FAR, low, *found)
        if not played or high < cuts.after(self.run.end):
            found = (*found[:-1], FAR) if found and found[-1] == high else (*found, high, FAR)
        return found

    def unknown(self, condition: book.Condition) -> dict[str, Cuts]:
        """Atoms that are not known at some time of the run: their words, and when."""
        found: dict[str, Cuts] = {}
        for atom in book.atoms_in(condition):
            truth = self.signals.truth(atom)
            when = self.axis.laid_out(truth.unknown, self.run) if truth.unknown else ()
            if when:
                found[atom.text] = when
        return found

    def always(self, condition: book.Condition) -> Sets:
        """The instants at which a condition is true."""
        return self._read(condition, _as_it_is, cuts.held, cuts.recent)

    def before(self, condition: book.Condition) -> Sets:
        """The instants just before which a condition is true, its windows ending there."""
        return self._read(condition, cuts.just_before, cuts.held_before, cuts.recent_before)

    def after(self, condition: book.Condition) -> Sets:
        """The instants just after which a condition is true, its windows beginning there."""
        return self._read(condition, cuts.just_after, cuts.held_after, cuts.recent_after)

    def loosely(self, condition: book.Condition, side: str = "") -> Sets:
        """When a condition is true whatever the waits are: no window is measured.

        What is surely true here is so on every run, and what is not even perhaps true here on none.
        `side` is `before` or `after` for the instants just before or after which it is true.
        """
        instant = {"before": cuts.just_before, "after": cuts.just_after}.get(side, _as_it_is)
        match condition:
            case book.Not(part):
                return self._opposite(self.loosely(part, side))
            case book.AllOf(parts) | book.AnyOf(parts):
                return self._joined(condition, [self.loosely(part, side) for part in parts])
            case book.Held(part):
                surely, perhaps = self.loosely(part)
                ends = self.run.low, self.run.high
                return (ends if cuts.covers(surely, *ends) else cuts.NOTHING), instant(perhaps)
            case book.Recent(part):
                surely, perhaps = self.loosely(part)
                never = not cuts.within(perhaps, self.run.low, self.run.high)
                return instant(surely), instant(perhaps) if never else (-FAR, FAR)
            case _:
                surely, perhaps = self.atom(condition)
                return instant(surely), instant(perhaps)

    def _read(
        self,
        condition: book.Condition,
        instant: Callable[[Cuts], Cuts],
        held: Window,
        recent: Window,
    ) -> Sets:
        match condition:
            case book.Not(part):
                return self._opposite(self._read(part, instant, held, recent))
            case book.AllOf(parts) | book.AnyOf(parts):
                read = [self._read(part, instant, held, recent) for part in parts]
                return self._joined(condition, read)
            case book.Held(part, window_s):
                surely, perhaps = self.always(part)
                window = self.axis.units(window_s)
                return held(surely, window), held(perhaps, window)
            case book.Recent(part, window_s):
                surely, perhaps = self.always(part)
                window = self.axis.units(window_s)
                return recent(surely, window), recent(perhaps, window)
            case _:
                surely, perhaps = self.atom(condition)
                return instant(surely), instant(perhaps)

    def _joined(self, condition: book.AllOf | book.AnyOf, read: list[Sets]) -> Sets:
        join = cuts.meet if isinstance(condition, book.AllOf) else cuts.union
        return join(*(one[0] for one in read)), join(*(one[1] for one in read))

    def _opposite(self, sets: Sets) -> Sets:
        surely, perhaps = sets
        return cuts.complement(perhaps, -FAR, FAR), cuts.complement(surely, -FAR, FAR)


def _as_it_is(cuts_of_atom: Cuts) -> Cuts:
    return cuts_of_atom
