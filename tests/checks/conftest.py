"""Hand-made cases for the checks: a small invented trap, and builders for every stage."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import replace
from fractions import Fraction
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest

from wellseq.base.finding import Finding, Mistake, Origin
from wellseq.base.place import Place
from wellseq.checks.case import Case
from wellseq.checks.judging import check, judge
from wellseq.model.rulebook import Rulebook
from wellseq.model.sequence import Allowed, CloudDeclared
from wellseq.model.sequence import Sequence as Played
from wellseq.model.species import species
from wellseq.model.trap import (
    Bore,
    Converter,
    Electrode,
    Line,
    MagneticField,
    Margins,
    Switch,
    Trap,
    Trigger,
)
from wellseq.rules.rulings import Rulings
from wellseq.timeline.ship import ship
from wellseq.timeline.shipped import Rounding, Shipped, ShippedBlock, Stray
from wellseq.timeline.timeline import (
    Block,
    Drive,
    Edge,
    Event,
    Piece,
    Shape,
    StepSpan,
    Timeline,
)
from wellseq.wells.wells import Held, Losses, SideDepth, Wells

US = Fraction(1, 10**6)
NS = Fraction(1, 10**9)
NO_WELLS = Wells((), (), (), (), 0.0)
NO_RULES, NO_RULINGS = Rulebook(), Rulings()


class Maker:
    """Builds stages from few words; times may be whole microseconds written as `us`."""

    us, ns = US, NS

    def converter(self, name: str, **more: Any) -> Converter:
        """±100 V in 2001 codes of 0.1 V each would need 11 bits; 16 bits, 1 us, 10 V/us."""
        facts = {"range_V": (-100.0, 100.0), "slew_V_per_s": 1e7, "bits": 16, "clock_s": US}
        return Converter(name=name, **{**facts, **more})

    def trap(
        self,
        outputs: Sequence[Converter | Switch] | None = None,
        margins: Margins | None = None,
        patch_V: float | None = 0.0,
        sectors: int = 1,
    ) -> Trap:
        """Three electrodes A, B, C on converters a, b, c, or on the outputs given."""
        outputs = outputs or [self.converter(name) for name in "abc"]
        return Trap(
            name="Sandbank",
            field=MagneticField(uniform_T=1.0),
            bore=Bore(patch_V=patch_V),
            electrodes=tuple(
                Electrode(
                    name=output.name.upper(),
                    from_m=0.02 * i,
                    to_m=0.02 * i + 0.018,
                    radius_m=0.01,
                    sectors=sectors if i == 0 else 1,
                    output=output.name,
                )
                for i, output in enumerate(outputs)
            ),
            outputs=tuple(outputs),
            lines=(Line(name="shutter", states=("closed", "open"), initial="closed", clock_s=US),),
            triggers=(Trigger(name="arrival", latency_s=US, jitter_s=US / 10),),
            margins=margins or Margins(),
        )

    def switch(self, name: str, *levels: float | str, **more: Any) -> Switch:
        """A switch with an edge of 100 ns on a clock of 10 ns."""
        return Switch(name=name, levels=levels, edge_s=100 * NS, clock_s=10 * NS, **more)

    def piece(
        self,
        output: str,
        start: Fraction,
        end: Fraction,
        from_V: float,
        to_V: float,
        number: int = 0,
        shape: str = "straight",
    ) -> Piece:
        """A motion of one output in step `number`."""
        return Piece(output, start, end, from_V, to_V, Shape(shape), number)

    def block(
        self,
        trap: Trap,
        pieces: Iterable[Piece] = (),
        spans: Sequence[tuple[Fraction, Fraction]] | None = None,
        *,
        volts: dict[str, float] | None = None,
        levels: dict[str, int] | None = None,
        edges: Iterable[Edge] = (),
        events: Iterable[Event] = (),
        drives: Iterable[Drive] = (),
        index: int = 0,
        first_number: int = 0,
        within_s: Fraction = Fraction(0),
        first_row_s: Fraction = Fraction(0),
        jitter_s: Fraction = Fraction(0),
    ) -> Block:
        """A block whose steps last for `spans`; outputs stand at 0 V and first levels before it."""
        pieces, edges, spans = tuple(pieces), tuple(edges), spans or [(Fraction(0), US)]
        ends = [*(end for _, end in spans), *(piece.end_s for piece in pieces)]
        standing = {o.name: 0.0 for o in trap.outputs if isinstance(o, Converter)}
        first = {o.name: 0 for o in trap.outputs if isinstance(o, Switch)}
        return Block(
            name="run" if index == 0 else "arrival",
            index=index,
            trigger="" if index == 0 else "arrival",
            within_s=within_s,
            first_row_s=first_row_s,
            jitter_s=jitter_s,
            volts={**standing, **(volts or {})},
            levels={**first, **(levels or {})},
            states={line.name: line.initial for line in trap.lines},
            pieces=pieces,
            edges=edges,
            changes=(),
            drives=tuple(drives),
            events=tuple(events),
            spans=tuple(
                StepSpan(first_number + i, start, end) for i, (start, end) in enumerate(spans)
            ),
            duration_s=max(ends),
        )

    def origin(self, number: int, label: str = "", passes: tuple[int, ...] = ()) -> Origin:
        """Step `number` is written on line number + 1."""
        return Origin(self.place(number), "step", label, passes, (), number)

    def place(self, number: int) -> Place:
        """Where step `number` is written."""
        return Place("night.well", number + 1, 1, number + 1, 9)

    def sequence(self, trap: Trap, allowances: Sequence[Allowed] = (), **clouds: str) -> Played:
        """A sequence of these clouds, by name and species."""
        declared = {
            name: CloudDeclared(name, species(kind), self.place(0)) for name, kind in clouds.items()
        }
        return Played(
            name="night",
            file="night.well",
            trap=trap,
            clouds=declared,
            items=(),
            allowances=tuple(allowances),
            lets={},
            sources=(),
            mistakes=(),
            steps_written=1,
            end=self.place(99),
        )

    def case(
        self,
        trap: Trap | None = None,
        blocks: Sequence[Block] | None = None,
        *,
        wells: Wells | None = NO_WELLS,
        rules: Rulebook | None = NO_RULES,
        rulings: Rulings | None = NO_RULINGS,
        shipped: Shipped | None = None,
        labels: dict[int, str] | None = None,
        mistakes: Sequence[Mistake] = (),
        allowances: Sequence[Allowed] = (),
        **clouds: str,
    ) -> Case:
        """A case whose rows are shipped from its blocks unless `shipped` is given."""
        trap = trap or self.trap()
        blocks = tuple(blocks if blocks is not None else [self.block(trap)])
        count = 1 + max((s.number for block in blocks for s in block.spans), default=0)
        origins = tuple(self.origin(n, (labels or {}).get(n, "")) for n in range(count))
        timeline = Timeline(trap, blocks, origins, ())
        return Case(
            path=Path("night.well"),
            shown="night.well",
            mistakes=tuple(mistakes),
            trap=trap,
            sequence=self.sequence(trap, allowances, **clouds),
            timeline=timeline,
            shipped=shipped or ship(timeline),
            wells=wells,
            rules=rules,
            rulings=rulings,
        )

    def shipped(
        self,
        trap: Trap,
        *blocks: Block,
        ticks: Sequence[int] = (0, 1),
        codes: Sequence[Sequence[int]] | None = None,
        levels: Sequence[Sequence[int]] | None = None,
        roundings: Sequence[Rounding] = (),
        strays: Sequence[Stray] = (),
        tick_s: Fraction = US,
    ) -> Shipped:
        """Rows written by hand, the same ones in every block."""
        converters = [o for o in trap.outputs if isinstance(o, Converter)]
        switches = [o.name for o in trap.outputs if isinstance(o, Switch)]
        rows = len(ticks)
        blank = np.zeros((rows, len(converters)), np.int64)
        return Shipped(
            converters=tuple(output.name for output in converters),
            switches=tuple(switches),
            lines=("shutter",),
            blocks=tuple(
                ShippedBlock(
                    block,
                    tick_s,
                    np.array(ticks, np.int64),
                    blank if codes is None else np.array(codes, np.int64),
                    np.zeros((rows, len(switches)), np.int64)
                    if levels is None
                    else np.array(levels, np.int64),
                    np.zeros((rows, 1), np.int64),
                    tuple(roundings),
                    tuple(strays),
                )
                for block in blocks
            ),
            code_V={output.name: abs(output.gain) * output.code_V for output in converters},
        )

    def side(self, certified_V: float, best_V: float | None = None, **losses: float) -> SideDepth:
        """A side's depth; `losses` are what was taken off, V."""
        best = certified_V if best_V is None else best_V
        return SideDepth(certified_V, best, Losses(**losses), 0.0, 0.01, 0.02, (0.0, 0.03))

    def held(
        self,
        left: SideDepth | float,
        right: SideDepth | float | None = None,
        *,
        cloud: str = "pool",
        floor: float = 0.5,
        start: Fraction = Fraction(0),
        end: Fraction = US,
        number: int = 0,
        block: int = 0,
        at_m: tuple[float, float] = (0.02, 0.02),
        energetic: bool = False,
    ) -> Held:
        """A cloud held during one stretch; numbers are certified depths without losses, V."""
        sides = [
            one if isinstance(one, SideDepth) else self.side(one)
            for one in (left, left if right is None else right)
        ]
        region = min(at_m) - 0.001, max(at_m) + 0.001
        return Held(
            cloud,
            -1,
            block,
            start,
            end,
            number,
            region,
            *at_m,
            *sides,
            1.0,
            (floor, floor),
            energetic,
        )

    def wells(self, *held: Held, **more: Any) -> Wells:
        """Everything known about wells."""
        return replace(NO_WELLS, held=held, **more)

    def mistake(self, name: str, number: int = 0) -> Mistake:
        """A mistake of that name at step `number`."""
        return Mistake(name, self.place(number), f"something is {name}", "mend it")

    def allow(self, name: str, number: int = 0) -> Allowed:
        """An allowance for step `number`."""
        at = Place("night.well", number + 1, 40, number + 1, 60)
        return Allowed(name, "the cloud is dumped next", at, self.place(number))

    def findings(self, case: Case, name: str) -> tuple[Finding, ...]:
        """The judged findings of that name, in order."""
        return tuple(finding for finding in judge(case).findings if finding.name == name)

    def verdicts(self, case: Case, name: str) -> list[str]:
        """Their verdicts."""
        return [finding.verdict.value for finding in self.findings(case, name)]

    def only_mistakes(self, name: str) -> None:
        """The law of a check that hands on mistakes of its own name and nothing else."""
        module = check(name)
        assert (module.NEEDS, module.WAIVABLE) == (("mistakes",), False)
        bare = Case(Path("night.well"), "night.well")
        other = "syntax" if name != "syntax" else "too-large"
        wrong = [self.mistake(name, 0), self.mistake(other, 1), self.mistake(name, 2)]
        found = self.findings(replace(bare, mistakes=tuple(wrong)), name)
        assert [(f.verdict.value, f.place.line, f.message, f.hint) for f in found] == [
            ("fail", 1, f"something is {name}", "mend it"),
            ("fail", 3, f"something is {name}", "mend it"),
        ]
        assert self.verdicts(replace(bare, mistakes=tuple(wrong[1:2])), name) == []
        assert self.verdicts(bare, name) == []
        allowed = self.case(mistakes=wrong[:1], allowances=[self.allow(name)])
        assert self.verdicts(allowed, name) == ["fail"]


@pytest.fixture(scope="session")
def make() -> Maker:
    """The builder of hand-made cases."""
    return Maker()


@pytest.fixture(scope="session")
def beyond() -> SimpleNamespace:
    """The next float above and below a number."""
    return SimpleNamespace(
        up=lambda number: float(np.nextafter(number, np.inf)),
        down=lambda number: float(np.nextafter(number, -np.inf)),
    )
