"""The same model at 30 to 60 digits, written apart from the fast one and plainly.

It is what the fast arithmetic is held against: barycentric coordinates, instants as exact
Julian dates, raw Chebyshev coefficients, textbook formulas. It shares data and input types
with the fast path, and of its code only sums of small terms in float64: the displacement of a
station, the sub-daily terms in the Earth's rotation, and the permanent tide of the Moon.
"""

from __future__ import annotations

from lighttime.exact.answer import ExactAnswer, ExactLeg
from lighttime.exact.equation import light_time, round_trip

__all__ = ["ExactAnswer", "ExactLeg", "light_time", "round_trip"]
