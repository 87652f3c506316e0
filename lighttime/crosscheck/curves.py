"""The range as a curve of a shift in time: solved at a few shifts, read off at any.

Many wrong choices read the epoch, or ask the ephemeris, some seconds or a minute off. Over a
minute the range is a polynomial of low degree (the Earth turns by a third of a degree), so that
a few solutions serve all of them.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from lighttime.vectors import Array

EPOCH_NODES = (0.0, -13.2, -34.2, -55.2, -68.2)
"""Shifts of the epoch, s: Chebyshev points of -70 to 1.6, the base among them. A daily sine of
6400 km is interpolated to a nanometre."""

EPHEMERIS_NODES = (0.0, -13.2, -42.0, -66.0)
"""Shifts of the time of the ephemeris, s. A monthly sine of 400 000 km to a nanometre."""


@dataclass(frozen=True, eq=False)
class Curve:
    """A polynomial through values at some shifts (Lagrange).

    Parameters
    ----------
    nodes : sequence of float, length k
    values : ndarray, shape (k, n)
    """

    nodes: Sequence[float]
    values: Array

    @classmethod
    def through(cls, nodes: Sequence[float], effect: Callable[[float], Array]) -> Curve:
        """The curve of an effect that is zero at the first node."""
        known = [effect(node) for node in nodes[1:]]
        return cls(nodes, np.stack([np.zeros_like(known[0]), *known]))

    def at(self, shift: Any) -> Array:
        """The value at a shift, a number or one for each range."""
        total = np.zeros(self.values.shape[1])
        for k, node in enumerate(self.nodes):
            weight: Any = 1.0
            for other in self.nodes:
                if other != node:
                    weight = weight * (shift - other) / (node - other)
            total = total + weight * self.values[k]
        return total
