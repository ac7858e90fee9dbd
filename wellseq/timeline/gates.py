"""Fast edges: switches thrown, gates closed at an instant, short pulses.

A switch's edge is declared from 10 % to 90 %.  All of it is taken to lie within 1.25 times that,
beginning at the command plus the output's delay, half of it over in the middle: exact for a
straight edge, and the shape within the window may be any monotone one.  Steps made of edges last
until the edge is over, rounded up to the outputs' common clock, so that what follows stays on it.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from fractions import Fraction
from typing import TYPE_CHECKING

from wellseq.model.trap import Converter, Switch
from wellseq.timeline.clocks import next_multiple
from wellseq.timeline.timeline import Edge, Shape

if TYPE_CHECKING:
    from wellseq.timeline.drawing import Drawing

WHOLE_EDGE = Fraction(5, 4)
"""Whole edge over the 10 % to 90 % edge of a straight one."""


def throw(drawing: Drawing, electrodes: Sequence[str], level: float | str) -> None:
    """Throw switches to a level; all are commanded now, the step ends when all edges are over."""
    ends = [drawing.now]
    for electrode in electrodes:
        switch = drawing.trap.output_of(electrode)
        index = _level_index(drawing, electrode, level)
        if isinstance(switch, Switch) and index is not None:
            ends.append(_edge(drawing, switch, index, drawing.now))
    drawing.now = next_multiple(max(ends), drawing.common_s)


def pulse(drawing: Drawing, electrodes: Sequence[str], volts: float, duration_s: Fraction) -> None:
    """Electrodes go to `volts`, stay for `duration_s`, and return, as fast as they can."""
    back = {electrode: drawing.electrode_V(electrode) for electrode in electrodes}
    if any(isinstance(drawing.trap.output_of(electrode), Switch) for electrode in electrodes):
        _pulse_switches(drawing, electrodes, volts, duration_s)
        return
    there = drawing.targets(dict.fromkeys(electrodes, volts), None)
    rise = max(_fastest(drawing, electrode, volts) for electrode in electrodes)
    settled = max(_settling(drawing, electrode, volts) for electrode in electrodes)
    drawing.move_all(there, rise, Shape.EDGE)
    drawing.hold(duration_s)
    drawing.move_all(drawing.targets(back, None), rise + settled, Shape.EDGE)
    drawing.now = next_multiple(drawing.now, drawing.common_s)


def close_gate(drawing: Drawing, near: str, far: str, level: float, closing_s: Fraction) -> None:
    """The near gate goes to `level`, half of its edge over `closing_s` after the trigger."""
    if drawing.electrode_V(far) != level:
        drawing.refuse(
            "cloud-not-placed",
            f"the far gate {far} stands at {drawing.electrode_V(far):g} V when the bunch comes, "
            f"not at {level:g} V",
            f"bring {far} to {level:g} V before the catch",
        )
    if drawing.electrode_V(near) == level:
        drawing.refuse(
            "cloud-not-placed",
            f"the near gate {near} is already closed at {level:g} V when the bunch comes",
            f"open {near} before the catch",
        )
    half_s = closing_s - drawing.draft.first_row_s
    output = drawing.trap.output_of(near)
    if isinstance(output, Switch):
        _close_by_switch(drawing, near, output, level, half_s)
    else:
        _close_by_converter(drawing, near, level, half_s)


def _close_by_switch(
    drawing: Drawing, near: str, switch: Switch, level: float, half_s: Fraction
) -> None:
    index = _level_index(drawing, near, level)
    command = half_s - switch.delay_s - switch.edge_s * WHOLE_EDGE / 2
    if _too_soon(drawing, near, command) or index is None:
        return
    end = _edge(drawing, switch, index, command)
    drawing.now = next_multiple(end, drawing.common_s)


def _close_by_converter(drawing: Drawing, near: str, level: float, half_s: Fraction) -> None:
    rise = _fastest(drawing, near, level)
    name = drawing.converter_behind(near)
    output = drawing.trap.output(name) if name is not None else None
    late = output.delay_s + output.time_constant_s if isinstance(output, Converter) else 0
    start = half_s - rise / 2 - late
    if _too_soon(drawing, near, start):
        return
    settled = _settling(drawing, near, level)
    drawing.hold(start)
    drawing.move_all(drawing.targets({near: level}, None), rise + settled, Shape.EDGE)
    drawing.now = next_multiple(drawing.now, drawing.common_s)


def _too_soon(drawing: Drawing, near: str, command: Fraction) -> bool:
    if command >= 0:
        return False
    latency = drawing.draft.first_row_s
    drawing.refuse(
        "off-clock",
        f"{near} cannot close so soon after the trigger: its edge would have to begin "
        f"{float(-command):.3g} s before the first row",
        f"the first row comes {float(latency):.3g} s after the trigger; close later",
    )
    return True


def _edge(drawing: Drawing, switch: Switch, index: int, command: Fraction) -> Fraction:
    """Record an edge and return when it is over; nothing moves when the level is there already."""
    free = drawing.take("output", switch.name)
    start = command + switch.delay_s
    end = start + switch.edge_s * WHOLE_EDGE
    present = drawing.levels[switch.name]
    if free and present != index:
        drawing.draft.edges.append(
            Edge(switch.name, command, start, end, present, index, drawing.moment)
        )
        drawing.levels[switch.name] = index
    return end


def _level_index(drawing: Drawing, electrode: str, level: float | str) -> int | None:
    output = drawing.trap.output_of(electrode)
    if not isinstance(output, Switch):
        drawing.refuse(
            "voltage-out-of-range",
            f"{electrode} is on the converter output {output.name}, which has no levels to throw",
            "use ramp",
        )
        return None
    if level in output.levels:
        return output.levels.index(level)
    known = ", ".join(f"{one:g} V" if not isinstance(one, str) else one for one in output.levels)
    asked = level if isinstance(level, str) else f"{level:g} V"
    drawing.refuse(
        "voltage-out-of-range",
        f"the switch {output.name} of {electrode} has no level {asked}",
        f"its levels: {known}",
    )
    return None


def _fastest(drawing: Drawing, electrode: str, volts: float) -> Fraction:
    """The shortest time on the output's clock in which an electrode can go straight to `volts`."""
    output = _moved_by(drawing, electrode)
    if not isinstance(output, Converter):
        return output.clock_s
    swing = Fraction(abs(volts - drawing.electrode_V(electrode)))
    needed = swing / Fraction(output.slew_V_per_s)
    return max(next_multiple(needed, output.clock_s), output.clock_s)


