"""The drawing: the pen that steps draw with, and the blocks that come of it.

Everything is kept per output: where it stands now and the pieces so far.  Time is exact seconds of
the present block.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from fractions import Fraction

from wellseq.base.finding import Mistake, Origin
from wellseq.fields.field import Field
from wellseq.model import effects
from wellseq.model.effects import Effect
from wellseq.model.sequence import CloudDeclared, Played
from wellseq.model.trap import Switch, Trap
from wellseq.timeline import gates, lowering
from wellseq.timeline.clocks import coarsest
from wellseq.timeline.lanes import Ownership
from wellseq.timeline.timeline import (
    Block,
    Drive,
    Edge,
    Event,
    LineChange,
    Piece,
    Shape,
    StepSpan,
    Timeline,
)


@dataclass(slots=True)
class Draft:
    """A block while it is drawn; the meaning of the fields is `Block`'s."""

    name: str
    trigger: str
    within_s: Fraction
    first_row_s: Fraction
    jitter_s: Fraction
    volts: dict[str, float]
    levels: dict[str, int]
    states: dict[str, str]
    pieces: list[Piece] = field(default_factory=list)
    edges: list[Edge] = field(default_factory=list)
    changes: list[LineChange] = field(default_factory=list)
    drives: list[Drive] = field(default_factory=list)
    events: list[Event] = field(default_factory=list)
    spans: list[StepSpan] = field(default_factory=list)


