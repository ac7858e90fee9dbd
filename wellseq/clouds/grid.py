"""A bore, a cloud's radius and length → a grid of rings, and the Laplacian on it.

Finite volumes in (z, r): −∇²φ integrated over each ring (V m) equals the conductances to its four
neighbours times the differences of potential.  Rings of equal thickness out to 2.2 cloud radii have
the radial conductance 2π r_face/(r_{i+1} − r_i), exact for r²; in the stretched part outside the
logarithmic 2π/ln(r_{i+1}/r_i), exact for ln r.  (The logarithmic form everywhere would put the
density on the axis 3 to 8 % low.)  The wall is held at given potentials; the tube's ends have zero
slope.

Cells are numbered with r fastest, so the matrix is banded with nr bands, and a banded Cholesky
factor costs n·nr² operations: 10,000 cells in 10 ms.

Shapes: fields on the grid (nz, nr).  Units: m, m³, V.
Accuracy: second order in both steps, tests/clouds/test_grid.py.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import pi

import numpy as np

from wellseq.clouds.wall import Wall
from wellseq.fields.hermite import FloatArray

UNIFORM_RADII = 2.2
"""Rings are equally thick out to this many cloud radii."""
RINGS = 26
SLICES = 140
GROWTH = 1.17
"""Each cell of a stretched part is at most this much longer than its neighbour."""
RINGS_PER_RADIUS, SLICES_PER_RADIUS = 20, 10
"""How fine the stretched parts stay: the empty bore's potential needs it near the wall's steps."""
CELLS_MAX = 120_000


@dataclass(frozen=True, slots=True)
class Grid:
    """Faces along z (nz + 1,) and r (nr + 1,) in m; `uniform_rings` of them are equally thick."""

    z_face_m: FloatArray
    r_face_m: FloatArray
    uniform_rings: int

    @property
    def z_m(self) -> FloatArray:
        """Centres of the cells along z (nz,), in m."""
        return np.asarray((self.z_face_m[1:] + self.z_face_m[:-1]) / 2)

    @property
    def r_m(self) -> FloatArray:
        """Centres of the rings (nr,), in m."""
        return np.asarray((self.r_face_m[1:] + self.r_face_m[:-1]) / 2)

    @property
    def r2_m2(self) -> FloatArray:
        """r² at the centre of each ring (nr,), in m².

        Not its average over the ring, dr²/4 more: sums over smooth densities are then right to
        dr⁴, and the edge of a cold cloud, which fills the inner part of its last ring, to dr²/12.
        """
        return self.r_m**2

    @property
    def area_m2(self) -> FloatArray:
        """Cross section of each ring (nr,), in m²."""
        return np.asarray(pi * np.diff(self.r_face_m**2))

    @property
    def volume_m3(self) -> FloatArray:
        """Volume of each cell (nz, nr), in m³."""
        return np.outer(np.diff(self.z_face_m), self.area_m2)

    @property
    def shape(self) -> tuple[int, int]:
        """Cells along z and along r."""
        return self.z_face_m.size - 1, self.r_face_m.size - 1

    def radial_conductance(self) -> FloatArray:
        """Conductance per metre of length from each ring outwards, the last one to the wall."""
        r, face = self.r_m, self.r_face_m
        outer = np.concatenate((r[1:], face[-1:]))
        straight = 2 * pi * face[1:] / (outer - r)
        return np.asarray(
            np.where(np.arange(r.size) < self.uniform_rings, straight, 2 * pi / np.log(outer / r))
        )

    def axial_conductance(self) -> FloatArray:
        """Conductance (nz − 1, nr) in m from each cell to the next along z."""
        return np.outer(1.0 / np.diff(self.z_m), self.area_m2)

    def matrix(self) -> FloatArray:
        """The Laplacian's lower bands (nr + 1, nz·nr) in m, row k the k-th below the diagonal."""
        nz, nr = self.shape
        radial = np.outer(np.diff(self.z_face_m), self.radial_conductance())
        axial = self.axial_conductance()
        diagonal = radial.copy()
        diagonal[:, 1:] += radial[:, :-1]
        diagonal[1:] += axial
        diagonal[:-1] += axial
        bands = np.zeros((nr + 1, nz * nr), order="F")
        bands[0] = diagonal.ravel()
        inner = radial.copy()
        inner[:, -1] = 0.0
        bands[1] -= inner.ravel()
        bands[nr, : (nz - 1) * nr] -= axial.ravel()
        return bands

    def apply(self, potential_V: FloatArray) -> FloatArray:
        """−∇²φ integrated over each cell (nz, nr), V m, of a potential that is 0 V on the wall."""
        outer = np.diff(potential_V, axis=1, append=0.0)
        radial = outer * np.outer(np.diff(self.z_face_m), self.radial_conductance())
        axial = np.diff(potential_V, axis=0) * self.axial_conductance()
        result = -radial
        result[:, 1:] += radial[:, :-1]
        result[:-1] -= axial
        result[1:] += axial
        return np.asarray(result)

    def wall_source(self, wall_V: FloatArray) -> FloatArray:
        """What wall potentials (nz,) V add to the right-hand side, (nz, nr) V m."""
        source = np.zeros(self.shape)
        source[:, -1] = self.radial_conductance()[-1] * np.diff(self.z_face_m) * wall_V
        return source

    def vacuum_V(self, wall: Wall) -> FloatArray:
        """Potential (nz, nr) in V of the empty bore with this wall."""
        from scipy.linalg import cho_solve_banded, cholesky_banded

        source = self.wall_source(wall.averages_V(self.z_face_m))
        factor = cholesky_banded(self.matrix(), lower=True, check_finite=False)
        solved = cho_solve_banded((factor, True), source.ravel(), check_finite=False)
        return np.asarray(solved.reshape(self.shape))

    def on_axis(self, values: FloatArray) -> FloatArray:
        """Values (nz,) at r = 0 of a smooth even function of r: exact for a + b r²."""
        return np.asarray((9.0 * values[:, 0] - values[:, 1]) / 8.0)


