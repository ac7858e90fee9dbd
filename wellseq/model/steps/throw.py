"""throw: two-level switches change to one of their levels at once."""

from collections.abc import Iterator
from typing import Annotated

from wellseq.model.pen import Pen
from wellseq.model.step import Electrodes, Objection, Step, Subject, SwitchLevel
from wellseq.model.trap import Switch, Trap


class Throw(Step):
    """`throw E[, E2] to LEVEL`: fixed volts, or the converter output behind the switch."""

    electrodes: Annotated[Electrodes, Subject()]
    to: SwitchLevel

    def objections(self, trap: Trap) -> Iterator[Objection]:
        """Every electrode must hang on a switch that has this level."""
        for name in self.electrodes:
            output = trap.output_of(name)
            if not isinstance(output, Switch):
                yield Objection(
                    "electrodes",
                    "voltage-out-of-range",
                    f"'{name}' hangs on the converter '{output.name}', and only a switch is thrown",
                    f"write `ramp {{ {name} = … }} over …`",
                )
            elif self.to.value not in output.levels:
                yield Objection(
                    "to",
                    "voltage-out-of-range",
                    f"the switch of '{name}' has no level {shown(self.to.value)}",
                    f"levels of {output.name}: {', '.join(map(shown, output.levels))}",
                )

    def draw(self, pen: Pen) -> None:
        """Throw the switches."""
        pen.throw(self.electrodes, self.to.value)


def shown(level: float | str) -> str:
    """A level as it is spoken of, in V or by the name of its converter output."""
    return level if isinstance(level, str) else f"{level:.6g} V"
