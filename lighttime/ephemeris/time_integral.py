"""`TimeEphemeris`: the Earth's and the Moon's time, integrated from an ephemeris.

    TDB - TT at the geocentre, and TCB - TCL at the centre of the Moon

as functions of TDB. Both are plain integrals along known orbits: nothing is solved for. The
constants that tie the scales to each other are those of IAU 1991 A4, 2000 B1.9 and 2006 B3; with
them nothing is free. TDB - TT is -6.55e-5 s on 1977-01-01 0h TAI at the geocentre, and its mean
rate is what the masses and orbits of the ephemeris make it: L_B was chosen to make it nearly zero
for another ephemeris.

TCL is zero-set as TCG is: it agrees with TCB on 1977-01-01 0h TAI, at the centre of the Moon.
(The resolution that defines TCL, IAU 2024 II, is used here from memory; an origin chosen
otherwise adds a constant.)
"""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import lru_cache
from os import PathLike
from typing import Any

import erfa
import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import DAY, L_B, SCALES_ORIGIN, TDB_0
from lighttime.ephemeris.asteroids import mean_potential
from lighttime.ephemeris.bodies import Ephemeris
from lighttime.ephemeris.chebyshev import Records
from lighttime.ephemeris.panels import Panels, states
from lighttime.ephemeris.quadrature import antiderivative, nodes
from lighttime.ephemeris.time_rate import place_term, slowing, tdb_minus_tt_rate
from lighttime.errors import CoverageError, InputError, UnknownNameError
from lighttime.timescales import Epoch
from lighttime.timescales.inputs import date_pair
from lighttime.timescales.relation import INTEGRATED, SERIES
from lighttime.timescales.tcl import TCL_RATE

Array = NDArray[np.float64]

SAMPLES = 23
"""In a panel. Every second one gives the integral of half the order, to compare with."""

MARGIN_DAYS = 150.0
"""Added to a span at both ends: more than the tables of a model reach beyond an epoch."""

RATE_SIGMA = 5e-18
"""One sigma of the mean rate of TDB - TT from one ephemeris (measured between two)."""

_YEAR_1900, _YEAR_2200 = 2414992.5, 2524624.5

NEGLIGIBLE_S = 1e-19
"""Coefficients of the series that are smaller in every panel are dropped."""


