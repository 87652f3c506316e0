"""Derivatives of a round trip with respect to what it depends on."""

from __future__ import annotations

from collections.abc import Iterable
from types import MappingProxyType
from typing import Any

import numpy as np

from lighttime.answer import RoundTrip
from lighttime.errors import InputError
from lighttime.model import BLOCK
from lighttime.partials.block import Block
from lighttime.partials.groups import PARAMETERS, chosen, slopes
from lighttime.partials.numerical import Parameter
from lighttime.partials.result import Partials

__all__ = ["PARAMETERS", "Parameter", "Partials", "partials"]


def partials(answer: RoundTrip, names: Iterable[str | Parameter] | None = None) -> Partials:
    """See `RoundTrip.partials`."""
    query, model = answer.query, answer.model
    if isinstance(names, str):
        names = (names,)
    asked = None if names is None else tuple(names)
    own = () if asked is None else tuple(p for p in asked if isinstance(p, Parameter))
    known = None if asked is None else [p for p in asked if not isinstance(p, Parameter)]
    wanted = chosen(model, query, known)
    for parameter in own:
        if parameter.name in wanted:
            raise InputError("names", parameter.name, "a name that no other parameter has")
    found: dict[str, Any] = {name: np.empty(query.size) for name in wanted}
    notes: dict[str, str] = {}
    for index, part in query.blocks(BLOCK):
        block = Block.of(model, part)
        for name, values in slopes(block, wanted, notes).items():
            found[name][index] = values
    for parameter in own:
        found[parameter.name], notes[parameter.name] = parameter.slope(model, query)
    order = list(wanted)
    if asked is not None:
        order = [p.name if isinstance(p, Parameter) else p for p in asked]
    shaped = {name: _shaped(found[name], query.shape) for name in order}
    return Partials(query, MappingProxyType(shaped), MappingProxyType(notes))


def _shaped(flat: Any, shape: tuple[int, ...]) -> Any:
    if not shape:
        return float(flat[0])
    whole = flat.reshape(shape)
    whole.flags.writeable = False
    return whole
