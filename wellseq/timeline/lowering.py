"""Lowering a well along a path of its own depth: the one step that asks the field for voltages.

While drawing, a cloud's place is known only roughly: it is followed from step to step along
straight lines between the voltages at their ends.  The proof comes later, on the wells' floor, and
judges what was drawn here like everything else.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from fractions import Fraction
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from wellseq.fields.following import follow, locate
from wellseq.fields.inverse import Impossible, Path, evaporation_path
from wellseq.model import effects
from wellseq.model.effects import Effect
from wellseq.model.trap import Converter
from wellseq.timeline.timeline import Shape

if TYPE_CHECKING:
    from wellseq.timeline.drawing import Drawing

Vector = npt.NDArray[np.float64]


@dataclass(slots=True)
class _Home:
    """Where a cloud was last known: index into the trail, and a place (m) or two gates."""

    index: int
    z_m: float | None = None
    gates: tuple[str, str] | None = None


@dataclass(slots=True)
class Trail:
    """The electrode voltages at the end of every step that changed them, and clouds' homes."""

    vectors: list[Vector] = field(default_factory=list)
    homes: dict[str, _Home] = field(default_factory=dict)

    def mark(self, drawing: Drawing) -> None:
        """Remember the present voltages when they differ from the last."""
        names = (electrode.name for electrode in drawing.trap.electrodes)
        present = np.array([drawing.electrode_V(name) for name in names])
        if not self.vectors or not np.array_equal(self.vectors[-1], present):
            self.vectors.append(present)

    def note(self, drawing: Drawing, effect: Effect) -> None:
        """Keep the clouds' homes up to date; to be called after `mark`."""
        here = len(self.vectors) - 1
        match effect:
            case effects.Placed():
                electrode = drawing.trap.electrode(effect.electrode)
                middle = (electrode.from_m + electrode.to_m) / 2
                self.homes[effect.cloud] = _Home(here, z_m=middle)
            case effects.Caught():
                if effect.cloud not in self.homes:
                    self.homes[effect.cloud] = _Home(here, gates=(effect.near, effect.far))
            case effects.Released():
                self.homes.pop(effect.cloud, None)
            case effects.Kicked():
                self.homes.pop(effect.light, None)

    def place_m(self, drawing: Drawing, cloud: str) -> float | None:
        """Where the cloud's minimum is now, m; None when it cannot be followed up to here."""
        home = self.homes.get(cloud)
        if home is None:
            return None
        solved = drawing.field_of()
        sign = drawing.clouds[cloud].species.charge_sign
        z_m = home.z_m if home.z_m is not None else self._between(drawing, cloud, home)
        if z_m is None:
            return None
        located = locate(solved, sign, self.vectors[home.index], z_m)
        if located is None:
            return None
        z_m = located.z_m
        for before, after in pairwise(self.vectors[home.index :]):
            found = follow(solved, sign, before, after, z_m)
            if found is None:
                return None
            z_m = found
        self.homes[cloud] = _Home(len(self.vectors) - 1, z_m=z_m)
        return z_m

    def _between(self, drawing: Drawing, cloud: str, home: _Home) -> float | None:
        """A caught cloud joins one of its own sign between the gates, else the deepest well."""
        assert home.gates is not None
        solved = drawing.field_of()
        low, high = sorted(sum(solved.span_m(gate)) / 2 for gate in home.gates)
        sign = drawing.clouds[cloud].species.charge_sign
        for other in sorted(self.homes):
            same = drawing.clouds[other].species.charge_sign == sign
            if other != cloud and same and self.homes[other].gates is None:
                z_m = self.place_m(drawing, other)
                if z_m is not None and low < z_m < high:
                    home.index = len(self.vectors) - 1
                    return z_m
        home.index = len(self.vectors) - 1
        named = dict(zip(solved.electrodes, map(float, self.vectors[-1]), strict=True))
        wells = solved.wells(named, sign, (low, high))
        deepest = min(wells, key=lambda well: sign * well.potential_V, default=None)
        return None if deepest is None else deepest.z_m


def lower_depth(
    drawing: Drawing,
    cloud: str,
    electrodes: Sequence[str],
    to_V: float,
    duration_s: Fraction,
    exponentially: bool,
) -> None:
    """Draw straight pieces that lower a cloud's own vacuum depth to `to_V` (V), or say why not."""
    converters = _converters(drawing, electrodes)
    if converters is None:
        return
    drawing.trail.mark(drawing)
    z_m = drawing.trail.place_m(drawing, cloud)
    if z_m is None:
        drawing.refuse(
            "depth-not-reachable",
            f"the well of '{cloud}' cannot be followed up to this step",
            "see the findings about its well before this step",
        )
        return
    solved = drawing.field_of()
    columns = [solved.electrodes.index(electrode) for electrode in electrodes]
    sign = drawing.clouds[cloud].species.charge_sign
    reaches = [converter.reach_V for converter in converters]
    vector = drawing.trail.vectors[-1]
    paths = solved.memory.setdefault("paths of evaporation", {})
    key = repr((sign, vector.tobytes(), columns, z_m, to_V, reaches, exponentially)).encode()
    if key not in paths:
        paths[key] = evaporation_path(
            solved, sign, vector, columns, z_m, to_V, reaches, equal_ratios=exponentially
        )
    path: Path | Impossible = paths[key]
    if isinstance(path, Impossible):
        drawing.refuse(
            "depth-not-reachable",
            f"no voltage of {', '.join(electrodes)} brings the own depth of '{cloud}' "
            f"to {to_V:g} V: {path.reason}",
            f"nearest: {path.reached_V:.4g} V with {electrodes[0]} at {path.at_volts[0]:.4g} V",
        )
        return
    start = drawing.now
    for (from_share, _), (to_share, volts) in pairwise(
        zip(path.fractions, path.volts, strict=True)
    ):
        part = duration_s * (Fraction(to_share) - Fraction(from_share))
        for converter, target in zip(converters, volts, strict=True):
            drawing.move(converter.name, float(target), part, Shape.STRAIGHT)
        drawing.now += part
    drawing.now = start + duration_s


def _converters(drawing: Drawing, electrodes: Sequence[str]) -> list[Converter] | None:
    found: list[Converter] = []
    for electrode in electrodes:
        name = drawing.converter_behind(electrode)
        output = drawing.trap.output(name) if name is not None else None
        if not isinstance(output, Converter):
            drawing.refuse(
                "depth-not-reachable",
                f"{electrode} stands at a fixed level of its switch and cannot be lowered slowly",
                f"throw {electrode} to a converter output first",
            )
            return None
        found.append(output)
    return found
