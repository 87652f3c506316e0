"""The tide of degree 2, differentiated: what raises it, and where on the body it is felt.

With u the direction of the place, n_j that of body j and s_j the size of its tide,

    N = sum of s_j n_j n_j^T,   S = sum of s_j,   q = u.N u,
    tide = h (3/2 q - S/2) u + 3 l (N u - q u).

It is linear in N and S, so that a tide averaged over time (the permanent one) is subtracted by
subtracting its mean N and S.

Source: IERS Conventions (2010), TN36, equation 7.5.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from lighttime.vectors import Array, dot, norm

Source = tuple[Array, Array]
"""Size s_j (n,) and direction n_j (3, n) of one body's tide."""


def source(mass_ratio: float, radius_m: float, body_m: Array) -> Source:
    """A body of `mass_ratio` times the mass of the deformed one, at `body_m` (3, n) from it."""
    distance = norm(body_m)
    return mass_ratio * radius_m * (radius_m / distance) ** 3, body_m / distance


@dataclass(frozen=True, eq=False)
class Tide:
    """The tide at one place; all vectors along the same axes, shape (3, n).

    Parameters
    ----------
    u : ndarray
        Unit vector from the centre of the body to the place.
    sources : tuple of Source
    h, l : float
        Love and Shida numbers.
    mean : ndarray, shape (3, 3), or None
        A constant N that is subtracted (its S is the trace).
    """

    u: Array
    sources: tuple[Source, ...]
    h: float
    l: float  # noqa: E741 (the Shida number)
    mean: Array | None = None

    def _times(self, v: Array) -> Array:
        """N v."""
        product: Array = sum((s * dot(n, v)) * n for s, n in self.sources)  # type: ignore[assignment]
        if self.mean is not None:
            product = product - np.tensordot(self.mean, v, axes=1)
        return product

    @property
    def _size(self) -> Array:
        """S."""
        total: Array = sum(s for s, _ in self.sources)  # type: ignore[assignment]
        return total if self.mean is None else total - np.trace(self.mean)

    def by_h(self) -> Array:
        """The tide for h = 1, l = 0: its derivative by h, m."""
        q = dot(self.u, self._times(self.u))
        return (1.5 * q - 0.5 * self._size) * self.u

    def by_l(self) -> Array:
        """The tide for h = 0, l = 1: its derivative by l, m."""
        pull = self._times(self.u)
        return 3.0 * (pull - dot(self.u, pull) * self.u)

    def displacement(self) -> Array:
        """The tide, m."""
        return self.h * self.by_h() + self.l * self.by_l()

    def by_direction(self, w: Array) -> Array:
        """Derivative of w . tide by the direction u (not kept of unit length), shape (3, n)."""
        h, l = self.h, self.l  # noqa: E741
        pull = self._times(self.u)
        q = dot(self.u, pull)
        along = dot(w, self.u)
        direct = h * (1.5 * q - 0.5 * self._size) - 3.0 * l * q
        return (3.0 * h - 6.0 * l) * along * pull + direct * w + 3.0 * l * self._times(w)

    def by_place(self, w: Array, distance: Array | float) -> Array:
        """Derivative of w . tide by the position of the place, `distance` from the centre."""
        slope = self.by_direction(w)
        return (slope - self.u * dot(self.u, slope)) / distance

    def by_source(self, w: Array, index: int, distance: Array) -> Array:
        """Derivative of w . tide by the position of one body, `distance` from the centre."""
        h, l = self.h, self.l  # noqa: E741
        s, n = self.sources[index]
        u = self.u
        cosine, along, towards = dot(u, n), dot(w, u), dot(w, n)
        value = h * (1.5 * cosine**2 - 0.5) * along + 3.0 * l * cosine * (towards - cosine * along)
        radial = 3.0 * h * cosine * along + 3.0 * l * (towards - 2.0 * cosine * along)
        slope = radial * u + (3.0 * l * cosine) * w
        across = slope - n * dot(n, slope)
        return (s / distance) * (across - 3.0 * value * n)
