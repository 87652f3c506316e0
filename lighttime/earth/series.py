"""Where the pole is and how far the Earth has turned: measured series and their interpolation."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass, fields
from functools import cache, cached_property
from os import PathLike, fspath
from typing import Any, Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import ARCSECOND, DAY, MILLIARCSECOND, MJD_ZERO, TT_MINUS_TAI
from lighttime.earth.interpolation import combine, lagrange, lagrange_slope
from lighttime.earth.pole import PoleAndUT1
from lighttime.earth.series_files import LARGEST, PREDICTED, joined, read_days
from lighttime.earth.series_text import calendar, described
from lighttime.earth.zonal import zonal_tides, zonal_ut1
from lighttime.errors import CoverageError, InputError
from lighttime.timescales.scales import tai_minus_utc, tai_to_utc

__all__ = ["EarthOrientation", "PoleAndUT1"]

Floats = NDArray[np.float64]

BLOCK: Final = 512
"""Nodes whose zonal tides are computed together, when first asked for."""

_ROUNDING: Final = 1e-15
"""Days by which the first and last node may be missed, as dates in two parts are rounded."""

_VALUES: Final = ("ut1_tai_s", "xp_arcsec", "yp_arcsec", "dx_mas", "dy_mas")
_SIGMAS: Final = ("sigma_ut1_s", *(f"sigma_{name}" for name in _VALUES[1:]))
_UNITS: Final = (1.0, ARCSECOND, ARCSECOND, MILLIARCSECOND, MILLIARCSECOND)


@dataclass(frozen=True, eq=False, repr=False)
class EarthOrientation:
    """A series of Earth orientation: one set of values at 0h UTC of each day.

    Made by `EarthOrientation.bundled`, `EarthOrientation.read` or `EarthOrientation.fixed`.
    Arrays are of shape (days,) and cannot be written to; two series are equal when all they
    hold is.

    Attributes
    ----------
    name : str
        What the series is, for people.
    mjd : ndarray
        The nodes: modified Julian dates of 0h UTC on consecutive days.
    ut1_tai_s : ndarray
        UT1 - TAI, s: the published UT1 - UTC less TAI - UTC at 0h UTC of that day, which
        before 1972 is not a whole number.
    xp_arcsec, yp_arcsec : ndarray
        Pole in the ITRF.
    dx_mas, dy_mas : ndarray
        Corrections to the celestial pole of IAU 2006/2000A. Zero after `last_dxdy_mjd`.
    sigma_ut1_s, sigma_xp_arcsec, sigma_yp_arcsec, sigma_dx_mas, sigma_dy_mas : ndarray
        One sigma of each, as published; `UNKNOWN_DXDY_SIGMA_MAS` after `last_dxdy_mjd`.
    kind : ndarray of int
        0 final (C04), 1 rapid (measured, to be improved), 2 predicted.
    last_dxdy_mjd : float
        The last node that has published dX, dY.
    constant : tuple of 5 floats or None
        Of a fixed orientation (which has no nodes): UT1-UTC (s), x_p, y_p (arcsec),
        dX, dY (mas).

    Notes
    -----
    The interpolation, exactly. Let nodes i, i+1 be those around the instant, i counted from 0
    to n-1 and limited to 0 <= i <= n-2, T_i the node's instant in TAI, T the instant, and

        x = (T - T_i) / (T_{i+1} - T_i).

    The four nodes j, j+1, j+2, j+3 with j = i-1, limited to 0 <= j <= n-4, are taken as equally
    spaced in x (a leap second is not seen): with t = x + (i - 1 - j), the value is

        - t(t-1)(t-2)/6 f_j + (t+1)(t-1)(t-2)/2 f_{j+1}
        - (t+1)t(t-2)/2 f_{j+2} + (t+1)t(t-1)/6 f_{j+3}.

    f is x_p, y_p, dX, dY as published, and (UT1 - TAI) minus the UT1 of the 62 zonal tides
    (`lighttime.earth.zonal`) at the node's TT = TAI + 32.184 s; the tides at the instant's own
    TT are added to the result. Sigmas are interpolated linearly between nodes i and i+1.

    Source: IERS Conventions (2010), TN36, 5.4 and 5.5; four-point Lagrange interpolation as
    recommended by IERS Gazette 13 (1997).
    """

    name: str
    mjd: Floats
    ut1_tai_s: Floats
    xp_arcsec: Floats
    yp_arcsec: Floats
    dx_mas: Floats
    dy_mas: Floats
    sigma_ut1_s: Floats
    sigma_xp_arcsec: Floats
    sigma_yp_arcsec: Floats
    sigma_dx_mas: Floats
    sigma_dy_mas: Floats
    kind: NDArray[np.int8]
    last_dxdy_mjd: float
    constant: tuple[float, float, float, float, float] | None = None

    def __post_init__(self) -> None:
        for field in fields(self):
            value = getattr(self, field.name)
            if isinstance(value, np.ndarray):
                own = value.copy()
                own.flags.writeable = False
                object.__setattr__(self, field.name, own)

    @staticmethod
    def bundled() -> EarthOrientation:
        """IERS 20 C04, and finals2000A with its predictions after the last day of the C04.

        Both as carried by the installed package ``astropy-iers-data``; a newer version of it
        reaches further. Read once in a process.

        Examples
        --------
        >>> series = EarthOrientation.bundled()
        >>> float(series.mjd[0]), round(float(series.xp_arcsec[0]), 4)
        (37665.0, -0.0127)
        """
        return _bundled()

    @staticmethod
    def read(path: str | PathLike[str]) -> EarthOrientation:
        """A series from a file of IERS C04 or finals2000A, recognised by its content.

        Of finals2000A the Bulletin A values are taken throughout (one consistent series), up to
        the last day that has UT1.

        Parameters
        ----------
        path : path
            A plain text file.

        Raises
        ------
        FileError
            With the line where reading stopped.
        """
        days = read_days(path)
        return EarthOrientation(name=f"{days.layout.name} ({fspath(path)})", **joined([days], path))

    @staticmethod
    def fixed(
        ut1_utc_s: float,
        xp_arcsec: float = 0.0,
        yp_arcsec: float = 0.0,
        dx_mas: float = 0.0,
        dy_mas: float = 0.0,
    ) -> EarthOrientation:
        """Constant values at any date of UTC: for worked examples and comparisons.

        UT1 - UTC is the given number at every instant: no zonal tides are applied, and the
        drift of UT1 and of the UTC of 1960 to 1971 is not seen. All sigmas are zero.

        Parameters
        ----------
        ut1_utc_s : float
            UT1 - UTC, s, within 2.
        xp_arcsec, yp_arcsec : float
            Pole, arcseconds, within 2.
        dx_mas, dy_mas : float
            Corrections to the celestial pole, milliarcseconds, within 100.

        Examples
        --------
        >>> series = EarthOrientation.fixed(0.3341)
        >>> round(float(series.at(2453751.5, 0.9).ut1_tai_s), 4)  # TAI - UTC: 33 s in 2006
        -32.6659
        """
        constant = (ut1_utc_s, xp_arcsec, yp_arcsec, dx_mas, dy_mas)
        for (name, limit), value in zip(LARGEST.items(), constant, strict=True):
            if not abs(value) <= limit:
                raise InputError(name, value, f"-{limit} to {limit}")
        nodes: dict[str, Any] = dict.fromkeys(("mjd", *_VALUES, *_SIGMAS), np.empty(0))
        return EarthOrientation(
            name="fixed",
            kind=np.empty(0, dtype=np.int8),
            last_dxdy_mjd=np.inf,
            constant=constant,
            **nodes,
        )

    @cached_property
    def tai1(self) -> Floats:
        """First part of the nodes' Julian dates in TAI: that of 0h UTC as a day number."""
        return _read_only(self.mjd + MJD_ZERO)

    @cached_property
    def tai2(self) -> Floats:
        """Second part: TAI - UTC at the node, days."""
        return _read_only(_tai_minus_utc(self.mjd) / DAY)

    @property
    def coverage(self) -> tuple[float, float]:
        """First and last node, MJD (UTC): instants from the one to the other can be asked for."""
        if self.constant is not None:
            return -np.inf, np.inf
        return float(self.mjd[0]), float(self.mjd[-1])

    @property
    def last_measured_mjd(self) -> float:
        """The last node that is not a prediction, MJD (UTC)."""
        if self.constant is not None:
            return np.inf
        measured = self.mjd[self.kind != PREDICTED]
        return float(measured[-1]) if measured.size else -np.inf

    @property
    def ut1_tai_tide_free_s(self) -> Floats:
        """UT1 - TAI at the nodes without the zonal tides, s: what is interpolated."""
        return _read_only(self._tide_free(np.arange(self.mjd.size)))

    def at(self, tai1: ArrayLike, tai2: ArrayLike) -> PoleAndUT1:
        """Pole and UT1 at some instants.

        Parameters
        ----------
        tai1, tai2 : array_like, shape (...)
            Two-part Julian date, TAI.

        Returns
        -------
        PoleAndUT1
            Without the sub-daily terms. The interpolation is written down in the class.

        Raises
        ------
        CoverageError
            An instant before the first or after the last node.
        InputError
            An instant that is not finite.

        Examples
        --------
        >>> pole = EarthOrientation.bundled().at(2437665.5, 1.845858 / 86400.0)  # 1962-01-01
        >>> round(float(pole.ut1_tai_s), 7)  # UT1-UTC 0.0326338 s, TAI-UTC 1.845858 s
        -1.8132242
        """
        if self.constant is not None:
            return self._constant_at(tai1, tai2)
        j, t, _ = self._stencil(tai1, tai2)
        tides = zonal_ut1(tai1, np.asarray(tai2) + TT_MINUS_TAI / DAY)
        return self._combined(lagrange(t), j, tides)

    def rates(self, tai1: ArrayLike, tai2: ArrayLike) -> PoleAndUT1:
        """The derivatives of what `at` gives, per second of TAI.

        The rate of UT1 - TAI is minus the excess length of day over 86400 s. The tides in it
        are those of table 8.1 for the length of day. A fixed orientation has rates of zero.
        """
        if self.constant is not None:
            zero = np.zeros(np.broadcast_shapes(np.shape(tai1), np.shape(tai2)))[()]
            return PoleAndUT1(zero, zero, zero, zero, zero)
        j, t, length_s = self._stencil(tai1, tai2)
        tides = -zonal_tides(tai1, np.asarray(tai2) + TT_MINUS_TAI / DAY).lod_s / DAY
        return self._combined(lagrange_slope(t) / length_s, j, tides)

    def sigmas(self, tai1: ArrayLike, tai2: ArrayLike) -> PoleAndUT1:
        """One sigma of each of the values of `at`, linear between the nodes."""
        if self.constant is not None:
            return self.rates(tai1, tai2)  # zero
        i, x, _ = self._interval(tai1, tai2)
        return PoleAndUT1(
            *(
                (unit * ((1.0 - x) * sigma[i] + x * sigma[i + 1]))[()]
                for sigma, unit in zip((getattr(self, s) for s in _SIGMAS), _UNITS, strict=True)
            )
        )

    def _interval(self, tai1: ArrayLike, tai2: ArrayLike) -> tuple[Any, Floats, Floats]:
        """Node i before each instant, x from it (0) to the next (1), and their distance (s)."""
        tai1, tai2 = np.broadcast_arrays(np.asarray(tai1, float), np.asarray(tai2, float))
        since_first, since_last = (
            (tai1 - self.tai1[end]) + (tai2 - self.tai2[end]) for end in (0, -1)
        )
        outside = ~((since_first >= -_ROUNDING) & (since_last <= _ROUNDING))
        if outside.any():
            self._refuse(float(((tai1 - MJD_ZERO) + tai2)[outside].flat[0]))
        nodes = self._days_of_nodes
        i = np.clip(np.searchsorted(nodes, since_first, side="right") - 1, 0, nodes.size - 2)
        length = (self.tai1[i + 1] - self.tai1[i]) + (self.tai2[i + 1] - self.tai2[i])
        x = ((tai1 - self.tai1[i]) + (tai2 - self.tai2[i])) / length
        return i, x, DAY * length

    def _stencil(self, tai1: ArrayLike, tai2: ArrayLike) -> tuple[Any, Floats, Floats]:
        """First of the four nodes, t counted from the second, distance of nodes (s)."""
        i, x, length_s = self._interval(tai1, tai2)
        j = np.clip(i - 1, 0, self.mjd.size - 4)
        return j, x + (i - 1 - j), length_s

    def _combined(self, weights: Floats, j: Any, tides: Floats) -> PoleAndUT1:
        """The weighted sum of nodes j to j+3; UT1 - TAI without tides, and those added."""
        ut1 = combine(weights, self._tide_free, j) + tides
        pole = (
            unit * combine(weights, getattr(self, name).__getitem__, j)
            for name, unit in zip(_VALUES[1:], _UNITS[1:], strict=True)
        )
        return PoleAndUT1(ut1[()], *(value[()] for value in pole))

    def _refuse(self, mjd: float) -> None:
        if not np.isfinite(mjd):
            raise InputError("tai1 + tai2", mjd, "a finite Julian date")
        first, last = ((self.tai1 - MJD_ZERO) + self.tai2)[[0, -1]]
        raise CoverageError(
            "epoch",
            f"{calendar(mjd)} (MJD {mjd:.6f} TAI)",
            f"{calendar(first)} to {calendar(last)} (MJD {first:.6f} to {last:.6f} TAI), "
            f"what {self.name} covers",
        )

    @cached_property
    def _days_of_nodes(self) -> Floats:
        days: Floats = (self.tai1 - self.tai1[0]) + (self.tai2 - self.tai2[0])
        return days

    @cached_property
    def _tide_free_store(self) -> tuple[Floats, NDArray[np.bool_]]:
        """Filled block by block as instants ask for it; the same numbers in any order."""
        return np.empty(self.mjd.size), np.zeros(-(-self.mjd.size // BLOCK), dtype=bool)

    def _tide_free(self, node: Any) -> Floats:
        values, done = self._tide_free_store
        asked = np.zeros_like(done)
        asked[np.asarray(node) // BLOCK] = True
        for block in np.flatnonzero(asked & ~done):
            some = slice(block * BLOCK, (block + 1) * BLOCK)
            tt2 = self.tai2[some] + TT_MINUS_TAI / DAY
            values[some] = self.ut1_tai_s[some] - zonal_ut1(self.tai1[some], tt2)
            done[block] = True
        found: Floats = values[node]
        return found

    def _constant_at(self, tai1: ArrayLike, tai2: ArrayLike) -> PoleAndUT1:
        assert self.constant is not None
        ut1_utc_s, *pole = self.constant
        if not np.all(np.isfinite(np.asarray(tai1, float) + np.asarray(tai2, float))):
            raise InputError("tai1 + tai2", (tai1, tai2), "a finite Julian date")
        ut1_tai_s = ut1_utc_s - np.asarray(tai_minus_utc(*tai_to_utc(tai1, tai2)))
        same = np.ones_like(ut1_tai_s)
        return PoleAndUT1(
            ut1_tai_s[()],
            *((unit * value * same)[()] for value, unit in zip(pole, _UNITS[1:], strict=True)),
        )

    @cached_property
    def _digest(self) -> bytes:
        content = hashlib.blake2b(digest_size=16)
        content.update(repr((self.name, self.last_dxdy_mjd, self.constant)).encode())
        for name in ("mjd", *_VALUES, *_SIGMAS, "kind"):
            content.update(getattr(self, name).tobytes())
        return content.digest()

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, EarthOrientation):
            return NotImplemented
        return self is other or self._digest == other._digest

    def __hash__(self) -> int:
        return hash(self._digest)

    def __reduce__(self) -> tuple[Any, ...]:
        return type(self), tuple(getattr(self, field.name) for field in fields(self))

    def __repr__(self) -> str:
        first, last = self.coverage
        return f"<EarthOrientation {self.name}: MJD {first:.0f} to {last:.0f}>"

    def __str__(self) -> str:
        return described(self)


def _read_only(values: Floats) -> Floats:
    values.flags.writeable = False
    return values


def _tai_minus_utc(mjd: Floats) -> Floats:
    return np.asarray(tai_minus_utc(mjd + MJD_ZERO, np.zeros_like(mjd)))


@cache
def _bundled() -> EarthOrientation:
    from astropy_iers_data import IERS_A_FILE, IERS_B_FILE, __version__

    final = read_days(IERS_B_FILE)
    last = float(final.values["mjd"][-1])
    later = read_days(IERS_A_FILE, after_mjd=last)
    name = f"{final.layout.name}, then {later.layout.name} (astropy-iers-data {__version__})"
    return EarthOrientation(name=name, **joined([final, later], IERS_A_FILE))
