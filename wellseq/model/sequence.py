"""A sequence with everything settled: what is played, in order, repeats and calls expanded."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction

from wellseq.base.finding import Mistake, Origin
from wellseq.base.place import Place
from wellseq.base.quantity import Spread
from wellseq.model.species import Species
from wellseq.model.step import Step
from wellseq.model.trap import Trap


@dataclass(frozen=True, slots=True)
class CloudDeclared:
    """A cloud as the author declared it; absent quantities are None.

    number: count; radius: m; temperature: K; energy: eV; duration: s; each with its half-width.
    """

    name: str
    species: Species
    place: Place
    number: Spread | None = None
    radius: Spread | None = None
    temperature: Spread | None = None
    energy: Spread | None = None
    duration: Spread | None = None


@dataclass(frozen=True, slots=True)
class Played:
    """One step of one pass; steps of repeated passes share the same Step object."""

    step: Step
    verb: str
    origin: Origin


@dataclass(frozen=True, slots=True)
class Lanes:
    """Lanes that begin together and end with the longest."""

    lanes: tuple[tuple[Played | Lanes, ...], ...]
    origin: Origin


@dataclass(frozen=True, slots=True)
class Allowed:
    """An allowance: the finding's name, the reason, where it is written and the step it is for."""

    name: str
    reason: str
    place: Place
    step_place: Place


@dataclass(frozen=True, slots=True)
class SourceFile:
    """A file that went into the sequence: its name as shown and its exact bytes."""

    shown: str
    content: bytes


@dataclass(frozen=True, slots=True)
class Sequence:
    """What a file says to play.

    `items` are in order of play.  `lets` are the values replaced on the command line.
    `steps_written` counts statements in the file that are steps; `mistakes` is empty for a sound
    text.
    """

    name: str
    file: str
    trap: Trap
    clouds: Mapping[str, CloudDeclared]
    items: tuple[Played | Lanes, ...]
    allowances: tuple[Allowed, ...]
    lets: Mapping[str, str]
    sources: tuple[SourceFile, ...]
    mistakes: tuple[Mistake, ...]
    steps_written: int
    end: Place
    each_values: tuple[Fraction | str, ...] = ()
