"""Who is in the trap now: the wells that are followed, and bunches that have no temperature yet."""

from __future__ import annotations

from dataclasses import dataclass, field

from wellseq.model.sequence import CloudDeclared


@dataclass(slots=True, eq=False)
class Well:
    """A well that is followed: its clouds (all of one sign), and where its minimum is (m).

    `lowered_V` is the floor that an evaporation has set, until the well has been deepened again.
    `paused` is set while a kick opens the well on purpose.
    """

    clouds: list[str]
    charge_sign: int
    z_m: float
    core_m: tuple[float, float]
    lowered_V: float | None = None
    paused: bool = False


@dataclass(slots=True, eq=False)
class Bunch:
    """A bunch between two gates whose energy counts from ground; no temperature is known yet.

    `highest_V` is its highest declared energy per charge; `kept_V`, the highest kept one, is what
    the gates were certified to hold when they had closed, None before that is known.
    """

    cloud: str
    charge_sign: int
    gates: tuple[str, str]
    highest_V: float
    kept_V: float | None = None


@dataclass(slots=True, eq=False)
class Living:
    """All that is in the trap, in the order in which it came."""

    declared: dict[str, CloudDeclared]
    wells: list[Well] = field(default_factory=list)
    bunches: list[Bunch] = field(default_factory=list)

    def well_of(self, cloud: str) -> Well | None:
        """The well that a cloud sits in."""
        return next((well for well in self.wells if cloud in well.clouds), None)

    def bunch_of(self, cloud: str) -> Bunch | None:
        """The bunch of that name while it has no temperature."""
        return next((bunch for bunch in self.bunches if bunch.cloud == cloud), None)

    def holds(self, cloud: str) -> bool:
        """Whether the cloud is in the trap at all."""
        return self.well_of(cloud) is not None or self.bunch_of(cloud) is not None

    def drop(self, cloud: str) -> None:
        """The cloud is gone, with it its well when it was the last one there."""
        self.bunches = [bunch for bunch in self.bunches if bunch.cloud != cloud]
        for well in self.wells:
            if cloud in well.clouds:
                well.clouds.remove(cloud)
        self.wells = [well for well in self.wells if well.clouds]

    def drop_well(self, well: Well) -> None:
        """All clouds of a well are gone."""
        for cloud in list(well.clouds):
            self.drop(cloud)

    def energy_V(self, cloud: str) -> float | None:
        """Highest declared energy of a cloud per elementary charge unit it carries, V."""
        declared = self.declared[cloud]
        if declared.energy is None:
            return None
        charges = abs(declared.species.charge_C) / 1.602176634e-19
        return float(declared.energy.value + declared.energy.half_width) / charges
