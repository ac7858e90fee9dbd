"""The trap: everything a sequence may name, and what is demanded of it, in base units.

A `Trap` is sound by construction: names are unique, electrodes stand in order without overlap,
every mention names something.  `trap_file` makes one from a file and reports what is wrong;
building an unsound one in code raises ValueError.
"""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property
from typing import Annotated, TypeVar

from pydantic import Field, model_validator

from wellseq.base.names import nearest, normal
from wellseq.model.hardware import Converter, Electrode, Line, Part, Rest, Switch, Trigger
from wellseq.model.margins import Margins, PairMargin
from wellseq.model.surroundings import Bore, MagneticField, Site
from wellseq.model.trap_sound import Entry, faults_of
from wellseq.model.written import text

__all__ = [
    "Bore",
    "Converter",
    "Electrode",
    "Line",
    "MagneticField",
    "Margins",
    "PairMargin",
    "Rest",
    "Site",
    "Switch",
    "Trap",
    "Trigger",
]


T = TypeVar("T")


class Trap(Part):
    """The stack and what drives it.

    `electrodes` are in order along the axis.  `file` is the name shown to the reader, `source` the
    exact text of the file (both empty when built in code).  `rests` says where outputs stand before
    the first statement, as written: by electrode or by output; ask `rest_of`.
    """

    name: Annotated[str, text(100)]
    file: str = ""
    source: str = Field("", repr=False)
    field: MagneticField
    bore: Bore = Bore()
    site: Site = Site()
    electrodes: tuple[Electrode, ...]
    outputs: tuple[Converter | Switch, ...]
    lines: tuple[Line, ...] = ()
    triggers: tuple[Trigger, ...] = ()
    margins: Margins = Margins()
    rests: tuple[Rest, ...] = ()

    @model_validator(mode="after")
    def _is_sound(self) -> Trap:
        entries = [
            Entry.of(number, part)
            for parts in (self.electrodes, self.outputs, self.lines, self.triggers)
            for number, part in enumerate(parts)
        ]
        pairs = tuple(enumerate(self.margins.pairs))
        for fault in faults_of(entries, pairs, self.rests):
            raise ValueError(f"{fault.message} ({fault.name})")
        return self

    @cached_property
    def _electrodes(self) -> Mapping[str, int]:
        return {item.name: number for number, item in enumerate(self.electrodes)}

    @cached_property
    def _outputs(self) -> Mapping[str, int]:
        return {item.name: number for number, item in enumerate(self.outputs)}

    @property
    def radius_m(self) -> float:
        """The inner radius of the bore, m, the same for every electrode."""
        return self.electrodes[0].radius_m

    @cached_property
    def names(self) -> frozenset[str]:
        """Every name that the file defines: electrodes, outputs, lines, triggers."""
        parts = (*self.electrodes, *self.outputs, *self.lines, *self.triggers)
        return frozenset(item.name for item in parts)

    def index(self, name: str) -> int:
        """The position of an electrode along the axis, from 0.  Raises KeyError."""
        return _find(self._electrodes, name, "electrode")

    def electrode(self, name: str) -> Electrode:
        """The electrode of that name.  Raises KeyError."""
        return self.electrodes[self.index(name)]

    def output(self, name: str) -> Converter | Switch:
        """The output of that name.  Raises KeyError."""
        return self.outputs[_find(self._outputs, name, "output")]

    def line(self, name: str) -> Line:
        """The digital line of that name.  Raises KeyError."""
        return _find({item.name: item for item in self.lines}, name, "line")

    def trigger(self, name: str) -> Trigger:
        """The trigger of that name.  Raises KeyError."""
        return _find({item.name: item for item in self.triggers}, name, "trigger")

    def output_of(self, electrode: str) -> Converter | Switch:
        """The output that drives an electrode.  Raises KeyError."""
        return self.output(self.electrode(electrode).output)

    def electrodes_of(self, output: str) -> tuple[str, ...]:
        """The electrodes on an output, in order along the axis.  Raises KeyError."""
        wanted = self.output(output).name
        return tuple(item.name for item in self.electrodes if item.output == wanted)

    def between(self, first: str, last: str) -> tuple[str, ...]:
        """The electrodes from first to last in order along the axis, both included.

        Empty when the last stands before the first.  Raises KeyError for an unknown name.
        """
        part = self.electrodes[self.index(first) : self.index(last) + 1]
        return tuple(item.name for item in part)

    @cached_property
    def rest(self) -> Mapping[str, float | str]:
        """Electrode → where its output stands before the first statement, as `rest_of` says it."""
        return {item.name: self.rest_of(item.output) for item in self.electrodes}

    def rest_of(self, output: str) -> float | str:
        """Where an output stands before the first statement.

        A converter: volts at the electrode, 0 unless `rest` says otherwise.  A switch: one of its
        levels, the first unless `rest` says otherwise.  Raises KeyError.
        """
        part = self.output(output)
        users = {part.name, *self.electrodes_of(part.name)}
        for item in self.rests:
            if item.name in users:
                return item.level
        return part.levels[0] if isinstance(part, Switch) else 0.0


def _find(known: Mapping[str, T], name: str, what: str) -> T:
    found = known.get(normal(name))
    if found is None:
        raise KeyError(f"no {what} '{name}': {nearest(name, known, what)}")
    return found
