"""Two trees → whether they say the same, wherever it stands."""

from __future__ import annotations

from dataclasses import fields, is_dataclass

from wellseq.base.place import Place
from wellseq.text.tree import Tree


def same(one: Tree, other: Tree) -> bool:
    """Whether two files have the same statements in the same order, places left out."""
    waiting: list[tuple[object, object]] = [(one.statements, other.statements)]
    while waiting:
        left, right = waiting.pop()
        if type(left) is not type(right):
            return False
        if isinstance(left, tuple) and isinstance(right, tuple):
            if len(left) != len(right):
                return False
            waiting += zip(left, right, strict=True)
        elif is_dataclass(left) and not isinstance(left, type):
            if not isinstance(left, Place):
                names = [item.name for item in fields(left)]
                waiting += [(getattr(left, name), getattr(right, name)) for name in names]
        elif left != right:
            return False
    return True
