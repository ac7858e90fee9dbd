"""What makes the stack sound: order, gaps and proportions of its electrodes, plates, field map.

Lengths in m.  What is refused here is what no field can be worked out for: the solver of the fields
takes whatever passes.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from wellseq.model.hardware import Electrode, Stretch
from wellseq.model.surroundings import Bore, MagneticField
from wellseq.model.trap_faults import Entry, Fault, said

GAP_RADII_MAX = 2
"""A gap as wide as the bore is no gap but a forgotten electrode."""
RADII_MAX = 1800
"""The stack with its tubes in radii of its narrowest electrode: beyond, a bore is a needle's."""
ELECTRODE_RADII_MAX = 400_000
"""The same times the number of electrodes: what a field of a few hundred megabytes can hold."""
TAIL_RADII = 8
"""How much of an open tube beyond the stack belongs to the field, in its radii."""
SHORT_RADII = 1e-3
"""An electrode shorter than this share of its radius is a foil."""
DUST = 1e-9
"""Relative rounding of a difference of two lengths; a limit met exactly is met."""


def stack_faults(
    stack: Sequence[Entry], bore: Bore | None, field: MagneticField | None
) -> Iterator[Fault]:
    """What is wrong with the electrodes and with what surrounds them, as far as could be read."""
    before: Entry | None = None
    for entry in stack:
        if not isinstance(entry.part, Stretch):
            continue
        if entry.part.to_m <= entry.part.from_m:
            message = (
                f"electrode {said(entry.name)} ends at {_mm(entry.part.to_m)}, not after it begins"
            )
            hint = f"'to' lies above {_mm(entry.part.from_m)}"
            yield Fault((*entry.path, "to"), "trap-not-sound", message, hint)
            continue
        if before is not None:
            yield from _neighbours(before, entry)
        if before is None or entry.part.to_m > _ends(before)[1]:
            before = entry
    spans = [_ends(entry) for entry in stack if isinstance(entry.part, Stretch)]
    if spans:
        span_m = min(low for low, _ in spans), max(high for _, high in spans)
        yield from _proportions(stack, span_m, bore)
        yield from _plates(span_m, bore)
        yield from _map(span_m, field)


def _ends(entry: Entry) -> tuple[float, float]:
    return (entry.part.from_m, entry.part.to_m) if isinstance(entry.part, Stretch) else (0.0, 0.0)


def _neighbours(left: Entry, right: Entry) -> Iterator[Fault]:
    path = (*right.path, "from")
    (left_from_m, left_to_m), (right_from_m, right_to_m) = _ends(left), _ends(right)
    gap_m = right_from_m - left_to_m
    radii = [e.part.radius_m for e in (left, right) if isinstance(e.part, Electrode)]
    most_m = GAP_RADII_MAX * max(radii, default=float("inf"))
    if right_to_m <= left_from_m:
        message = f"electrode {said(right.name)} lies before {said(left.name)}"
        yield Fault(path, "trap-not-sound", message, "list electrodes in order along the axis")
    elif gap_m < 0:
        message = f"electrode {said(right.name)} begins {_mm(-gap_m)} before {said(left.name)} ends"
        hint = f"{said(left.name)} ends at {_mm(left_to_m)}; electrodes do not overlap"
        yield Fault(path, "trap-not-sound", message, hint)
    elif right.number == left.number + 1 and gap_m > most_m * (1 + DUST):
        message = f"the gap between {said(left.name)} and {said(right.name)} is {_mm(gap_m)} wide"
        hint = f"at most two radii, {_mm(most_m)}; is an electrode missing?"
        yield Fault(path, "trap-not-sound", message, hint)


def _proportions(
    stack: Sequence[Entry], span_m: tuple[float, float], bore: Bore | None
) -> Iterator[Fault]:
    """Electrodes so narrow, so short or so many that the field in them cannot be worked out."""
    known = [(entry, entry.part) for entry in stack if isinstance(entry.part, Electrode)]
    length_m = _length_m([part for _, part in known], span_m, bore)
    for entry, part in known:
        if part.radius_m * RADII_MAX < length_m:
            message = (
                f"electrode {said(entry.name)} of radius {_mm(part.radius_m)} is a needle's eye in "
                f"a stack of {_mm(length_m)}"
            )
            hint = f"a radius of at least {_mm(length_m / RADII_MAX)}"
            yield Fault((*entry.path, "radius"), "trap-not-sound", message, hint)
        elif 0 < part.length_m < SHORT_RADII * part.radius_m:
            message = f"electrode {said(entry.name)} is only {_mm(part.length_m)} long"
            hint = f"at least a thousandth of its radius, {_mm(SHORT_RADII * part.radius_m)}"
            yield Fault((*entry.path, "to"), "trap-not-sound", message, hint)
    least_m = min((part.radius_m for _, part in known), default=length_m)
    if len(known) * length_m > ELECTRODE_RADII_MAX * least_m:
        message = f"the field of {len(known)} electrodes in so long and narrow a stack is too large"
        hint = f"at most {ELECTRODE_RADII_MAX} electrodes times radii of the narrowest one"
        yield Fault(("electrode",), "too-large", message, hint)


def _length_m(parts: Sequence[Electrode], span_m: tuple[float, float], bore: Bore | None) -> float:
    """From end to end of the field: to the plates, or some way into the open tubes."""
    if not parts:
        return span_m[1] - span_m[0]
    closed = (False, False) if bore is None else bore.closed
    plates = (None, None) if bore is None else (bore.left_plate_m, bore.right_plate_m)
    ends = (parts[0].radius_m, parts[-1].radius_m)
    beyond = [
        abs(plate_m - end_m) if plate_m is not None else (0.0 if shut else TAIL_RADII * radius_m)
        for plate_m, end_m, shut, radius_m in zip(plates, span_m, closed, ends, strict=True)
    ]
    return span_m[1] - span_m[0] + sum(beyond)


def _plates(span_m: tuple[float, float], bore: Bore | None) -> Iterator[Fault]:
    """End plates stand at the ends of the stack or beyond them."""
    if bore is None:
        return
    if bore.left_plate_m is not None and bore.left_plate_m > span_m[0]:
        message = f"the left plate at {_mm(bore.left_plate_m)} stands inside the stack"
        hint = f"at most {_mm(span_m[0])}"
        yield Fault(("bore", "left_plate"), "trap-not-sound", message, hint)
    if bore.right_plate_m is not None and bore.right_plate_m < span_m[1]:
        message = f"the right plate at {_mm(bore.right_plate_m)} stands inside the stack"
        hint = f"at least {_mm(span_m[1])}"
        yield Fault(("bore", "right_plate"), "trap-not-sound", message, hint)


def _map(span_m: tuple[float, float], field: MagneticField | None) -> Iterator[Fault]:
    """A map of the magnetic field covers the whole stack."""
    if field is None or field.uniform_T is not None:
        return
    first_m, last_m = field.along[0][0], field.along[-1][0]
    if first_m > span_m[0] or last_m < span_m[1]:
        message = (
            f"the field is given from {_mm(first_m)} to {_mm(last_m)}, "
            f"the stack lies from {_mm(span_m[0])} to {_mm(span_m[1])}"
        )
        hint = "give points that reach from end to end of the stack"
        yield Fault(("field", "along"), "trap-not-sound", message, hint)


def _mm(length_m: float) -> str:
    return f"{length_m * 1e3:.6g} mm"
