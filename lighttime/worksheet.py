"""Every intermediate value of a range, in the order in which it is found."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

import numpy as np

from lighttime.constants import DEGREE
from lighttime.path.delays import elevation
from lighttime.path.legs import Leg
from lighttime.query import Query

if TYPE_CHECKING:
    from lighttime.answer import RoundTrip


def worksheet(answer: RoundTrip) -> Mapping[str, Any]:
    """See `RoundTrip.worksheet`: the range is solved again, and nothing is thrown away."""
    sheet: dict[str, Any] = {}
    for index, part in answer.query.blocks(8192):
        for name, value in _rows(answer, part):
            if name not in sheet:
                sheet[name] = np.empty((*value.shape[:-1], answer.query.size))
            sheet[name][..., index] = value
    return MappingProxyType(sheet)


def _rows(answer: RoundTrip, part: Query) -> list[tuple[str, Any]]:
    legs = answer.model.solve(part)
    up, down = legs.up, legs.down
    # The solver carries an event along its velocity for the last step, of up to 100 ns, and not
    # what it was made of: here all is told of the very instants that were found.
    _, near, far, _ = answer.model._ends(part)
    events = near.at(up.near.seconds), far.at(up.far.seconds), near.at(down.near.seconds)
    rows: list[tuple[str, Any]] = []
    for name, event in zip(("t1", "t2", "t3"), events, strict=True):
        rows += _event(name, event)
    for name, leg, upward in (("uplink", up, True), ("downlink", down, False)):
        rows += _leg(name, leg, upward)
    terms = type(answer).of(answer.model, part, legs)
    rows += [(f"term.{name}_s", value) for name, value in terms.terms.items()]
    rows += [("answer_s", terms.seconds), ("answer_low_s", terms.seconds_low)]
    return rows


def _event(name: str, event: Any) -> list[tuple[str, Any]]:
    rows = [(f"{name}.seconds_after_tag", event.seconds)]
    rows += [(f"{name}.{key}", value) for key, value in getattr(event, "ladder", {}).items()]
    for key in ("earth", "moon"):
        if hasattr(event, key):
            rows.append((f"{name}.{key}_m", getattr(event, key)))
    rows += [
        (f"{name}.{term}_m", value) for term, value in getattr(event, "displacement", {}).items()
    ]
    rows += [(f"{name}.position_m", event.position), (f"{name}.velocity_m_per_s", event.velocity)]
    return rows


def _leg(name: str, leg: Leg, upward: bool) -> list[tuple[str, Any]]:
    rows = [(f"{name}.distance_m", leg.distance), (f"{name}.geometry_s", leg.geometry)]
    angle = elevation(leg.near, leg.far, upward)
    if angle is not None:
        rows.append((f"{name}.elevation_deg", angle / DEGREE))
    rows += [(f"{name}.{body}_s", delay) for body, delay in leg.delays.items()]
    return [*rows, (f"{name}.seconds", leg.seconds)]