@dataclass(frozen=True, eq=False)
class TimeEphemeris:
    """TDB - TT and TCB - TCL by the orbits of one ephemeris.

    Make one with `integrate`, or `read` one that was saved. It serves wherever a relation of
    time scales is asked for: ``Epoch.to("tdb", tdb=...)``, ``Model(tdb=...)``.

    Parameters
    ----------
    ephemeris : Ephemeris
        What it was integrated from.
    earth : Records
        TDB - TT at the geocentre, s.
    moon : Records
        TCB - TCL at the centre of the Moon, less `TCL_RATE` (TCB - 1977-01-01 0h TAI), s.
    error_s : float
        Of the integration (not of the orbits), by order doubling: the largest difference from
        the same integrals by half the order, anywhere in the span, from the origin on, s.
    origin : str
        What the constant of TDB - TT is from.
    """

    ephemeris: Ephemeris
    earth: Records = field(repr=False)
    moon: Records = field(repr=False)
    error_s: float
    origin: str

    @staticmethod
    def integrate(
        ephemeris: Ephemeris | None = None,
        first: Any = None,
        last: Any = None,
        *,
        known: tuple[Any, float] | None = None,
        asteroids: bool = True,
    ) -> TimeEphemeris:
        """Integrate over a span, extended to 1977 where the constants are fixed.

        Where the ephemeris allows it, some months more are integrated at both ends: tables that
        are made of it have spans of their own.

        Parameters
        ----------
        ephemeris : Ephemeris, optional
            DE421 if not given.
        first, last : Epoch, text (TDB), ..., optional
            Ends of the span; those of the ephemeris when not given.
        known : (Epoch or text, float), optional
            An instant and TDB - TT at the geocentre there (s), for an ephemeris that does not
            reach back to 1977; TCB - TCL is then set to what its mean rate makes it.
        asteroids : bool, optional
            Whether to count the mean potential of the asteroids whose masses are stated.

        Raises
        ------
        CoverageError
            If the ephemeris does not cover the span, or not 1977 and nothing else is `known`.
        InputError
            For ends in the wrong order.
        """
        source = Ephemeris.default() if ephemeris is None else ephemeris
        begin, end = source.coverage
        low = begin if first is None else _tdb(first)
        high = end if last is None else _tdb(last)
        if not low < high:
            raise InputError("first, last", (low, high), "an earlier and a later instant")
        for name, value in (("first", low), ("last", high)):
            if not begin <= value <= end:
                allowed = f"JD {begin} to {end} TDB, the span of {source.name}"
                raise CoverageError(name, value, allowed)
        where, value, origin = _fixed(source, known)
        jd = where[0] + where[1]
        early = max(begin, min(low - MARGIN_DAYS, jd))
        panels = Panels.over(source, early, min(end, max(high + MARGIN_DAYS, jd)))
        distant = mean_potential(source.constants) if asteroids else 0.0
        whole, half = _integrals(source, panels, distant)
        error = 0.0
        records = []
        for row, name, start in ((0, "TDB-TT", value), (1, "TCB-TCL", 0.0)):
            series, error_of_row = _joined(whole[row], half[row], panels, where, start, name)
            error = max(error, error_of_row)
            records.append(series)
        return TimeEphemeris(source, records[0], records[1], error, origin)

    @staticmethod
    def default() -> TimeEphemeris:
        """From DE421, 1900 to 2199: what ``tdb="integrated"`` means where no ephemeris is said.

        Integrated when first asked for, and kept.
        """
        return of(Ephemeris.default())

    # -- what a person wants to know ---------------------------------------------------------

    @property
    def coverage(self) -> tuple[float, float]:
        """First and last Julian date (TDB)."""
        return self.earth.start_jd, self.earth.end_jd

    def __repr__(self) -> str:
        first, last = self.coverage
        return (
            f"<TimeEphemeris of {self.ephemeris.name}: JD {first} to {last} TDB, integrated to "
            f"{self.error_s:.1e} s; {self.origin}>"
        )

    # -- the relations -----------------------------------------------------------------------

    def tdb_minus_tt(
        self,
        tdb1: ArrayLike,
        tdb2: ArrayLike,
        ut1_fraction: ArrayLike = 0.0,
        xyz_m: ArrayLike | None = None,
        xp_rad: ArrayLike = 0.0,
        yp_rad: ArrayLike = 0.0,
    ) -> Any:
        """TDB - TT at a place on the Earth, or at the geocentre.

        Parameters
        ----------
        tdb1, tdb2 : float or array
            Julian date, TDB, in two parts.
        ut1_fraction : float or array, optional
            UT1 as a fraction of the day since midnight. Has no effect at the geocentre.
        xyz_m : array of shape (3,) or (3, ...), optional
            ITRF position of the clock, metres; the geocentre when not given.
        xp_rad, yp_rad : float or array, optional
            Coordinates of the pole; without them the term of the place is off by up to 3e-12 s.

        Returns
        -------
        float or array
            Seconds. The term of the place is ``v.r/c^2`` with the Earth's velocity of the
            ephemeris and its actual rotation, to 1e-13 s.

        Raises
        ------
        CoverageError
            Outside the span that was integrated.

        Examples
        --------
        >>> time = TimeEphemeris.integrate(first="2000-01-01", last="2000-02-01")
        >>> f"{time.tdb_minus_tt(2451545.0, 0.0):.6f}"
        '-0.000099'
        """
        date_pair("tdb", tdb1, tdb2)
        place = self.earth.locate(tdb1, tdb2)
        seconds = self.earth.value(place)[0]
        if xyz_m is not None:
            xyz = np.asarray(xyz_m, dtype=np.float64)
            if xyz.ndim == 0 or xyz.shape[0] != 3 or not np.all(np.isfinite(xyz)):
                raise InputError("xyz_m", xyz_m, "three finite coordinates, metres, shape (3, ...)")
            r = _to_gcrs(xyz, tdb1, tdb2, ut1_fraction, xp_rad, yp_rad)
            seconds = seconds + place_term(r, self.ephemeris.earth(tdb1, tdb2)[1])
        return float(seconds) if np.ndim(seconds) == 0 else seconds

    def tcb_minus_tcl_periodic(self, tdb1: ArrayLike, tdb2: ArrayLike) -> Any:
        """TCB - TCL at the centre of the Moon, less its mean rate since 1977-01-01 0h TAI, s.

        Parameters
        ----------
        tdb1, tdb2 : float or array
            Julian date, TDB, in two parts.

        Raises
        ------
        CoverageError
            Outside the span that was integrated.
        """
        date_pair("tdb", tdb1, tdb2)
        seconds = self.moon.value(self.moon.locate(tdb1, tdb2))[0]
        return float(seconds) if np.ndim(seconds) == 0 else seconds

    def sigma_s(self, tdb1: ArrayLike, tdb2: ArrayLike) -> Any:
        """One sigma of TDB - TT, or of TCB - TCL, as masses and orbits leave it, s.

        A nanosecond, and 5e-18 of the time since 1977: by so much the mean rates from two
        ephemerides differ, and the asteroids alone are 4e-18.

        Parameters
        ----------
        tdb1, tdb2 : float or array
            Julian date, TDB, in two parts.
        """
        elapsed = ((np.asarray(tdb1) - SCALES_ORIGIN[0]) + np.asarray(tdb2)) * DAY
        return np.hypot(np.hypot(1e-9, self.error_s), RATE_SIGMA * elapsed)

    # -- on disk -----------------------------------------------------------------------------

    def save(self, path: str | PathLike[str]) -> None:
        """Write it to a file (numpy's .npz), to be read with the same ephemeris again."""
        from lighttime.ephemeris.time_file import save

        save(self, path)

    @staticmethod
    def read(path: str | PathLike[str], ephemeris: Ephemeris | None = None) -> TimeEphemeris:
        """Read one that was saved.

        Parameters
        ----------
        path : path
        ephemeris : Ephemeris, optional
            What it was integrated from, DE421 if not given. Rates are compared at some instants.

        Raises
        ------
        FileError
            If the file is none of these, or was integrated from another ephemeris.
        """
        from lighttime.ephemeris.time_file import read

        return read(path, Ephemeris.default() if ephemeris is None else ephemeris)


