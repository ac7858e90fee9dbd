"""A small cleared case made by hand: two blocks, every kind of output, one allowance, one claim.

Nothing of text, model or field takes part but the trap reader and the shipping of rows.
"""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from pathlib import Path

from wellseq.base.finding import Finding, Origin, Verdict
from wellseq.base.place import Place
from wellseq.checks.case import Case
from wellseq.checks.judging import Cleared, check_names, clear
from wellseq.model.effects import Assumed
from wellseq.model.rulebook import Rulebook
from wellseq.model.sequence import Allowed, Sequence, SourceFile
from wellseq.model.trap import Trap
from wellseq.model.trap_file import trap_from
from wellseq.rules.rulings import Rulings
from wellseq.timeline.ship import ship
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
from wellseq.wells.wells import Held, Losses, SideDepth, Wells

TRAP = """\
wellseq-trap = 1
name = "Gorse | bench"

[field]
uniform = "1.2 T"

[bore]
temperature = "6 K"
patch = "25 mV"

[site]
magnet = true
cryogen = "helium"
source = "none <here>"

[[electrode]]
name = "C1"
from = "0 mm"
to = "10 mm"
radius = "15 mm"
output = "lv1"
[[electrode]]
name = "C2"
from = "11 mm"
to = "21 mm"
radius = "15 mm"
output = "lv2"
[[electrode]]
name = "R3"
from = "22 mm"
to = "32 mm"
radius = "15 mm"
sectors = 4
output = "lv3"
[[electrode]]
name = "G4"
from = "33 mm"
to = "53 mm"
radius = "15 mm"
output = "hv"

[[output]]
name = "lv1"
range = ["-140 V", "140 V"]
slew = "12 V/us"
bits = 16
clock = "1 us"
gain = "1.0003 ± 0.0001"
offset = "0.4 mV ± 0.2 mV"
capacitance = "300 pF"
[[output]]
name = "lv2"
range = ["-10 V", "10 V"]
slew = "1 V/us"
bits = 18
clock = "10 us"
between_rows = "line"
[[output]]
name = "lv3"
range = ["-75 V", "75 V"]
slew = "12 V/us"
bits = 12
clock = "2 us"
[[output]]
name = "hv"
kind = "switch"
levels = ["lv3", "-900 V"]
edge = "90 ns"
clock = "10 ns"
hazardous = true
capacitance = "2 nF"

[[line]]
name = "shutter"
states = ["closed", "open"]
initial = "closed"
clock = "1 us"
[[line]]
name = "vacuum_ok"
states = ["on", "off"]
kind = "input"
clock = "1 us"

[[trigger]]
name = "bunch"
within = "130 s"
latency = "250 ns"
jitter = "20 ns"

[margins]
staircase = "50 mV"
"""

TEXT = """\
wellseq 1
trap "gorse.trap.toml"
sequence night {
  hold for 1 ms
  "open it" ramp open over 1 ms
  allow ramp-not-adiabatic because "dumped | next"
}
"""

MILLI = Fraction(1, 1000)
PLACE = Place("night.well", 4, 3, 4, 16)
STEP = Place("night.well", 5, 3, 6, 51)


def trap() -> Trap:
    """The trap of TRAP; fails loudly when the trap reader refuses it."""
    read, mistakes = trap_from(TRAP, "gorse.trap.toml")
    assert read is not None, mistakes
    return read


def blocks() -> tuple[Block, ...]:
    """A run that ramps on a holding and on a drawing card, and a block at a trigger."""
    volts = {"lv1": 0.0, "lv2": -1.0, "lv3": 20.0}
    run = Block(
        name="run",
        index=0,
        trigger="",
        within_s=Fraction(0),
        first_row_s=Fraction(0),
        jitter_s=Fraction(0),
        volts=volts,
        levels={"hv": 0},
        states={"shutter": "closed", "vacuum_ok": "on"},
        pieces=(
            Piece("lv1", MILLI, 11 * MILLI, 0.0, 100.0, Shape.STRAIGHT, 1),
            Piece("lv2", MILLI, 11 * MILLI, -1.0, 4.0, Shape.SMOOTH, 1),
        ),
        edges=(),
        changes=(LineChange("shutter", Fraction(1, 3) * MILLI, "open", False, 0),),
        drives=(Drive("R3", MILLI, 3 * MILLI, 2e5, 1.6e6, 0.5, 1, (0.0, 270.0, 180.0, 90.0), 1),),
        events=(
            Event(
                MILLI,
                3 * MILLI,
                Assumed("temperature", "cool_e", 140.0, 40.0, "K", "measured *twice*"),
                1,
            ),
        ),
        spans=(StepSpan(0, Fraction(0), MILLI), StepSpan(1, MILLI, 11 * MILLI)),
        duration_s=11 * MILLI,
    )
    return run, _caught(run)