class TooLarge(ValueError):
    """A grid would have `cells`, more than CELLS_MAX."""

    def __init__(self, cells: int) -> None:
        super().__init__(f"a grid of {cells} cells, more than {CELLS_MAX}")
        self.cells = cells


def grid_for(
    *,
    wall_radius_m: float,
    cloud_radius_m: float,
    fine_m: tuple[float, float],
    detail_m: tuple[float, float],
    tube_m: tuple[float, float],
    rings: int = RINGS,
    slices: int = SLICES,
    fineness: float = 1.0,
) -> Grid:
    """A grid with `rings` equal rings out to 2.2 cloud radii and `slices` cells over `fine_m`.

    Rings beyond are stretched, up to a twentieth of the bore's radius.  Along z cells grow up to a
    tenth of the bore's radius over `detail_m`, which should hold the barriers, and up to a half
    beyond, to the ends of the tube.  All in m.  `fineness` divides every step.  Raises ValueError
    for a cloud that does not fit into the bore or spans not inside one another, TooLarge for a grid
    of more than 120,000 cells.
    """
    spans = (tube_m[0], detail_m[0], fine_m[0], fine_m[1], detail_m[1], tube_m[1])
    if not (0 < cloud_radius_m < wall_radius_m and fine_m[0] < fine_m[1]):
        raise ValueError("the cloud must fit into the bore and have a length")
    if list(spans) != sorted(spans):
        raise ValueError("the fine part must lie in the detailed one, and that in the tube")
    reach = min(UNIFORM_RADII * cloud_radius_m, wall_radius_m)
    rings, slices = round(rings * fineness), round(slices * fineness)
    inner = np.linspace(0.0, reach, rings + 1)
    growth = GROWTH ** (1 / fineness)
    thickest = max(wall_radius_m / RINGS_PER_RADIUS / fineness, reach / rings)
    outer = _stretched(wall_radius_m - reach, reach / rings, growth, thickest)
    r_face = np.concatenate((inner, reach + outer))
    r_face[-1] = wall_radius_m
    step = (fine_m[1] - fine_m[0]) / slices
    longest = wall_radius_m / fineness
    left = _beside(fine_m[0] - detail_m[0], detail_m[0] - tube_m[0], step, longest, growth)
    right = _beside(detail_m[1] - fine_m[1], tube_m[1] - detail_m[1], step, longest, growth)
    middle = np.linspace(*fine_m, slices + 1)
    z_face = np.concatenate((fine_m[0] - left[::-1], middle, fine_m[1] + right))
    cells = (z_face.size - 1) * (r_face.size - 1)
    if cells > CELLS_MAX:
        raise TooLarge(cells)
    return Grid(z_face, r_face, rings)


def _beside(
    detail_m: float, rest_m: float, step_m: float, longest_m: float, growth: float
) -> FloatArray:
    """Faces beyond the fine part, counted from its end, in m."""
    near = _stretched(detail_m, step_m, growth, max(longest_m / SLICES_PER_RADIUS, step_m))
    last = float(np.diff(near, prepend=0.0)[-1]) if near.size else step_m
    far = _stretched(rest_m, last, growth, max(longest_m / 2, last))
    return np.concatenate((near, detail_m + far))


def _stretched(length_m: float, first_m: float, growth: float, longest_m: float) -> FloatArray:
    """Faces (k,) that end at `length_m`, each cell longer than the last, up to `longest_m`."""
    if length_m <= 1e-9 * first_m:
        return np.empty(0)
    sizes = [first_m * growth]
    total = sizes[0]
    while total < length_m:
        sizes.append(min(sizes[-1] * growth, longest_m))
        total += sizes[-1]
    faces = np.cumsum(sizes)
    return np.asarray(faces * (length_m / faces[-1]))
