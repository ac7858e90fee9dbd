"""Who owns what while lanes run side by side.

An output, line, ring or cloud belongs to one lane of an `alongside` only.
"""

from __future__ import annotations

from dataclasses import dataclass, field

Resource = tuple[str, str]
"""Kind of thing and its name, for example ("output", "lv01")."""


@dataclass(slots=True)
class Alongside:
    """One running `alongside`: what the lanes drawn so far have taken, and the present lane's."""

    earlier: set[Resource] = field(default_factory=set)
    present: set[Resource] = field(default_factory=set)

    def next_lane(self) -> None:
        """The present lane is over; what it took is closed to the next."""
        self.earlier |= self.present
        self.present = set()


class Ownership:
    """The stack of running `alongside` statements, outermost first."""

    def __init__(self) -> None:
        self._running: list[Alongside] = []

    def enter(self) -> Alongside:
        """A new `alongside` begins."""
        self._running.append(Alongside())
        return self._running[-1]

    def leave(self) -> None:
        """The innermost `alongside` is over; the lane around it has taken all that it took."""
        over = self._running.pop()
        over.next_lane()
        if self._running:
            self._running[-1].present |= over.earlier

    def take(self, resource: Resource) -> bool:
        """Take a thing for the present lane; False when a lane beside it has it already."""
        free = all(resource not in running.earlier for running in self._running)
        for running in self._running:
            running.present.add(resource)
        return free
