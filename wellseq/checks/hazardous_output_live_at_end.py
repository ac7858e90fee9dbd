"""After its last row the sequence leaves an output that can injure at a voltage that can.

The hardware stays where the last row puts it.  IEC 60204-1, Safety of machinery, 6.4, and IEC 61140
allow contact with up to 60 V d.c. in dry places; table value.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from wellseq.base.finding import Mistake, Origin, Reading, at_most
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import figures
from wellseq.checks.numbers import amount
from wellseq.checks.written import mistakes_named
from wellseq.model.trap import Converter, Switch, Trap
from wellseq.timeline.shipped import Shipped
from wellseq.timeline.timeline import Timeline

SAYS = "The sequence ends with a hazardous output at a voltage that must not be touched."
NEEDS = ("trap", "sequence", "timeline", "shipped")
WAIVABLE = True

TOUCH = at_most(60.0, "V")
"""Touchable d.c. voltage in dry places: IEC 60204-1, 6.4; IEC 61140."""


def read(case: Case) -> Iterator[Reading | Mistake]:
    """The size of each hazardous output's last voltage, V, with its spread of calibration."""
    yield from mistakes_named(case, "hazardous-output-live-at-end")
    shipped = reached(case.shipped)
    if not shipped.blocks:
        return
    movers = _last_movers(reached(case.timeline))
    for output in reached(case.trap).outputs:
        if output.hazardous:
            yield _reading(case, reached(case.trap), shipped, output, movers)


def _reading(
    case: Case,
    trap: Trap,
    shipped: Shipped,
    output: Converter | Switch,
    movers: Mapping[str, int],
) -> Reading:
    behind = _behind(trap, shipped, output)
    last = shipped.blocks[-1]
    names = [output.name]
    if isinstance(behind, Converter):
        code = int(last.codes[-1, shipped.converters.index(behind.name)])
        nominal = behind.low_V + code * behind.code_V
        volts = float(figures(behind.electrode_V(nominal)))
        spread = abs(nominal) * behind.gain_spread + behind.offset_spread_V
        names.append(behind.name)
    else:
        volts, spread = behind, output.spread_V if isinstance(output, Switch) else 0.0
    return Reading(
        value=abs(volts),
        uncertainty=spread,
        limit=TOUCH,
        message=(
            f"after the last row {output.name} stays at {amount(volts, 'V')}; "
            "{limit} may be touched"
        ),
        origin=_origin(case, max(movers.get(name, -1) for name in names)),
        subject=output.name,
        block=last.block.name,
        hint="end with this output at 0 V, or switched through to a converter that is",
    )


def _behind(trap: Trap, shipped: Shipped, output: Converter | Switch) -> Converter | float:
    """What sets an output's voltage after the last row: a converter, or a switch's fixed volts."""
    if isinstance(output, Converter):
        return output
    levels = shipped.blocks[-1].levels
    level = output.levels[int(levels[-1, shipped.switches.index(output.name)])]
    if not isinstance(level, str):
        return level
    converter = trap.output(level)
    assert isinstance(converter, Converter)
    return converter


def _last_movers(timeline: Timeline) -> Mapping[str, int]:
    """The number of the step that last moved each output."""
    found: dict[str, int] = {}
    for block in timeline.blocks:
        for piece in block.pieces:
            found[piece.output] = piece.number
        for edge in block.edges:
            found[edge.output] = edge.number
    return found


def _origin(case: Case, number: int) -> Origin:
    """The step that put an output where it ends; the end of the sequence when none did."""
    if number >= 0:
        return case.origin(number)
    return Origin(reached(case.sequence).end)
