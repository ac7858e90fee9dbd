"""Slopes and a start → the path of a stiff ordinary differential equation, with bounded work.

Shapes: a state is a 1-d array (variables,); `Path.states` is (variables, times).  Time in s; the
units of the state are the caller's.  Accuracy: the relative tolerance asked for, 1e-7 unless told;
measured on the closed form of radiative cooling in tests/clouds/test_stiff.py.
Source: the variable-order implicit multistep method of scipy.integrate.solve_ivp ("LSODA").
"""

from __future__ import annotations

import math
import warnings
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

State = NDArray[np.float64]
Slopes = Callable[[float, State], Sequence[float]]
WORK_MAX = 30_000
"""So many evaluations of the slopes, then the solver gives up and says so."""


@dataclass(frozen=True, slots=True)
class Condition:
    """Something to watch: crossed where `value` falls through zero, or starts below it."""

    value: Callable[[float, State], float]
    ends: bool = False


@dataclass(frozen=True, slots=True)
class Path:
    """What the solver found.

    times_s: (times,); states: (variables, times).  crossings_s: for each condition the first time
    in s, NaN where it was not crossed.  ended_by: number of the condition that ended the path, or
    -1.  work: evaluations.  complaint: empty, or why the path is not complete.
    """

    times_s: State
    states: State
    crossings_s: tuple[float, ...]
    ended_by: int
    work: int
    complaint: str

    @property
    def end(self) -> State:
        """The last state."""
        return self.states[:, -1]

    @property
    def whole(self) -> bool:
        """Whether the path runs to the end of the time asked for."""
        return self.ended_by < 0 and not self.complaint


class _TooMuchWork(Exception):
    pass


def solve(
    slopes: Slopes,
    start: Sequence[float],
    duration_s: float,
    *,
    conditions: Sequence[Condition] = (),
    relative: float = 1e-7,
    absolute: float | Sequence[float] = 1e-9,
    longest_step_s: float = math.inf,
    work_max: int = WORK_MAX,
) -> Path:
    """The path from `start` over `duration_s` s, ended early by a condition that `ends`.

    `longest_step_s` in s keeps the solver from stepping over what happens quickly.  Raises nothing:
    a path that could not be finished has a complaint and NaN as its last state.
    """
    first = np.array(start, dtype=np.float64)
    met = [watched.value(0.0, first) <= 0.0 for watched in conditions]
    ended = next((n for n, watched in enumerate(conditions) if watched.ends and met[n]), -1)
    if ended >= 0 or duration_s <= 0.0:
        times = np.zeros(1)
        return Path(times, first[:, None], tuple(0.0 if m else math.nan for m in met), ended, 0, "")
    counted = _Counted(slopes, work_max)
    try:
        found = _integrate(
            counted, first, duration_s, conditions, (relative, absolute), longest_step_s
        )
    except _TooMuchWork:
        return _unfinished(first, len(met), counted, f"more than {work_max} evaluations")
    except (ArithmeticError, ValueError):
        return _unfinished(first, len(met), counted, "the numbers left the range of the machine")
    if found.status < 0 or not np.isfinite(found.y).all():
        return _unfinished(first, len(met), counted, "the step became too small")
    crossings = tuple(
        0.0 if m else (float(times[0]) if len(times) else math.nan)
        for m, times in zip(met, found.t_events or (), strict=True)
    )
    ended = -1
    if found.status == 1:
        last = [
            n for n, watched in enumerate(conditions) if watched.ends and len(found.t_events[n])
        ]
        ended = min(last, key=lambda n: found.t_events[n][0])
    return Path(found.t, found.y, crossings, ended, counted.work, "")


class _Counted:
    def __init__(self, slopes: Slopes, work_max: int) -> None:
        self.slopes, self.work_max, self.work = slopes, work_max, 0

    def __call__(self, time_s: float, state: State) -> Sequence[float]:
        self.work += 1
        if self.work > self.work_max:
            raise _TooMuchWork
        return self.slopes(time_s, state)


def _integrate(
    counted: _Counted,
    first: State,
    duration_s: float,
    conditions: Sequence[Condition],
    tolerances: tuple[float, float | Sequence[float]],
    longest_step_s: float,
) -> Any:
    from scipy.integrate import solve_ivp

    events = []
    for watched in conditions:

        def event(time_s: float, state: State, watched: Condition = watched) -> float:
            return watched.value(time_s, state)

        event.terminal, event.direction = watched.ends, -1  # type: ignore[attr-defined]
        events.append(event)
    # The library warns of its own trouble; it comes back as a status, which is read here.
    with warnings.catch_warnings(), np.errstate(all="ignore"):
        warnings.simplefilter("ignore")
        return solve_ivp(
            counted,
            (0.0, duration_s),
            first,
            method="LSODA",
            events=events or None,
            rtol=tolerances[0],
            atol=tolerances[1],
            max_step=longest_step_s,
        )


def _unfinished(first: State, conditions: int, counted: _Counted, complaint: str) -> Path:
    states = np.stack([first, np.full_like(first, math.nan)], axis=1)
    nothing = (math.nan,) * conditions
    return Path(np.array([0.0, math.nan]), states, nothing, -1, counted.work, complaint)
