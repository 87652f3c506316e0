"""Where the pole is and how far the Earth has turned: measured series and their interpolation."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass, fields
from datetime import date
from functools import cache, cached_property
from os import PathLike, fspath
from typing import Any, Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from lighttime.constants import ARCSECOND, DAY, MILLIARCSECOND, MJD_ZERO, TT_MINUS_TAI
from lighttime.earth.series_files import FINAL, PREDICTED, RAPID, Days, read_days
from lighttime.earth.zonal import zonal_tides, zonal_ut1
from lighttime.errors import CoverageError, FileError, InputError
from lighttime.timescales.scales import tai_minus_utc, tai_to_utc

Floats = NDArray[np.float64]

UNKNOWN_DXDY_SIGMA_MAS: Final = 0.3
"""One sigma of dX and dY taken as zero where no value is published, mas.

The amplitude that the free core nutation, their unpredictable part, typically has (from
memory)."""

BLOCK: Final = 512
"""Nodes whose zonal tides are computed together, when first asked for."""

KINDS: Final = {FINAL: "final", RAPID: "rapid", PREDICTED: "predicted"}

_MJD_OF_ORDINAL: Final = 678576


@dataclass(frozen=True)
class PoleAndUT1:
    """UT1 and the pole at some instants, or their sigmas, or their rates per second of TAI.

    Every attribute is a float or an array of the shape of the instants. The effects of ocean
    tides and of libration with periods of a day and less are not contained.
    """

    ut1_tai_s: Any
    """UT1 - TAI, s."""
    xp_rad: Any
    """Coordinate x_p of the pole in the ITRF, rad."""
    yp_rad: Any
    """Coordinate y_p of the pole in the ITRF, rad."""
    dx_rad: Any
    """Correction dX to the pole of IAU 2006/2000A in the GCRS, rad."""
    dy_rad: Any
    """Correction dY to the pole of IAU 2006/2000A in the GCRS, rad."""


_VALUES: Final = ("ut1_tai_s", "xp_arcsec", "yp_arcsec", "dx_mas", "dy_mas")
_SIGMAS: Final = (
    "sigma_ut1_s",
    "sigma_xp_arcsec",
    "sigma_yp_arcsec",
    "sigma_dx_mas",
    "sigma_dy_mas",
)
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

    # --- where series come from --------------------------------------------------------------

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
        return _from_days(f"{days.layout.name} ({fspath(path)})", path, [days])

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
            UT1 - UTC, s, within 1.
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
        values = []
        for name, value, limit in (
            ("ut1_utc_s", ut1_utc_s, 1.0),
            ("xp_arcsec", xp_arcsec, 2.0),
            ("yp_arcsec", yp_arcsec, 2.0),
            ("dx_mas", dx_mas, 100.0),
            ("dy_mas", dy_mas, 100.0),
        ):
            number = float(value)
            if not abs(number) <= limit:
                raise InputError(name, value, f"-{limit} to {limit}")
            values.append(number)
        a, b, c, d, e = values
        nodes: dict[str, Any] = dict.fromkeys(("mjd", *_VALUES, *_SIGMAS), np.empty(0))
        return EarthOrientation(
            name="fixed",
            kind=np.empty(0, dtype=np.int8),
            last_dxdy_mjd=np.inf,
            constant=(a, b, c, d, e),
            **nodes,
        )

    # --- what it holds -----------------------------------------------------------------------

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

    # --- values ------------------------------------------------------------------------------

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
        weights = _lagrange(t)
        tides = zonal_ut1(tai1, np.asarray(tai2) + TT_MINUS_TAI / DAY)
        ut1 = _combine(weights, self._tide_free, j) + tides
        pole = [
            unit * _combine(weights, getattr(self, name).__getitem__, j)
            for name, unit in zip(_VALUES[1:], _UNITS[1:], strict=True)
        ]
        return PoleAndUT1(*(value[()] for value in (ut1, *pole)))

    def rates(self, tai1: ArrayLike, tai2: ArrayLike) -> PoleAndUT1:
        """The derivatives of what `at` gives, per second of TAI.

        The rate of UT1 - TAI is minus the excess length of day over 86400 s. The tides in it
        are those of table 8.1 for the length of day. A fixed orientation has rates of zero.
        """
        if self.constant is not None:
            zero = np.zeros(np.broadcast_shapes(np.shape(tai1), np.shape(tai2)))[()]
            return PoleAndUT1(zero, zero, zero, zero, zero)
        j, t, length_s = self._stencil(tai1, tai2)
        weights = _lagrange_slope(t) / length_s
        tides = -zonal_tides(tai1, np.asarray(tai2) + TT_MINUS_TAI / DAY).lod_s / DAY
        ut1 = _combine(weights, self._tide_free, j) + tides
        pole = [
            unit * _combine(weights, getattr(self, name).__getitem__, j)
            for name, unit in zip(_VALUES[1:], _UNITS[1:], strict=True)
        ]
        return PoleAndUT1(*(value[()] for value in (ut1, *pole)))

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

    # --- how ---------------------------------------------------------------------------------

    def _interval(self, tai1: ArrayLike, tai2: ArrayLike) -> tuple[Any, Floats, Floats]:
        """Node i before each instant, x in [0, 1] from it to the next, and their distance (s)."""
        tai1, tai2 = np.broadcast_arrays(np.asarray(tai1, float), np.asarray(tai2, float))
        days = (tai1 - self.tai1[0]) + tai2
        nodes = self._days_of_nodes
        outside = ~((days >= nodes[0]) & (days <= nodes[-1]))
        if outside.any():
            self._refuse(float(days[outside].flat[0]))
        i = np.clip(np.searchsorted(nodes, days, side="right") - 1, 0, nodes.size - 2)
        length = (self.tai1[i + 1] - self.tai1[i]) + (self.tai2[i + 1] - self.tai2[i])
        x = ((tai1 - self.tai1[i]) + (tai2 - self.tai2[i])) / length
        return i, x, DAY * length

    def _stencil(self, tai1: ArrayLike, tai2: ArrayLike) -> tuple[Any, Floats, Floats]:
        """First of the four nodes, t counted from the second, distance of nodes (s)."""
        i, x, length_s = self._interval(tai1, tai2)
        j = np.clip(i - 1, 0, self.mjd.size - 4)
        return j, x + (i - 1 - j), length_s

    def _refuse(self, days: float) -> None:
        mjd = days + self.mjd[0]
        if not np.isfinite(mjd):
            raise InputError("tai1 + tai2", mjd, "a finite Julian date")
        first, last = self._days_of_nodes[[0, -1]] + self.mjd[0]
        raise CoverageError(
            "epoch",
            f"{_calendar(mjd)} (MJD {mjd:.6f} TAI)",
            f"{_calendar(first)} to {_calendar(last)} (MJD {first:.6f} to {last:.6f} TAI), "
            f"what {self.name} covers",
        )

    @cached_property
    def _days_of_nodes(self) -> Floats:
        return (self.tai1 - self.tai1[0]) + self.tai2

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
        found: Floats = np.take(values, node)
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

    # --- as a value --------------------------------------------------------------------------

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
        lines = [f"Earth orientation: {self.name}"]
        if self.constant is not None:
            ut1, xp, yp, dx, dy = self.constant
            lines += [
                f"  UT1-UTC {ut1:+.7f} s at every instant, without zonal tides",
                f'  pole x {xp:+.6f}", y {yp:+.6f}"; dX {dx:+.3f}, dY {dy:+.3f} mas',
            ]
            return "\n".join(lines)
        for code, word in KINDS.items():
            days = np.flatnonzero(self.kind == code)
            if days.size:
                k = days[-1]
                lines.append(
                    f"  {word:9} {_calendar(self.mjd[days[0]])} to {_calendar(self.mjd[k])}, at "
                    f"the end one sigma is {1e6 * self.sigma_ut1_s[k]:.0f} us in UT1, "
                    f"{1e3 * self.sigma_xp_arcsec[k]:.3f} and "
                    f"{1e3 * self.sigma_yp_arcsec[k]:.3f} mas in the pole"
                )
        lines.append(f"  dX, dY    to {_calendar(self.last_dxdy_mjd)}")
        if self.last_dxdy_mjd < self.mjd[-1]:
            lines[-1] += f"; after that zero, with one sigma of {UNKNOWN_DXDY_SIGMA_MAS} mas"
        return "\n".join(lines)


def _lagrange(t: Floats) -> Floats:
    """Weights of nodes -1, 0, 1, 2 at t, shape (4, ...)."""
    return np.stack(
        [
            -t * (t - 1.0) * (t - 2.0) / 6.0,
            (t + 1.0) * (t - 1.0) * (t - 2.0) / 2.0,
            -(t + 1.0) * t * (t - 2.0) / 2.0,
            (t + 1.0) * t * (t - 1.0) / 6.0,
        ]
    )


def _lagrange_slope(t: Floats) -> Floats:
    """Derivatives of `_lagrange` with respect to t."""
    return np.stack(
        [
            -(3.0 * t * t - 6.0 * t + 2.0) / 6.0,
            (3.0 * t * t - 4.0 * t - 1.0) / 2.0,
            -(3.0 * t * t - 2.0 * t - 2.0) / 2.0,
            (3.0 * t * t - 1.0) / 6.0,
        ]
    )


def _combine(weights: Floats, values: Any, first: Any) -> Floats:
    total: Floats = sum(
        (weights[k] * values(first + k) for k in range(1, 4)), weights[0] * values(first)
    )
    return total


def _read_only(values: Floats) -> Floats:
    values.flags.writeable = False
    return values


def _tai_minus_utc(mjd: Floats) -> Floats:
    return np.asarray(tai_minus_utc(mjd + MJD_ZERO, np.zeros_like(mjd)))


def _calendar(mjd: float) -> str:
    try:
        return date.fromordinal(int(np.floor(mjd)) + _MJD_OF_ORDINAL).isoformat()
    except (ValueError, OverflowError):
        return f"MJD {mjd:.1f}"


@cache
def _bundled() -> EarthOrientation:
    from astropy_iers_data import IERS_A_FILE, IERS_B_FILE, __version__

    final = read_days(IERS_B_FILE)
    last = float(final.values["mjd"][-1])
    later = read_days(IERS_A_FILE, after_mjd=last)
    name = f"{final.layout.name}, then {later.layout.name} (astropy-iers-data {__version__})"
    return _from_days(name, IERS_A_FILE, [final, later])


def _from_days(name: str, path: str | PathLike[str], parts: list[Days]) -> EarthOrientation:
    """One series of the days of several files, the last of which is at `path`."""
    parts = [part for part in parts if part.kind.size]
    values: dict[str, Any] = {
        key: np.concatenate([part.values[key] for part in parts]) for key in parts[0].values
    }
    mjd = values.pop("mjd")
    if mjd.size < 4:
        raise FileError(path, None, f"{mjd.size} days; at least 4 are needed to interpolate")
    if np.any(np.diff(mjd) != 1.0):
        gap = mjd[np.flatnonzero(np.diff(mjd) != 1.0)[0]]
        raise FileError(path, None, f"the series does not go on after MJD {gap:.0f}")
    unknown = np.isnan(values["dx_mas"])
    for key in ("dx_mas", "dy_mas"):
        values[key][unknown] = 0.0
        values[f"sigma_{key}"][unknown] = UNKNOWN_DXDY_SIGMA_MAS
    given = mjd[~unknown]
    values["ut1_tai_s"] = values.pop("ut1_utc_s") - _tai_minus_utc(mjd)
    return EarthOrientation(
        name=name,
        mjd=mjd,
        kind=np.concatenate([part.kind for part in parts]),
        last_dxdy_mjd=float(given[-1]) if given.size else -np.inf,
        **values,
    )
