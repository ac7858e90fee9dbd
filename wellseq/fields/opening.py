"""One section of a bore as seen from a step at its end: fluxes through the opening, and potentials.

Everything is written in modes J0(j_n r/a) of the section, j_n = x, with S(u) = sinh(x(L − u)) /
sinh(xL), which is 1 at the step and 0 at the section's other end, u and L in the radius a; close to
the step by the closed forms of aperture.py instead.  A wall that rises by 1 at u = p makes, with
its mirror images, the outward slope Σ J0(x r/a)/(a J1(x)) · 2 cosh(x(L − p))/sinh(xL) at the step;
a rise that begins at the step is integrated in closed form there, since modes would not settle.

Shapes: functions of the trace (f, …), rises of the section (n,), electrodes (ne, …).  Units: m, V.
Accuracy: rounding of the modes that are kept; tests/fields/test_stepped.py.
Source: J. D. Jackson, Classical Electrodynamics, 3rd ed. (Wiley 1999) sec. 3.7-3.8; aperture.py.
"""

from __future__ import annotations

import numpy as np

from wellseq.fields import aperture
from wellseq.fields.aperture import Family
from wellseq.fields.bore import Plane, Section
from wellseq.fields.hermite import FloatArray

NARROW_RISE = 0.1
"""A rise that begins at the step and is narrower than this share of the face is integrated."""
NEAR_RADII = 0.5
_TOUCHING = 1e-9


