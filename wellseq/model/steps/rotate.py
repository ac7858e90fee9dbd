"""rotate: a rotating-wall drive on the sectors of a ring.

A ring of n sectors drives azimuthal order m as a travelling wave when neighbouring sectors differ
by 360 m / n degrees, which turns one way only while n > 2 m.  Source: derived (sampling of a wave
of order m at n angles).
"""

from collections.abc import Iterator
from typing import Annotated

from wellseq.model.effects import Acted
from wellseq.model.pen import Pen
from wellseq.model.step import (
    Amplitude,
    Cloud,
    Duration,
    Electrode,
    Frequency,
    Objection,
    Step,
    Subject,
    Word,
)
from wellseq.model.trap import Trap


class Rotate(Step):
    """`rotate CLOUD on RING from F to F at V for T [quadrupole] [backwards]`.

    `from_` and `to` in Hz, `at` in V zero to peak at each sector, `for_` in s.  The drive turns as
    this cloud's charge does in the field, against it when `backwards`.
    """

    cloud: Annotated[Cloud, Subject()]
    on: Electrode
    from_: Frequency
    to: Frequency
    at: Amplitude
    for_: Duration
    quadrupole: Word = False
    backwards: Word = False

    @property
    def order(self) -> int:
        """Azimuthal order of the drive: 1 dipole, 2 quadrupole."""
        return 2 if self.quadrupole else 1

    def objections(self, trap: Trap) -> Iterator[Objection]:
        """The ring needs sectors, and more than twice as many as the drive's order."""
        sectors = trap.electrode(self.on).sectors
        if sectors == 1:
            rings = ", ".join(item.name for item in trap.electrodes if item.sectors > 1)
            yield Objection(
                "on",
                "unknown-name",
                f"'{self.on}' has no sectors, and a drive needs a sectored ring",
                f"sectored rings: {rings}" if rings else "this trap has no sectored ring",
            )
        elif sectors <= 2 * self.order:
            yield Objection(
                "quadrupole",
                "unknown-name",
                f"a quadrupole drive on the {sectors} sectors of '{self.on}' does not rotate",
                "leave `quadrupole` out, or use a ring of 6 or 8 sectors",
            )

    def draw(self, pen: Pen) -> None:
        """Drive the ring, in the sense in which the cloud's charge rotates."""
        sense = pen.sense_of(self.cloud)
        pen.drive(
            self.on,
            self.from_,
            self.to,
            self.at,
            self.for_,
            order=self.order,
            sense=-sense if self.backwards else sense,
        )
        pen.note(Acted(self.cloud))
