"""A monotone model and intervals of its inputs → the interval of its answer.

Where the answer rises (or falls) with each input alone, its extremes are at two corners of the box
of inputs.  Which input rises and which falls is the caller's claim, tested as a property beside
each model.  Units are the caller's.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping
from typing import Any

from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside


def corners(
    model: Callable[..., Any],
    *,
    rising: Mapping[str, Figure],
    falling: Mapping[str, Figure],
    fixed: Mapping[str, Any],
) -> tuple[Any, Any, Any]:
    """The model's answers at the low corner, at the best values, and at the high corner.

    The answer in question rises with each input of `rising` and falls with each of `falling`;
    `fixed` goes in as it is.
    """
    low = {name: item.low for name, item in rising.items()}
    low |= {name: item.high for name, item in falling.items()}
    best = {name: item.value for name, item in (*rising.items(), *falling.items())}
    high = {name: item.high for name, item in rising.items()}
    high |= {name: item.low for name, item in falling.items()}
    return model(**low, **fixed), model(**best, **fixed), model(**high, **fixed)


def spanned(best: float, others: Iterable[float]) -> Figure:
    """The figure that has `best` and reaches to the extremes of the others; any unit.

    One number that is not known leaves no figure.  Infinity (never) is kept as an end.
    """
    every = (best, *others)
    if any(math.isnan(value) for value in every):
        return NOT_KNOWN
    return Figure(best, min(every), max(every))


def all_reasons(answers: Iterable[Any]) -> tuple[Outside, ...]:
    """Every reason of every answer (they have `outside`), each quantity once, in order."""
    found: dict[tuple[str, str], Outside] = {}
    for answer in answers:
        for reason in answer.outside:
            found.setdefault((reason.model, reason.quantity), reason)
    return tuple(found.values())