class Drawing:
    """A `Pen` (see `model.pen`) that records.

    `volts`, `levels` and `states` say where converters, switches and lines stand now.  `moment` is
    the number of the step being drawn.
    """

    def __init__(
        self, trap: Trap, clouds: Mapping[str, CloudDeclared], field_of: Callable[[], Field]
    ) -> None:
        self._trap = trap
        self.clouds = clouds
        self.field_of = field_of
        self.now = Fraction(0)
        self.common_s = coarsest(output.clock_s for output in trap.outputs)
        self.owners = Ownership()
        self.origins: list[Origin] = []
        self.mistakes: list[Mistake] = []
        self.blocks: list[Block] = []
        self.volts, self.levels = standing_at_rest(trap)
        self.states = {line.name: line.initial for line in trap.lines}
        self.draft = self._draft("run", "", Fraction(0), Fraction(0), Fraction(0))
        self.trail = lowering.Trail()
        self._effects: list[Effect] = []

    @property
    def trap(self) -> Trap:
        """The trap that is drawn for."""
        return self._trap

    @property
    def moment(self) -> int:
        """The number of the step being drawn."""
        return len(self.origins) - 1

    # one step from beginning to end

    def play(self, played: Played) -> None:
        """Draw one step and date its effects to its whole span."""
        self.origins.append(replace(played.origin, number=len(self.origins)))
        self._effects = []
        block, start = len(self.blocks), self.now
        played.step.draw(self)
        if len(self.blocks) != block:
            start = Fraction(0)
        self.draft.spans.append(StepSpan(self.moment, start, self.now))
        self.trail.mark(self)
        for effect in self._effects:
            self.draft.events.append(Event(start, self.now, effect, self.moment))
            self.trail.note(self, effect)

    def note(self, effect: Effect) -> None:
        """Date an effect to the step being drawn; its clouds belong to this lane."""
        for name in clouds_of(effect):
            self.take("cloud", name)
        self._effects.append(effect)

    def refuse(self, name: str, message: str, hint: str = "") -> None:
        """Record a mistake of the step being drawn."""
        origin = self.origins[-1]
        self.mistakes.append(Mistake(name, origin.place, message, hint, origin))

    def take(self, kind: str, name: str) -> bool:
        """Take a thing for the present lane, or say that a lane beside it has it."""
        free = self.owners.take((kind, name))
        if not free:
            self.refuse(
                "lanes-clash",
                f"{kind} '{name}' belongs to another lane of this alongside",
                "let one lane drive it, or write the steps one after the other",
            )
        return free

    # where electrodes stand

    def converter_behind(self, electrode: str) -> str | None:
        """The converter output that moves an electrode now; None at a fixed level of a switch."""
        output = self._trap.output_of(electrode)
        if not isinstance(output, Switch):
            return output.name
        level = output.levels[self.levels[output.name]]
        return level if isinstance(level, str) else None

    def electrode_V(self, electrode: str) -> float:
        """Wished volts of an electrode now."""
        return standing(self._trap, electrode, self.volts, self.levels)

    # the pen

    def begin(self, targets: Mapping[str, float], others_V: float | None) -> None:
        """The outputs already stand at these volts before the first row."""
        for electrode, volts in targets.items():
            output = self._trap.output_of(electrode)
            if isinstance(output, Switch) and volts in output.levels:
                self.levels[output.name] = output.levels.index(volts)
        self.volts.update(self.targets(targets, others_V))
        self.draft.volts.update(self.volts)
        self.draft.levels.update(self.levels)

    def hold(self, duration_s: Fraction) -> None:
        """Let time pass."""
        self.now += duration_s

    def ramp(
        self,
        targets: Mapping[str, float],
        duration_s: Fraction,
        *,
        others_V: float | None = None,
        smoothly: bool = False,
    ) -> None:
        """Move electrodes to `targets` with one progress."""
        shape = Shape.SMOOTH if smoothly else Shape.STRAIGHT
        self.move_all(self.targets(targets, others_V), duration_s, shape)

    def move_all(self, targets: Mapping[str, float], duration_s: Fraction, shape: Shape) -> None:
        """Converter outputs go to their targets together, and that time passes."""
        for output, volts in targets.items():
            self.move(output, volts, duration_s, shape)
        self.now += duration_s

    def move(
        self, output: str, volts: float, duration_s: Fraction, shape: Shape = Shape.STRAIGHT
    ) -> None:
        """One converter output goes to `volts` from now on; the present instant stays."""
        if self.take("output", output) and self.volts[output] != volts:
            self.draft.pieces.append(
                Piece(
                    output,
                    self.now,
                    self.now + duration_s,
                    self.volts[output],
                    volts,
                    shape,
                    self.moment,
                )
            )
            self.volts[output] = volts

    def throw(self, electrodes: Sequence[str], level: float | str) -> None:
        """Throw the switches of these electrodes to a level."""
        gates.throw(self, electrodes, level)

    def pulse(self, electrodes: Sequence[str], volts: float, duration_s: Fraction) -> None:
        """Take electrodes to `volts` and back."""
        gates.pulse(self, electrodes, volts, duration_s)

    def close_gate(self, near: str, far: str, level: float, closing_s: Fraction) -> None:
        """Close the near gate at an instant after the trigger."""
        gates.close_gate(self, near, far, level, closing_s)

    def lower_depth(
        self,
        cloud: str,
        electrodes: Sequence[str],
        to_V: float,
        duration_s: Fraction,
        *,
        exponentially: bool,
    ) -> None:
        """Lower the own vacuum depth of a cloud's well along a path."""
        lowering.lower_depth(self, cloud, electrodes, to_V, duration_s, exponentially)

    def drive(
        self,
        ring: str,
        from_Hz: float,
        to_Hz: float,
        amplitude_V: float,
        duration_s: Fraction,
        *,
        order: int,
        sense: int,
    ) -> None:
        """Drive the sectors of a ring (Hz, V); sector k lags by its angle times the order."""
        stop = self.now + duration_s
        if not self.take("ring", ring):
            self.now = stop
            return
        sectors = self._trap.electrode(ring).sectors
        phases = tuple((-sense * order * 360.0 * k / sectors) % 360.0 for k in range(sectors))
        self.draft.drives.append(
            Drive(ring, self.now, stop, from_Hz, to_Hz, amplitude_V, order, phases, self.moment)
        )
        self.now = stop

    def set_line(self, line: str, state: str) -> None:
        """Put a digital output line into a state now."""
        if not self.take("line", line):
            return
        if any(c.line == line and c.time_s == self.now for c in self.draft.changes[-64:]):
            self.refuse("line-misused", f"'{line}' is set twice at the same instant")
            return
        if self.states[line] != state:
            self.states[line] = state
            self.draft.changes.append(LineChange(line, self.now, state, False, self.moment))

    def expect_line(self, line: str, state: str) -> None:
        """Declare that a line is in a state now; an output line must be."""
        if self._trap.line(line).kind == "input":
            self.draft.changes.append(LineChange(line, self.now, state, True, self.moment))
        elif self.states[line] != state:
            self.refuse(
                "line-misused",
                f"'{line}' is {self.states[line]} here, not {state}",
                f"set {line} {state} before",
            )

    def await_trigger(self, trigger: str, within_s: Fraction | None) -> None:
        """End the block; the next one begins at the trigger."""
        declared = self._trap.trigger(trigger)
        wait = within_s or declared.within_s or Fraction(0)
        self._close()
        self.draft = self._draft(trigger, trigger, wait, declared.latency_s, declared.jitter_s)

    def sense_of(self, cloud: str) -> int:
        """The sense of rotation of a cloud's charge: E x B, negative charges +1 for B along +z."""
        return -self.clouds[cloud].species.charge_sign * self._trap.field.sign

    # blocks

    def finish(self) -> Timeline:
        """Close the last block and hand the timeline over."""
        self._close()
        return Timeline(
            self._trap,
            tuple(self.blocks),
            tuple(self.origins),
            tuple(self.mistakes),
            self.clouds,
        )

    def _draft(
        self, name: str, trigger: str, within: Fraction, latency: Fraction, jitter: Fraction
    ) -> Draft:
        standing = dict(self.volts), dict(self.levels), dict(self.states)
        return Draft(name, trigger, within, latency, jitter, *standing)

    def _close(self) -> None:
        draft = self.draft
        ends = [piece.end_s for piece in draft.pieces] + [edge.end_s for edge in draft.edges]
        self.blocks.append(
            Block(
                name=draft.name,
                index=len(self.blocks),
                trigger=draft.trigger,
                within_s=draft.within_s,
                first_row_s=draft.first_row_s,
                jitter_s=draft.jitter_s,
                volts=draft.volts,
                levels=draft.levels,
                states=draft.states,
                pieces=tuple(sorted(draft.pieces, key=lambda piece: (piece.start_s, piece.output))),
                edges=tuple(sorted(draft.edges, key=lambda edge: (edge.command_s, edge.output))),
                changes=tuple(sorted(draft.changes, key=lambda change: change.time_s)),
                drives=tuple(sorted(draft.drives, key=lambda drive: drive.start_s)),
                events=tuple(draft.events),
                spans=tuple(draft.spans),
                duration_s=max([self.now, *ends]),
            )
        )
        self.now = Fraction(0)

    def targets(self, targets: Mapping[str, float], others_V: float | None) -> dict[str, float]:
        """Volts per converter output; what cannot be is refused and left out."""
        wished: dict[str, float] = {}
        asked: dict[str, str] = {}
        named = dict(targets)
        if others_V is not None:
            for other in self._trap.electrodes:
                if not isinstance(self._trap.output_of(other.name), Switch):
                    named.setdefault(other.name, others_V)
        for electrode, volts in named.items():
            output = self.converter_behind(electrode)
            if output is None:
                self._stuck(electrode, volts)
            elif wished.setdefault(output, volts) != volts:
                self.refuse(
                    "voltage-out-of-range",
                    f"{electrode} and {asked[output]} share the output {output} and cannot stand "
                    f"at {volts:g} V and {wished[output]:g} V",
                )
            asked.setdefault(output or "", electrode)
        return wished

    def _stuck(self, electrode: str, volts: float) -> None:
        level = self.electrode_V(electrode)
        if level != volts:
            self.refuse(
                "voltage-out-of-range",
                f"{electrode} stands at {level:g} V of its switch and cannot go to {volts:g} V",
                f"throw {electrode} to a converter output first",
            )


def standing_at_rest(trap: Trap) -> tuple[dict[str, float], dict[str, int]]:
    """Volts of converters and level indices of switches before the first statement."""
    volts: dict[str, float] = {}
    levels: dict[str, int] = {}
    for output in trap.outputs:
        rest = trap.rest_of(output.name)
        if isinstance(output, Switch):
            levels[output.name] = output.levels.index(rest)
        elif not isinstance(rest, str):
            volts[output.name] = rest
    return volts, levels


def standing(
    trap: Trap, electrode: str, volts: Mapping[str, float], levels: Mapping[str, int]
) -> float:
    """Wished volts of an electrode, given where converters and switches stand."""
    output = trap.output_of(electrode)
    if not isinstance(output, Switch):
        return volts[output.name]
    level = output.levels[levels[output.name]]
    return volts[level] if isinstance(level, str) else level


def clouds_of(effect: Effect) -> tuple[str, ...]:
    """The clouds that a step acts on; a claim only looks at them."""
    match effect:
        case effects.Claimed() | effects.Assumed():
            return ()
        case effects.Kicked():
            return (effect.light, effect.keeping)
        case effects.Nested():
            return (effect.cloud, effect.host)
        case _:
            return (effect.cloud,)
