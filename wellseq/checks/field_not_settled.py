"""The error of the field solver is too large to decide by."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Limit, Mistake, Origin, Reading, at_most
from wellseq.base.place import Place
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import numbered, telling
from wellseq.checks.written import mistakes_named

SAYS = "The error of the computed field is too large for a depth to be decided."
NEEDS = ("timeline", "wells")
WAIVABLE = False

LIMIT = at_most(1e-3, "V")
"""House default: share of the field's error in one depth."""
BASIS_LIMIT = at_most(1e-6, "V/V")
"""House default: error of one electrode's unit potential, V per volt applied."""


def read(case: Case) -> Iterator[Reading | Mistake]:
    """The error of the unit potentials, V per V, and its share in every proved depth, V."""
    yield from mistakes_named(case, "field-not-settled")
    yield _of_basis(case, BASIS_LIMIT, reached(case.wells).basis_error_V_per_V)
    held = reached(case.wells).held
    errors = [max(one.left.losses.basis_V, one.right.losses.basis_V, key=_size) for one in held]
    groups = numbered((one.cloud, one.block) for one in held)
    for index in telling(LIMIT, errors, errors, groups, [one.number for one in held]):
        one = held[index]
        yield Reading(
            value=errors[index],
            limit=LIMIT,
            message=f"the field's error in {one.cloud}'s depth is {{value}}, at most {{limit}}",
            origin=case.origin(one.number),
            subject=one.cloud,
            block=case.block_name(one.block),
            window_s=(float(one.start_s), float(one.end_s)),
        )


def _size(error: float) -> float:
    """An order in which an error that is not known is the greatest."""
    return error if error == error else float("inf")


def _of_basis(case: Case, limit: Limit, error_V_per_V: float) -> Reading:
    return Reading(
        value=error_V_per_V,
        limit=limit,
        message="the error of an electrode's unit potential is {value}, at most {limit}",
        origin=Origin(Place(case.shown)),
        subject="unit potentials",
    )
