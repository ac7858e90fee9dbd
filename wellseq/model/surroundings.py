"""What surrounds the stack: the magnetic field, the bore and its surfaces, the site.

Base units: T, m, K, V, s.  What is None or empty was not stated, which is not the same as zero.
"""

from __future__ import annotations

from bisect import bisect_right
from itertools import pairwise
from typing import Annotated, Literal

from pydantic import Field, model_validator

from wellseq.model.bounds import bounds
from wellseq.model.hardware import Flag, Metres, Part
from wellseq.model.written import choice, fault, listing, real, sound, text

Tesla = Annotated[float, real("T", bounds("T", least="-100", most="100", nonzero=True))]
Point = Annotated[tuple[Metres, Tesla], listing(2, 2, '["0 mm", "1.6 T"]')]
RULES_FILES_MAX = 16
LATER_ENDS = {"closed": 'closed ends are not understood yet: only ends = "open"'}


def _in_order(points: tuple[tuple[float, float], ...]) -> bool:
    return all(a[0] < b[0] for a, b in pairwise(points))


def _one_sign(points: tuple[tuple[float, float], ...]) -> bool:
    return len({field_T > 0 for _, field_T in points}) <= 1


class MagneticField(Part):
    """The axial field: uniform, or given at points along the axis; positive is along +z.

    Between points it is linear, outside them it stays as at the nearest one.
    """

    uniform_T: Tesla | None = Field(None, alias="uniform")
    points: Annotated[
        tuple[Point, ...],
        listing(2, 10000, '[["-400 mm", "3.0 T"], ["0 mm", "1.6 T"]]'),
        sound(_in_order, "the points are not in order along the axis"),
        sound(_one_sign, "the field changes its direction along the axis"),
    ] = Field((), alias="along")

    @model_validator(mode="after")
    def _says_one_thing(self) -> MagneticField:
        if (self.uniform_T is None) == (not self.points):
            hint = 'write uniform = "1.6 T", or points in along = [...]; one of the two'
            said = "it says both" if self.points else "it says nothing"
            raise fault("syntax", said, hint)
        return self

    @property
    def along(self) -> tuple[tuple[float, float], ...]:
        """Points (z in m, field in T) in order along the axis; one point when uniform."""
        return self.points if self.uniform_T is None else ((0.0, self.uniform_T),)

    @property
    def sign(self) -> int:
        """+1 when the field points along +z, else -1."""
        return 1 if self.along[0][1] > 0 else -1

    def at(self, z_m: float) -> float:
        """The axial field at a place on the axis, T."""
        points = self.along
        after = bisect_right(points, z_m, key=lambda point: point[0])
        if after in (0, len(points)):
            return points[max(0, after - 1)][1]
        (left_m, left_T), (right_m, right_T) = points[after - 1], points[after]
        share = (z_m - left_m) / (right_m - left_m)
        return left_T + share * (right_T - left_T)


class Bore(Part):
    """The surfaces that a cloud sees.

    `patch_V`: contact potentials, at most.  `ends`: a grounded tube goes on at both ends.
    `noise_heating_K_per_s` and `expansion_time_s`: measured, if known.
    """

    temperature_K: Annotated[float, real("K", bounds("K", above="0", most="1e5"))] | None = Field(
        None, alias="temperature"
    )
    patch_V: Annotated[float, real("V", bounds("V", least="0", most="1000"))] | None = Field(
        None, alias="patch"
    )
    ends: Annotated[Literal["open"], choice("open", refused=LATER_ENDS)] = "open"
    noise_heating_K_per_s: (
        Annotated[float, real("K/s", bounds("K/s", least="0", most="1e9"))] | None
    ) = Field(None, alias="noise_heating")
    expansion_time_s: Annotated[float, real("s", bounds("s", above="0", most="1e9"))] | None = (
        Field(None, alias="expansion_time")
    )


class Site(Part):
    """What the cautions must speak of; an empty text was not stated, so it counts as unknown.

    `rules` are the laboratory's own files of interlock rules, relative to the trap file.
    """

    magnet: Flag = True
    cryogen: Annotated[str, text(200)] = ""
    source: Annotated[str, text(200)] = ""
    notes: Annotated[str, text()] = ""
    rules: Annotated[
        tuple[Annotated[str, text(1000)], ...], listing(0, RULES_FILES_MAX, '["our.rules"]')
    ] = ()
