"""Which relation of TDB to TT is meant: the series, or one integrated from an ephemeris."""

from __future__ import annotations

from typing import TypeAlias

from lighttime.errors import UnknownNameError
from lighttime.timescales.inputs import Relation

Choice: TypeAlias = Relation | str | None

SERIES, INTEGRATED = "series", "integrated"


def chosen(tdb: Choice) -> Relation | None:
    """The relation that a caller chose; None for the series.

    Parameters
    ----------
    tdb : {"series", "integrated"} or TimeEphemeris or None
        ``"integrated"`` is from DE421.
    """
    if tdb is None or (isinstance(tdb, str) and tdb == SERIES):
        return None
    if isinstance(tdb, str) and tdb == INTEGRATED:
        # Imported when called: ephemerides are told in the scales of this room.
        from lighttime.ephemeris.time_integral import TimeEphemeris

        return TimeEphemeris.default()
    if hasattr(tdb, "tdb_minus_tt"):
        return tdb  # type: ignore[return-value]
    raise UnknownNameError("tdb", tdb, (SERIES, INTEGRATED, "or a TimeEphemeris"))