def _settling(drawing: Drawing, electrode: str, volts: float) -> Fraction:
    """Time on the output's clock, after the slewing, until the electrode is within half a code.

    A single pole settles from a swing V to half a code c/2 in tau ln(2 V/c); common practice, see
    IEEE Std 1658 on settling.
    """
    output = _moved_by(drawing, electrode)
    if not isinstance(output, Converter):
        return Fraction(0)
    swing = abs(volts - drawing.electrode_V(electrode))
    halves = max(2 * swing / (output.gain * output.code_V), 1.0)
    tail = output.delay_s + output.time_constant_s * Fraction(math.log(halves))
    return next_multiple(tail, output.clock_s)


def _moved_by(drawing: Drawing, electrode: str) -> Converter | Switch:
    name = drawing.converter_behind(electrode)
    return drawing.trap.output(name) if name else drawing.trap.output_of(electrode)


def _pulse_switches(
    drawing: Drawing, electrodes: Sequence[str], volts: float, duration_s: Fraction
) -> None:
    """Throw there now and back `duration_s` after that command."""
    start = drawing.now
    back: list[tuple[Switch, int]] = []
    ends = [start]
    for electrode in electrodes:
        switch = drawing.trap.output_of(electrode)
        index = _level_index(drawing, electrode, volts)
        if isinstance(switch, Switch) and index is not None:
            back.append((switch, drawing.levels[switch.name]))
            ends.append(_edge(drawing, switch, index, start))
    if max(ends) > start + duration_s and back:
        drawing.refuse(
            "off-clock",
            "the switch would be thrown back before its edge is over",
            f"keep it there for {float(max(ends) - start):.3g} s at least",
        )
    for switch, index in back:
        ends.append(_edge(drawing, switch, index, start + duration_s))
    drawing.now = next_multiple(max(ends), drawing.common_s)
