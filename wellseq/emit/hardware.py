"""What a second reader must know of the trap to judge a table: outputs, electrodes, limits.

Floats are written so that they read back the same; clocks and settling times as exact fractions of
seconds.
"""

from __future__ import annotations

from itertools import pairwise

from wellseq.emit.blocks import exact
from wellseq.model.trap import Converter, Switch, Trap
from wellseq.timeline.gates import WHOLE_EDGE


def trap_summary(trap: Trap) -> dict[str, object]:
    """The trap as plain JSON values (V, s, m, F)."""
    electrodes = trap.electrodes
    return {
        "name": trap.name,
        "ends": trap.bore.ends,
        "patch_V": trap.bore.patch_V or 0.0,
        "converters": [_converter(one) for one in trap.outputs if isinstance(one, Converter)],
        "switches": [_switch(one) for one in trap.outputs if isinstance(one, Switch)],
        "lines": [
            {
                "name": line.name,
                "kind": line.kind,
                "states": list(line.states),
                "initial": line.initial,
                "clock_s": exact(line.clock_s),
            }
            for line in trap.lines
        ],
        "electrodes": [
            {
                "name": one.name,
                "from_m": one.from_m,
                "to_m": one.to_m,
                "radius_m": one.radius_m,
                "sectors": one.sectors,
                "output": one.output,
            }
            for one in electrodes
        ],
        "neighbours": [
            {
                "electrodes": [one.name, other.name],
                "limit_V": trap.margins.difference_V(one.name, other.name),
            }
            for one, other in pairwise(electrodes)
        ],
    }


def _converter(one: Converter) -> dict[str, object]:
    return {
        "name": one.name,
        "low_V": one.low_V,
        "high_V": one.high_V,
        "bits": one.bits,
        "gain": one.gain,
        "gain_spread": one.gain_spread,
        "offset_V": one.offset_V,
        "offset_spread_V": one.offset_spread_V,
        "clock_s": exact(one.clock_s),
        "between_rows": one.between_rows,
        "slew_V_per_s": one.slew_V_per_s,
        "time_constant_s": exact(one.time_constant_s),
        "delay_s": exact(one.delay_s),
        "noise_V": one.noise_V,
        "capacitance_F": one.capacitance_F,
        "hazardous": one.hazardous,
    }


def _switch(one: Switch) -> dict[str, object]:
    return {
        "name": one.name,
        "levels": list(one.levels),
        "spread_V": one.spread_V,
        "edge_s": exact(one.edge_s),
        "settle_s": exact(one.delay_s + one.edge_s * WHOLE_EDGE),
        "clock_s": exact(one.clock_s),
        "delay_s": exact(one.delay_s),
        "noise_V": one.noise_V,
        "capacitance_F": one.capacitance_F,
        "hazardous": one.hazardous,
    }