@lru_cache(maxsize=4)
def of(ephemeris: Ephemeris) -> TimeEphemeris:
    """`TimeEphemeris.integrate` over an ephemeris, kept for the next who asks.

    From 1900 to 2200 where the ephemeris reaches further: some go over millennia.
    """
    begin, end = ephemeris.coverage
    return TimeEphemeris.integrate(
        ephemeris,
        Epoch(max(begin, _YEAR_1900), 0.0, "tdb"),
        Epoch(min(end, _YEAR_2200), 0.0, "tdb"),
    )


def chosen(tdb: str | TimeEphemeris, ephemeris: Ephemeris) -> TimeEphemeris | None:
    """What a model's TDB - TT is from; None for the series.

    Parameters
    ----------
    tdb : {"series", "integrated"} or TimeEphemeris
    ephemeris : Ephemeris
        The model's.

    Raises
    ------
    UnknownNameError
        For any other name.
    InputError
        For one that was integrated from another ephemeris.
    """
    if isinstance(tdb, TimeEphemeris):
        if tdb.ephemeris.name != ephemeris.name:
            raise InputError("tdb", tdb, f"one integrated from {ephemeris.name}")
        return tdb
    if tdb not in (SERIES, INTEGRATED):
        raise UnknownNameError("tdb", tdb, (SERIES, INTEGRATED, "or a TimeEphemeris"))
    return None if tdb == SERIES else of(ephemeris)


def _tdb(when: Any) -> float:
    tdb = Epoch.parse(when, "tdb").to("tdb")
    if tdb.shape:
        raise InputError("ends of the span", str(tdb), "one instant each")
    return float(tdb.jd1)


