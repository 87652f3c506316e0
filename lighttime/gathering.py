"""Answers to blocks of epochs, gathered into one: every array is written once, in its place."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import fields, is_dataclass
from types import MappingProxyType
from typing import Any

import numpy as np

from lighttime.query import Index, Query

KEPT = ("query", "model", "not_modelled")
"""Fields that are the same in every block, or belong to the whole."""


def gather(query: Query, parts: Iterable[tuple[slice | Index, Any]]) -> Any:
    """One answer from the answers to the blocks of a query.

    Parameters
    ----------
    query : Query
        The whole.
    parts : iterable of (index, answer)
        Where in the flat query a block lies, and the answer to it. Each is let go as soon as it
        is copied, so that memory holds the whole and one block.

    Returns
    -------
    Answer
        Of the same class, arrays in the shape of the query and read-only.
    """
    room: dict[str, Any] = {}
    first: Any = None
    for index, answer in parts:
        values = {f.name: getattr(answer, f.name) for f in fields(answer) if f.name not in KEPT}
        if first is None:
            first = (type(answer), answer.model, answer.not_modelled)
            room = {name: _room(value, query.size) for name, value in values.items()}
        for name, value in values.items():
            _put(room[name], value, index)
    kind, model, not_modelled = first
    whole = {name: _shaped(value, query.shape) for name, value in room.items()}
    return kind(query=query, model=model, not_modelled=not_modelled, **whole)


class _Fields(dict[str, Any]):
    """Room for the fields of a dataclass."""

    kind: type


def _room(value: Any, size: int) -> Any:
    if value is None:
        return None
    if isinstance(value, Mapping):
        return {key: _room(v, size) for key, v in value.items()}
    if is_dataclass(value):
        room = _Fields((f.name, _room(getattr(value, f.name), size)) for f in fields(value))
        room.kind = type(value)
        return room
    return np.empty(size, dtype=np.asarray(value).dtype)


def _put(room: Any, value: Any, index: slice | Index) -> None:
    if room is None:
        return
    if isinstance(room, dict):
        for key, inner in room.items():
            _put(inner, getattr(value, key) if isinstance(room, _Fields) else value[key], index)
        return
    room[index] = value


def _shaped(room: Any, shape: tuple[int, ...]) -> Any:
    if room is None:
        return None
    if isinstance(room, _Fields):
        return room.kind(**{name: _shaped(value, shape) for name, value in room.items()})
    if isinstance(room, dict):
        return MappingProxyType({key: _shaped(value, shape) for key, value in room.items()})
    if not shape:
        return room[0].item()
    whole = room.reshape(shape)
    whole.flags.writeable = False
    return whole
