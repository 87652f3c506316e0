"""Why two models disagree: the choice that explains it, with a number for how sure that is.

The name `lighttime.crosscheck` is the function below. The modules behind it are imported from
here by name, ``from lighttime.crosscheck.suspects import all_suspects``; they are loaded when the
function is first called, so that ``import lighttime`` stays quick.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from lighttime.crosscheck.report import Report
    from lighttime.ephemeris import Ephemeris
    from lighttime.model import Model
    from lighttime.path.weather import Weather

__all__ = ["crosscheck"]

MOST = 6
"""Findings that are looked for at once, when not said."""

CHANCE = 0.005
"""A find that noise would make with more than this probability is none, when not said."""


def crosscheck(
    ranges: Any,
    station: Any,
    reflector: Any,
    model: Model | None = None,
    *,
    columns: Mapping[str, str] | None = None,
    tag: str = "transmit",
    weather: Weather | None = None,
    wavelength_nm: float = 532.0,
    sigma_ps: Any = None,
    tolerance_ps: float | None = None,
    ephemerides: Sequence[Ephemeris] = (),
    skip_unreadable: bool = False,
    most: int = MOST,
    chance: float = CHANCE,
    progress: Callable[[int, int], None] | None = None,
) -> Report:
    """Name the choices that explain why another program's ranges differ from ours.

    Parameters
    ----------
    ranges : path, text file, astropy Table, DataFrame, or mapping of arrays
        UTC epochs and the other program's light times, one row each; optionally sigma, station,
        array, tag, weather, wavelength, and rungs of the worksheet. See
        `lighttime.crosscheck.columns` for the names that are recognised.
    station : Station, or several, or a mapping from names
        With several, the column ``station`` says which.
    reflector : Reflector or name, or several, or a mapping from names
        With several, or None, the column ``array`` says which; the arrays of
        `lighttime.reflectors` are known.
    model : Model, optional
        Ours: the default one when not given.
    columns : mapping of str to str, optional
        Our name of a column, and its name in the table: ``{"round_trip_ns": "tof"}``.
    tag : {"transmit", "bounce", "receive"}
        Which event the epochs are, where no column says.
    weather : Weather, optional
        At the station, where no columns say. Without any, ours has no troposphere.
    wavelength_nm : float
        Where no column says.
    sigma_ps : float or array, optional
        The noise of the ranges, where no column says; estimated from what remains when not known.
    tolerance_ps : float, optional
        For `Report.agrees`: the largest difference that is agreement.
    ephemerides : sequence of Ephemeris
        Others, which the other program may use.
    skip_unreadable : bool
        Go on without rows that cannot be used, and list them in the report.
    most : int
        Findings at once.
    chance : float
        A find that noise would make with more than this probability is none.
    progress : callable, optional
        Called with (rows done, rows in all).

    Returns
    -------
    Report

    Raises
    ------
    LighttimeError
        If the table cannot be used, with the line and the reason.

    Examples
    --------
    >>> import lighttime as lt
    >>> hilltop = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
    >>> array = lt.reflector("Apollo 15")
    >>> when = [f"2020-03-{day:02d}T{hour}:30:00" for day in range(3, 9) for hour in (18, 20, 22)]
    >>> theirs = lt.Model(omit=["pole_tide"]).round_trip(when, hilltop, array)
    >>> report = lt.crosscheck({"epoch": when, "round_trip_s": theirs.seconds}, hilltop, array)
    >>> [(f.name, f.exact, f.reading) for f in report.findings]
    [('pole_tide', 1.0, 'left out')]
    """
    # Loaded here and not above: most users of the library never ask.
    from lighttime.crosscheck.run import Settings, run

    settings = Settings(
        tag, weather, wavelength_nm, sigma_ps, tolerance_ps, tuple(ephemerides), skip_unreadable,
        most, chance,
    )  # fmt: skip
    return run(ranges, station, reflector, model, columns, settings, progress)