def _caught(run: Block) -> Block:
    """The block at the trigger: a ramp down, a switch thrown and thrown back."""
    return replace(
        run,
        name="bunch",
        index=1,
        trigger="bunch",
        within_s=Fraction(130),
        first_row_s=Fraction(250, 10**9),
        jitter_s=Fraction(20, 10**9),
        volts={**run.volts, "lv1": 100.0, "lv2": 4.0},
        states={**run.states, "shutter": "open"},
        pieces=(Piece("lv3", MILLI, 4 * MILLI, 20.0, 0.0, Shape.STRAIGHT, 2),),
        edges=(
            Edge(
                "hv",
                Fraction(1, 10**6),
                Fraction(1, 10**6),
                Fraction(1, 10**6) + Fraction(1125, 10**10),
                0,
                1,
                2,
            ),
            Edge("hv", MILLI / 2, MILLI / 2, MILLI / 2 + Fraction(1125, 10**10), 1, 0, 2),
        ),
        changes=(),
        drives=(),
        events=(),
        spans=(StepSpan(2, Fraction(0), 4 * MILLI),),
        duration_s=4 * MILLI,
    )


LEFT, WELL, RIGHT = (0.006, 0.034), (0.034, 0.042), (0.042, 0.1)
"""The regions of the claim, m: the well is under R3 and G4, at 20 V for electrons."""


def side(certified_V: float, region_m: tuple[float, float]) -> SideDepth:
    """One side of a claim, half a volt taken off."""
    losses = Losses(calibration_V=0.3, noise_V=0.2)
    return SideDepth(certified_V, certified_V + 0.6, losses, 0.002, 0.0136, 0.037, region_m)


def wells() -> Wells:
    """One cloud held while C1 and C2 begin to move: 8.33 V and 17.4 V deep at the end."""
    held = Held(
        "cool_e",
        -1,
        0,
        MILLI,
        3 * MILLI,
        1,
        WELL,
        0.037,
        0.037,
        side(8.0, LEFT),
        side(3.5, RIGHT),
        3.5,
        (0.5, 0.5),
    )
    return Wells((held,), (), (), (), 1e-9)


def findings() -> tuple[Finding, ...]:
    """Two margins and one allowed finding."""
    margin = Finding(
        name="well-too-shallow",
        verdict=Verdict.PASS,
        message="the well of cool_e is 3.5 V deep on its right side",
        place=STEP,
        subject="cool_e, right",
        step="ramp",
        label="open it",
        block="run",
        window_s=(0.001, 0.003),
        value=3.5,
        limit=0.5,
        unit="V",
        margin=3.0,
        uncertainty=0.1,
    )
    return (
        replace(margin, name="slew-too-fast", subject="lv1", value=1e5, limit=1.2e7, unit="V/s"),
        margin,
        replace(
            margin,
            name="off-clock",
            verdict=Verdict.ALLOWED,
            message="the clock moves this <b>instant</b>",
            reason="dumped | next",
            margin=-1.0,
        ),
    )


def case(**changes: object) -> Case:
    """A clear case; fields of `Case` may be replaced."""
    made = trap()
    sources = (
        SourceFile("night.well", TEXT.encode()),
        SourceFile("gorse.trap.toml", TRAP.encode()),
    )
    sequence = Sequence(
        name="night",
        file="night.well",
        trap=made,
        clouds={},
        items=(),
        allowances=(Allowed("off-clock", "dumped | next", Place("night.well", 6, 3, 6, 51), STEP),),
        lets={"wall": "80 V"},
        sources=sources,
        mistakes=(),
        steps_written=2,
        end=Place("night.well", 7, 1, 7, 2),
    )
    origins = tuple(
        Origin(place, "hold" if number == 0 else "ramp", "", (), (), number)
        for number, place in enumerate((PLACE, STEP, STEP))
    )
    timeline = Timeline(made, blocks(), origins, ())
    plain = Case(
        path=Path("night.well"),
        shown="night.well",
        trap=made,
        sequence=sequence,
        timeline=timeline,
        shipped=ship(timeline),
        wells=wells(),
        rules=Rulebook(),
        rulings=Rulings(),
        findings=findings(),
        ran=check_names(),
        sources=sources,
    )
    return replace(plain, **changes)  # type: ignore[arg-type]


def cleared(**changes: object) -> Cleared:
    """The key for a clear case."""
    key = clear(case(**changes))
    assert key is not None
    return key
