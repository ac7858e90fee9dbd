"""Nested statements → a text, with every liberty that the language leaves to its writers."""

from __future__ import annotations

import re
from collections.abc import Sequence
from random import Random

Item = str | tuple[str, "list[Item]", str]
"""A statement, or (what stands before the braces, what stands in them, what stands after)."""
REMARKS = ("why: log 12", "; { not a brace", "±", "ramp x over 2 V", "")
_CLAUSE = re.compile(r" (?=(?:over|for|to|with|at|within|using) [^\"]*$)")


class _Layout:
    """Writes line by line; one line may hold several statements."""

    def __init__(self, rng: Random) -> None:
        self.rng = rng
        self.parts: list[str] = []

    def items(self, items: Sequence[Item], depth: int) -> None:
        """Statements one after the other."""
        for number, item in enumerate(items):
            if number:
                self.end(depth)
            self.item(item, depth)

    def end(self, depth: int) -> None:
        """The end of a statement: a semicolon, a new line, or both and more."""
        if self.rng.random() < 0.15:
            self.parts.append(self.rng.choice(["; ", ";", " ; "]))
        else:
            self.line_end(depth, self.rng.choice(["", "", "", ";"]))

    def line_end(self, depth: int, before: str = "") -> None:
        """A new line, perhaps after a remark, perhaps an empty one more."""
        self.parts.append(before)
        if self.rng.random() < 0.1:
            self.parts.append(f" # {self.rng.choice(REMARKS)}")
        self.parts.append("\n" * self.rng.choice([1, 1, 1, 2]))
        self.parts.append(self.rng.choice(["  ", "  ", "\t"]) * depth)

    def item(self, item: Item, depth: int) -> None:
        """One statement."""
        if isinstance(item, str):
            self.parts.append(self.continued(item, depth))
            return
        head, inner, tail = item
        self.parts.append(f"{head}{self.rng.choice([' ', ' ', ''])}{{")
        if self.rng.random() < 0.25:
            self.parts.append(" ")
        else:
            self.line_end(depth + 1)
        self.items(inner, depth + 1)
        self.rng.choice([lambda: self.parts.append(" "), lambda: self.line_end(depth)])()
        self.parts.append("}" + self.continued(tail, depth))

    def continued(self, text: str, depth: int) -> str:
        """The same statement, its last clauses perhaps on a line of their own."""
        if self.rng.random() < 0.1:
            return _CLAUSE.sub("\n" + "    " * (depth + 1), text, count=1)
        return text


def laid_out(items: Sequence[Item], rng: Random) -> str:
    """A text that means these statements."""
    layout = _Layout(rng)
    layout.items(items, 0)
    text = "".join(layout.parts) + rng.choice(["\n", "", "\n\n# end"])
    if rng.random() < 0.15:
        text = text.replace("\n", "\r\n")
    return ("\ufeff" if rng.random() < 0.1 else "") + text
