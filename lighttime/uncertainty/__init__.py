"""The error budget of a round trip: what each input contributes, and what they make together.

Every input is turned into independent changes of one sigma each; the range changes by its
derivative times that. What one change does on the way up and on the way down, at station and
reflector, adds up with its sign (it is one change); different changes add as squares.
"""

from __future__ import annotations

from itertools import chain
from types import MappingProxyType

import numpy as np

from lighttime.answer import RoundTrip
from lighttime.partials import partials
from lighttime.uncertainty.air import air
from lighttime.uncertainty.case import Case
from lighttime.uncertainty.earth import earth
from lighttime.uncertainty.moon import moon
from lighttime.uncertainty.other import other
from lighttime.uncertainty.result import Budget, BudgetPart
from lighttime.vectors import Array

__all__ = ["Budget", "BudgetPart", "budget"]


def budget(answer: RoundTrip) -> Budget:
    """See `RoundTrip.budget`."""
    case = Case(answer, partials(answer), answer.model.uncertainties)
    shape = answer.query.shape
    parts: dict[str, BudgetPart] = {}
    total: Array = np.zeros(answer.query.size)
    for each in chain(earth(case), air(case), moon(case), other(case)):
        square = np.sum(np.square(each.rows), axis=0)
        total = total + square
        sigma = _shaped(np.sqrt(square), shape)
        parts[each.name] = BudgetPart(each.name, each.term, sigma, each.source)
    sigma = _shaped(np.sqrt(total), shape)
    return Budget(answer.query, MappingProxyType(parts), sigma, answer.not_modelled)


def _shaped(flat: Array, shape: tuple[int, ...]) -> float | Array:
    if not shape:
        return float(flat[0])
    whole = flat.reshape(shape)
    whole.flags.writeable = False
    return whole
