"""One file per step kind, named by its verb, holding one subclass of `Step`.

A verb that is a Python keyword gets an underscore at the end of its file's name (`await_.py`).  The
folder finds its own members; a step kind is imported when its verb is first met.
"""

from __future__ import annotations

from functools import cache
from importlib import import_module
from pkgutil import iter_modules

from wellseq.model.step import Step


@cache
def verbs() -> tuple[str, ...]:
    """All verbs that are steps, in alphabetical order; nothing is imported."""
    return tuple(sorted(found.name.removesuffix("_") for found in iter_modules(__path__)))


@cache
def step_class(verb: str) -> type[Step] | None:
    """The step kind of a verb, None for a word that is no step's verb."""
    if verb not in verbs():
        return None
    name = next(found.name for found in iter_modules(__path__) if found.name in (verb, f"{verb}_"))
    module = import_module(f"{__name__}.{name}")
    (kind,) = (
        item
        for item in vars(module).values()
        if isinstance(item, type) and issubclass(item, Step) and item.__module__ == module.__name__
    )
    return kind
