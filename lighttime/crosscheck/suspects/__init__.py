"""All that can be suspected, for some ranges."""

from __future__ import annotations

from collections.abc import Sequence

from lighttime.crosscheck.suspects import constants, frame, solution, terms, tides, time
from lighttime.crosscheck.suspects.offsets import general_offsets
from lighttime.crosscheck.suspects.places import array_offsets, station_offsets
from lighttime.crosscheck.suspects.suspect import FAMILIES, Suspect
from lighttime.earth.station import Station
from lighttime.ephemeris import Ephemeris
from lighttime.model import Model
from lighttime.moon.reflector import Reflector

__all__ = ["CHOICES", "FAMILIES", "Suspect", "all_suspects"]

CHOICES: tuple[Suspect, ...] = (
    *terms.SUSPECTS,
    *tides.SUSPECTS,
    *time.SUSPECTS,
    *frame.SUSPECTS,
    *solution.SUSPECTS,
    *constants.SUSPECTS,
)
"""Suspects that are the same for all ranges."""


def all_suspects(
    model: Model,
    stations: Sequence[Station],
    arrays: Sequence[Reflector],
    middle_year: float = 2000.0,
    ephemerides: Sequence[Ephemeris] = (),
) -> tuple[Suspect, ...]:
    """Every suspect for ranges between some stations and arrays.

    Parameters
    ----------
    model : Model
        Ours.
    stations, arrays : sequence of Station, sequence of Reflector
    middle_year : float
        From where drifts are counted.
    ephemerides : sequence of Ephemeris
        Others, which the other program may use.

    Examples
    --------
    >>> import lighttime as lt
    >>> hilltop = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
    >>> everyone = all_suspects(lt.Model(), [hilltop], [lt.reflector("Apollo 15")])
    >>> len(everyone) > 40
    True
    >>> print(next(s for s in everyone if s.name == "ut1_as_utc"))
    ut1_as_utc: UT1-UTC ignored
    """
    return (
        *CHOICES,
        *terms.terms_of(model),
        *(constants.other_ephemeris(each) for each in ephemerides),
        *general_offsets(middle_year),
        *station_offsets(stations, middle_year),
        *array_offsets(arrays),
    )