def _fixed(
    ephemeris: Ephemeris, known: tuple[Any, float] | None
) -> tuple[tuple[float, float], float, str]:
    """Where TDB - TT is known, what it is there, and why."""
    if known is not None:
        tdb = Epoch.parse(known[0], "tdb").to("tdb")
        if not np.isfinite(known[1]) or tdb.shape:
            raise InputError("known", known, "an instant, and TDB - TT there in seconds")
        return (tdb.jd1, tdb.jd2), float(known[1]), f"TDB - TT given on {tdb.isoformat(0)} TDB"
    begin, end = ephemeris.coverage
    origin = SCALES_ORIGIN[0], SCALES_ORIGIN[1] + TDB_0 / DAY
    if not begin <= origin[0] < end:
        raise CoverageError(
            "origin of TDB - TT",
            "1977-01-01 0h TAI",
            f"JD {begin} to {end} TDB, the span of {ephemeris.name}; else say known=(instant, "
            "TDB - TT in seconds)",
        )
    return origin, TDB_0, "constants of IAU 2006 B3"


def _integrals(ephemeris: Ephemeris, panels: Panels, distant: float) -> tuple[Array, Array]:
    """Series of the integrals in each panel, (2, panels, SAMPLES + 1), and those of half order.

    Rows: TDB - TT, and TCB - TCL less its mean rate, each from the beginning of the panel on.
    """
    x = nodes(SAMPLES)
    gm = {name: ephemeris.gm(name) for name in ("earth", "moon")}
    gm |= {n: ephemeris.gm(n) for n in ephemeris.barycentric if n != "earth_moon_barycentre"}
    coarse = SAMPLES // 2
    fine_series, coarse_series = [], []
    for block in panels.blocks():
        bodies = states(ephemeris, block, x)
        earth = tdb_minus_tt_rate(slowing("earth", bodies, gm, distant))
        moon = (slowing("moon", bodies, gm, distant) - TCL_RATE) / (1.0 - L_B)
        rates = np.stack([earth, moon]) * (0.5 * panels.days * DAY)
        fine_series.append(rates @ antiderivative(SAMPLES).T)
        coarse_series.append(rates[..., 1::2] @ antiderivative(coarse).T)
    return np.concatenate(fine_series, axis=1), np.concatenate(coarse_series, axis=1)


def _joined(
    fine: Array, coarse: Array, panels: Panels, where: tuple[float, float], value: float, name: str
) -> tuple[Records, float]:
    """One function over all panels, with its value at an instant; and how far half the order is."""
    added = np.concatenate([[0.0], np.cumsum(fine.sum(axis=-1))])
    needed = np.flatnonzero(np.abs(fine).max(axis=0) > NEGLIGIBLE_S)
    series = fine[:, None, : 1 + int(needed[-1])].copy()
    series[:, 0, 0] += added[:-1]
    records = Records(panels.start_jd, panels.days, series, name=name)
    series[:, 0, 0] += value - records.value(records.locate(*where))[0]
    series.flags.writeable = False
    less = np.concatenate([[0.0], np.cumsum(coarse.sum(axis=-1))])
    lost = added - less
    at = np.interp(where[0] + where[1], panels.start_jd + panels.days * np.arange(lost.size), lost)
    inside = fine[:, : coarse.shape[1]] - coarse
    inside = np.abs(inside).sum(axis=-1) + np.abs(fine[:, coarse.shape[1] :]).sum(axis=-1)
    error = float(np.max(np.abs(lost - at)) + np.max(inside))
    return records, error


def _to_gcrs(
    xyz: Array, tdb1: ArrayLike, tdb2: ArrayLike, ut1_fraction: ArrayLike, xp: Any, yp: Any
) -> Array:
    """A place on the Earth along the axes of the GCRS.

    With the nutation of IAU 2000B, which is good to a milliarcsecond: 1e-14 s of the term.
    """
    x, y, z = xyz
    x, y, z = x - xp * z, y + yp * z, z + xp * x - yp * y
    fraction = np.asarray(ut1_fraction, dtype=np.float64)
    # UT1 and TDB are less than a few minutes apart: the day is that which brings them together
    midnight = np.round((np.asarray(tdb1) - 0.5) + (np.asarray(tdb2) - fraction)) + 0.5
    era = erfa.era00(midnight, fraction)
    cosine, sine = np.cos(era), np.sin(era)
    x, y, z = np.broadcast_arrays(x * cosine - y * sine, x * sine + y * cosine, z)
    to_pole = erfa.c2ixys(*erfa.xys00b(tdb1, tdb2))
    turned: Array = np.einsum("...ij,i...->j...", to_pole, np.stack([x, y, z]))
    return turned