class Opening:
    """One side of a step: `section` begins or ends at `plane`."""

    def __init__(self, section: Section, plane: Plane, family: Family) -> None:
        self.section, self.plane, self.family = section, plane, family
        self.a = section.radius_m
        self.turn = 1.0 if plane is section.left else -1.0
        self.ratio = plane.radius_m / self.a
        self.length = section.length_m / self.a
        self.place = self.turn * (section.centre_m - plane.z_m) / self.a
        self.width = section.width_m / self.a
        begin = self.place - self.width / 2
        self.at_step = begin < _TOUCHING
        self.integrated = self.at_step & (self.width <= NARROW_RISE * (1.0 - self.ratio))
        resolved = np.where(self.at_step, self.width, begin)[~self.integrated]
        least = min(NEAR_RADII, self.length, float(resolved.min(initial=np.inf)))
        self.x, self.j1 = aperture.modes(aperture.modes_for(least))
        self.table = aperture.transform(family, self.x * self.ratio)
        self.weights = self.table * (2 * self.ratio**2 / self.j1**2)

    def flux(self) -> FloatArray:
        """Outward flux of the trace's functions through the step, tested by them, (f, f) in m."""
        more = 2.0 / np.expm1(np.minimum(2 * self.x * self.length, 700.0))
        weight = 2 * self.ratio**3 * self.x / self.j1**2 * more
        base = aperture.tube_flux(self.family, self.ratio)
        return np.asarray(self.plane.radius_m * (base + (self.table * weight) @ self.table.T))

    def across(self, other: Opening) -> FloatArray:
        """Flux here of the functions in the step at the other end, tested, (f, f) in m."""
        few = min(self.x.size, other.x.size)
        x, j1 = self.x[:few], self.j1[:few]
        weight = 4 * x * np.exp(-x * self.length) / -np.expm1(-2 * x * self.length) / j1**2
        scale = self.a * self.ratio**2 * other.ratio**2
        return np.asarray(scale * (self.table[:, :few] * weight) @ other.table[:, :few].T)

    def wall_flux(self, strip_m: FloatArray) -> FloatArray:
        """Outward flux of the wall part with strips (ne, n) m, tested, (f, ne) in m."""
        share = np.zeros((self.family.size, self.place.size))
        response = np.zeros((self.x.size, self.place.size))
        for edge, (p, w) in enumerate(zip(self.place, self.width, strict=True)):
            if self.integrated[edge]:
                share[:, edge] = aperture.step_at_the_plane(self.family, self.ratio, float(w))
                response[:, edge] = self._images(float(w))
            elif self.at_step[edge]:
                share[:, edge] = aperture.transform_at_zero(self.family) / w
                response[:, edge] = -2 * self._wave(w, 0) / (self.x * w)
            elif w > 0:
                ends = self._wave(p - w / 2, 0) - self._wave(p + w / 2, 0)
                response[:, edge] = 2 * ends / (self.x * w)
            else:
                response[:, edge] = 2 * self._wave(p, 1)
        share += self.table / self.j1 @ response
        strips = self.table / self.j1 @ (2 * self.x[:, None] * self._waves(self.place, 0))
        scale = self.plane.radius_m**2 / self.a
        rise = self.turn * self.section.rise
        return np.asarray(scale * (share @ rise.T + strips @ (strip_m.T / self.a)))

    def _images(self, w: float) -> FloatArray:
        """What the other end adds to the slope of a rise of width w that begins at the step."""
        x, length = self.x, self.length
        wide = np.sinh(np.minimum(x * w, 700.0)) / (x * w) if w > 0 else 1.0
        return np.asarray(4 * wide * np.exp(-2 * x * length) / -np.expm1(-2 * x * length))

    def _wave(self, u: float, kind: int) -> FloatArray:
        return self._waves(np.array([u]), kind)[:, 0]

    def _waves(self, u: FloatArray, kind: int, x: FloatArray | None = None) -> FloatArray:
        """sinh(x(L − u))/sinh(xL), or cosh for `kind` 1, at u (n,): (modes, n)."""
        x = (self.x if x is None else x)[:, None]
        sign = 1.0 if kind else -1.0
        far = np.exp(-2 * x * (self.length - u)) if np.isfinite(self.length) else 0.0
        return np.asarray(np.exp(-x * u) * (1 + sign * far) / -np.expm1(-2 * x * self.length))

    def on_axis(self, z_m: FloatArray, order: int) -> FloatArray:
        """What the functions make on the axis at places (n,) of the section: (f, n), V/m^order."""
        u = self.turn * (z_m - self.plane.z_m) / self.a
        result = np.empty((self.family.size, u.size))
        near = u <= NEAR_RADII
        if near.any():
            result[:, near] = self._near(u[near], order)
        if not near.all():
            few = aperture.modes_for(NEAR_RADII)
            x = self.x[:few]
            wave = self._waves(u[~near], order % 2, x) * (-x[:, None]) ** order
            result[:, ~near] = self.weights[:, :few] @ wave
        return np.asarray(result * (self.turn / self.a) ** order)

    def _near(self, u: FloatArray, order: int) -> FloatArray:
        free = aperture.axis_half_space(self.family, u / self.ratio, order) / self.ratio**order
        wall = self.ratio**2 * aperture.axis_wall(self.family, self.ratio, u, order)
        if not np.isfinite(self.length):
            return np.asarray(free - wall)
        x, sign = self.x[:, None], 1.0 if order % 2 else -1.0
        end = np.exp(-x * (2 * self.length - u)) * (1 + sign * np.exp(-2 * x * u))
        end *= x**order / -np.expm1(-2 * x * self.length)
        return np.asarray(free - wall - self.weights @ end)

    def off_axis(self, u: FloatArray, r_m: float) -> FloatArray:
        """The same at a distance r from the axis, by modes alone, at u (n,) in a: (f, n)."""
        from scipy.special import j0

        x, j1 = aperture.modes(aperture.modes_for(float(u.min())))
        table = aperture.transform(self.family, x * self.ratio)
        weight = 2 * self.ratio**2 / j1**2 * j0(x * r_m / self.a)
        return np.asarray((table * weight) @ self._waves(u, 0, x))

    def wall_slope(self) -> FloatArray:
        """∂φ/∂r (f, n), 1/m, that the functions make on the wall at the rises of the section."""
        wave = self._waves(np.maximum(self.place, 0.0), 0)
        return np.asarray(-(self.weights * (self.x * self.j1)) @ wave / self.a)
