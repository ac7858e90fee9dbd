"""One file per effect that changes a cloud's figures, named like the effect in small letters.

Each has `act(ledger, effect)`, which brings the clouds concerned to the end of the present step and
returns their names.  The folder finds its own members; a file is imported when its effect is met.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from importlib import import_module
from pkgutil import iter_modules
from typing import TYPE_CHECKING

from wellseq.model.effects import Effect

if TYPE_CHECKING:
    from wellseq.clouds.ledger import Ledger

Act = Callable[["Ledger", Effect], set[str]]


@cache
def handled() -> frozenset[str]:
    """The names of all effects that have a handler, in small letters."""
    return frozenset(found.name for found in iter_modules(__path__))


def handler_of(effect: Effect) -> Act | None:
    """What acts on an effect; None for one that changes no figure."""
    name = type(effect).__name__.lower()
    if name not in handled():
        return None
    act: Act = import_module(f"{__name__}.{name}").act
    return act
