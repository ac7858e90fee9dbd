"""A block of the timeline → the wished volts of all electrodes at any instant of it.

Shapes: (electrodes,) in order along the axis.  Units: s of the block, V.  Edges count as over from
the instant at which they end; a switch that passes a converter through follows it.
"""

from __future__ import annotations

from bisect import bisect_right
from fractions import Fraction

import numpy as np
import numpy.typing as npt

from wellseq.model.trap import Switch, Trap
from wellseq.timeline.timeline import Block, Edge, Piece

Vector = npt.NDArray[np.float64]


class Voltages:
    """What stands on the electrodes of one block."""

    def __init__(self, trap: Trap, block: Block) -> None:
        self.trap, self.block = trap, block
        self._pieces: dict[str, list[Piece]] = {}
        for piece in block.pieces:
            self._pieces.setdefault(piece.output, []).append(piece)
        self._edges: dict[str, list[Edge]] = {}
        for edge in block.edges:
            self._edges.setdefault(edge.output, []).append(edge)
        self._starts = {
            name: [one.start_s for one in pieces] for name, pieces in self._pieces.items()
        }
        self._ends = {name: [one.end_s for one in edges] for name, edges in self._edges.items()}
        self._found: dict[Fraction, Vector] = {}

    def at(self, time_s: Fraction) -> Vector:
        """Volts (electrodes,) at an instant in s; not to be changed."""
        found = self._found.get(time_s)
        if found is None:
            outputs = {item.name: self._output_V(item.name, time_s) for item in self.trap.outputs}
            found = np.array([outputs[item.output] for item in self.trap.electrodes])
            self._found[time_s] = found
        return found

    def _output_V(self, name: str, time_s: Fraction) -> float:
        output = self.trap.output(name)
        if not isinstance(output, Switch):
            return self._converter_V(name, time_s)
        index = self.block.levels[name]
        passed = bisect_right(self._ends.get(name, []), time_s)
        if passed:
            index = self._edges[name][passed - 1].to_level
        level = output.levels[index]
        return self._converter_V(level, time_s) if isinstance(level, str) else level

    def _converter_V(self, name: str, time_s: Fraction) -> float:
        begun = bisect_right(self._starts.get(name, []), time_s)
        if not begun:
            return self.block.volts[name]
        piece = self._pieces[name][begun - 1]
        return piece.to_V if time_s >= piece.end_s else piece.at(time_s)
