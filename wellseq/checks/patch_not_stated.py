"""A depth below a volt is asked for, and the trap file says nothing of contact potentials."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Mistake, Origin, Reading, at_least
from wellseq.base.place import Place
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import worst
from wellseq.checks.written import mistakes_named
from wellseq.model.effects import Claimed, Evaporated

SAYS = "A depth below 1 V is asked for while the trap file does not state 'patch'."
NEEDS = ("trap", "timeline", "wells")
WAIVABLE = False

LIMIT = at_least(1.0, "V")
"""House default: contact potentials of metal surfaces stay well below this."""
HINT = (
    "state 'patch' under [bore] in the trap file: the contact potentials of the surfaces, at most"
)


def read(case: Case) -> Iterator[Reading | Mistake]:
    """Every depth that is asked for, V, where contact potentials are not stated."""
    yield from mistakes_named(case, "patch-not-stated")
    if reached(case.trap).bore.patch_V is None:
        yield from worst(_depths(case))


def _depths(case: Case) -> Iterator[Reading]:
    if reached(case.wells).held:
        depth_V = reached(case.trap).margins.depth_V
        yield _reading(depth_V, "the margin 'depth'", Origin(Place(case.shown)))
    for block in reached(case.timeline).blocks:
        for event in block.events:
            origin = case.origin(event.number)
            match event.effect:
                case Evaporated(cloud=cloud, to_V=to_V):
                    yield _reading(to_V, f"evaporation of {cloud}", origin, block.name)
                case Claimed(quantity="depth", cloud=cloud, lowest=lowest, highest=highest):
                    least = min(bound for bound in (lowest, highest) if bound is not None)
                    yield _reading(least, f"required depth of {cloud}", origin, block.name)


def _reading(depth_V: float, what: str, origin: Origin, block: str = "") -> Reading:
    return Reading(
        value=depth_V,
        limit=LIMIT,
        message=f"{what}: {{value}}, below {{limit}} only where contact potentials are stated",
        origin=origin,
        subject=what,
        block=block,
        hint=HINT,
    )
