"""What is taken off a depth: each cause's deviation per electrode, weighed by the field."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from wellseq.timeline.motion import Segment
from wellseq.wells.wells import Losses

Vector = npt.NDArray[np.float64]


def losses(
    segment: Segment,
    weights: Vector,
    *,
    patch_V: float,
    basis_error: float,
    ripple_V: float = 0.0,
) -> Losses:
    """Losses (V) on a segment; `weights` (electrodes,) is how far a depth moves per electrode volt.

    `patch_V` is the contact potential of every electrode at most, `basis_error` the error of a unit
    potential in V per V, which counts at both ends of a depth.
    """
    largest = np.abs(segment.base) + np.abs(segment.moves).sum(axis=0)
    return Losses(
        calibration_V=float(segment.calibration_V @ weights),
        noise_V=float(segment.noise_V @ weights),
        half_code_V=float(segment.half_code_V @ weights),
        stray_V=float(segment.stray_V @ weights),
        lag_V=float(segment.lag_V @ weights),
        shape_V=float(segment.shape_V @ weights),
        patch_V=patch_V * float(weights.sum()),
        ripple_V=ripple_V,
        basis_V=2 * basis_error * float(largest.sum()),
    )
