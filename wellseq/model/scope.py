"""What a name means: one namespace a file, and the arguments of a procedure or of an `each`.

A file's names are those of its trap, what it defines, and what `use` brings from other files.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field

from wellseq.base.finding import Mistake, Origin
from wellseq.base.names import RESERVED, nearest, printable
from wellseq.base.place import Place
from wellseq.base.quantity import Quantity, QuantityError, Spread, unit_of
from wellseq.model.reporter import Reporter
from wellseq.model.sequence import CloudDeclared
from wellseq.model.step import PatternVolts
from wellseq.model.trap import Trap
from wellseq.model.values import UNKNOWN, Unknown, Value
from wellseq.text.tree import Block, Name, Operand

SORTS = {
    "let": "a let",
    "cloud": "a cloud",
    "pattern": "a pattern",
    "procedure": "a procedure",
    "sequence": "the sequence",
    "electrode": "an electrode",
    "output": "an output",
    "line": "a digital line",
    "trigger": "a trigger",
    "value": "a value",
}
"""Sort of a name → how it is spoken of."""
HARDWARE = ("electrode", "output", "line", "trigger")
OTHERS = "others"
"""In a pattern, every converter electrode that it does not name."""


@dataclass(eq=False, slots=True)
class Defined:
    """What one name stands for.

    `place` is None for names of the trap.  `value` is a let's value, None until it is its turn;
    `settled` is a pattern once it is settled, `declared` a cloud; `block` and `parameters` belong
    to patterns and procedures.
    """

    name: str
    sort: str
    scope: FileScope
    place: Place | None = None
    value: Value | None = None
    block: Block | None = None
    parameters: tuple[Name, ...] = ()
    settled: PatternVolts | Unknown | None = None
    declared: CloudDeclared | None = None


Bound = Value | Defined
"""What an argument stands for: a value, or a thing that has a name."""


@dataclass(eq=False, slots=True)
class FileScope:
    """The namespace of one file; `trap` is None when the trap file could not be read.

    `used` tells a file that another one uses from the file that is read for its own sake.  `unread`
    are names whose definitions have mistakes of their own, `spoilt` the places of mistakes that
    kept something out: nothing more is said of what follows from them.
    """

    file: str
    trap: Trap | None
    reporter: Reporter
    used: bool = False
    unread: frozenset[str] = frozenset()
    spoilt: tuple[Place, ...] = ()
    known: dict[str, Defined] = field(default_factory=dict)

    def __post_init__(self) -> None:
        """Enter the names of the trap."""
        if self.trap is None:
            return
        for sort, parts in (
            ("electrode", self.trap.electrodes),
            ("output", self.trap.outputs),
            ("line", self.trap.lines),
            ("trigger", self.trap.triggers),
        ):
            for part in parts:
                self.known[part.name] = Defined(part.name, sort, self)

    def is_spoilt(self, place: Place) -> bool:
        """Whether something that stood within a place was kept out for a mistake of its own."""
        return any(place.line <= one.line <= place.end_line for one in self.spoilt)

    def own(self, *sorts: str) -> Iterator[Defined]:
        """What this file itself defines of these sorts, in the order of the text."""
        for item in self.known.values():
            if item.sort in sorts and item.place is not None and item.scope is self:
                yield item

    def define(self, name: Name, sort: str) -> Defined | None:
        """Enter a new name, or report why it cannot be one."""
        if not self.free(name, SORTS[sort]):
            return None
        made = Defined(name.text, sort, self, name.place)
        self.known[name.text] = made
        return made

    def free(self, name: Name, what: str, also: Iterable[str] = ()) -> bool:
        """Whether a name may be given to something new; reports it when not."""
        why = self._taken(name.text, also)
        if why:
            self.reporter.add(
                Mistake(
                    "name-reused",
                    name.place,
                    f"'{printable(name.text)}' {why} and cannot name {what}",
                    "choose another name",
                )
            )
        return not why

    def _taken(self, name: str, also: Iterable[str]) -> str:
        if name in self.known:
            return f"is already {self.whose(self.known[name])}"
        if name in also:
            return "is already a name around here"
        if name in RESERVED or name == OTHERS:
            return "is a word of the language"
        try:
            unit_of(name)
        except QuantityError:
            return ""
        return "is a unit"

    def whose(self, item: Defined) -> str:
        """What a name is and where it comes from, for a message."""
        if item.place is None:
            return f"{SORTS[item.sort]} of the trap"
        where = "" if item.place.file == self.file else f" of {item.place.file}"
        return f"{SORTS[item.sort]}{where} (line {item.place.line})"

    def bring(self, item: Defined, place: Place) -> None:
        """Enter a name from a used file."""
        there = self.known.get(item.name)
        if there is None:
            self.known[item.name] = item
        elif there is not item:
            self.reporter.add(
                Mistake(
                    "name-reused",
                    place,
                    f"{item.scope.file} brings '{printable(item.name)}', which is already "
                    f"{self.whose(there)}",
                    "rename one of the two",
                )
            )


class Names:
    """The names that a statement sees: those of its file, and the arguments around it.

    `chain` are the `do` calls it was reached by, from the outermost in; they go into every mistake.
    """

    def __init__(
        self,
        scope: FileScope,
        local: Mapping[str, Bound] | None = None,
        chain: tuple[Place, ...] = (),
    ) -> None:
        self.scope = scope
        self.local = local or {}
        self.chain = chain

    @property
    def trap(self) -> Trap | None:
        """The trap, None when its file could not be read."""
        return self.scope.trap

    def inside(self, local: Mapping[str, Bound]) -> Names:
        """The same names and some more."""
        return Names(self.scope, {**self.local, **local}, self.chain)

    def report(self, name: str, place: Place, message: str, hint: str = "") -> Unknown:
        """Record a mistake under the name of the bad thing."""
        origin = Origin(place, chain=self.chain) if self.chain else None
        self.scope.reporter.add(Mistake(name, place, message, hint, origin))
        return UNKNOWN

    def find(self, name: str) -> Bound | None:
        """What a name stands for; None when nobody gave it a meaning."""
        if name in self.local:
            return self.local[name]
        return self.scope.known.get(name)

    def value_of(self, name: Name) -> Value:
        """The value of a let, an argument or an `each`; reports anything else."""
        found = self.find(name.text)
        if isinstance(found, Quantity | Spread | Unknown):
            return found
        if found is None:
            return self._unknown(name, ("let",), "a value")
        if found.sort == "let":
            return found.value if found.value is not None else self._later(name, found)
        return self.report(
            "unit-mismatch",
            name.place,
            f"a value is needed here, and '{printable(name.text)}' is {self.scope.whose(found)}",
        )

    def _later(self, name: Name, let: Defined) -> Unknown:
        line = let.place.line if let.place is not None else 0
        return self.report(
            "unknown-name",
            name.place,
            f"'{printable(name.text)}' has no value yet here; its `let` stands in line {line}",
            "a `let` uses only what stands above it",
        )

    def thing(self, operand: Operand, *sorts: str) -> Defined | Unknown:
        """What a name stands for, which must be of one of these sorts; reports it when not."""
        what = " or ".join(SORTS[sort] for sort in sorts)
        if not isinstance(operand, Name):
            return self.report("unknown-name", operand.place, f"the name of {what} is needed here")
        found = self.find(operand.text)
        if found is None:
            return self._unknown(operand, sorts, what)
        if isinstance(found, Unknown):
            return found
        if isinstance(found, Defined) and found.sort in sorts:
            return self._foreign(operand, found) if found.sort == "cloud" else found
        is_ = SORTS["value"] if not isinstance(found, Defined) else self.scope.whose(found)
        return self.report(
            "unknown-name",
            operand.place,
            f"{what} is needed here, and '{printable(operand.text)}' is {is_}",
        )

    def _foreign(self, name: Name, cloud: Defined) -> Defined | Unknown:
        if not cloud.scope.used:
            return cloud
        return self.report(
            "unknown-name",
            name.place,
            f"'{printable(name.text)}' is a cloud of {cloud.scope.file}; `use` brings no clouds",
            "hand the cloud to the procedure as an argument",
        )

    def _unknown(self, name: Name, sorts: tuple[str, ...], what: str) -> Unknown:
        if self.trap is None and any(sort in HARDWARE for sort in sorts):
            return UNKNOWN
        if name.text in self.scope.unread:
            return UNKNOWN
        near = ""
        if self.scope.reporter.may_compare(len(self.scope.known)):
            meant = {**self.scope.known, **self.local}
            known = [key for key, item in meant.items() if _sort(item) in sorts]
            near = nearest(name.text, known, " or ".join(sorts))
        return self.report(
            "unknown-name", name.place, f"'{printable(name.text)}' is not known as {what}", near
        )


def _sort(item: Bound) -> str:
    return item.sort if isinstance(item, Defined) else "let"
