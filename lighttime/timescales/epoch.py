"""`Epoch`: an instant, or an array of them, told in one time scale."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike

from lighttime.errors import InputError
from lighttime.inputs import without_unit
from lighttime.timescales import twopart
from lighttime.timescales.inputs import Place, Rotation
from lighttime.timescales.leapseconds import utc_days
from lighttime.timescales.relation import Choice
from lighttime.timescales.scales import UNIFORM, convert, known_scale
from lighttime.timescales.text import format_iso
from lighttime.timescales.uniform import DAY_PAIR

if TYPE_CHECKING:
    from astropy.time import Time

_FIRST_JD, _END_JD = 1721425.5, 5373483.5
_YEARS = "Julian dates from 1721425.5 to 5373483.5 (the years 1 to 9999)"


@dataclass(frozen=True, eq=False, repr=False)
class Epoch:
    """An instant, or an array of instants, in one time scale.

    Parameters
    ----------
    jd1, jd2 : float or array
        Julian date in two parts, broadcast to one shape. Their sum is kept without loss, as the
        float64 nearest to it and the rest: a grid of about 1e-21 s. For UTC it is ERFA's
        quasi-Julian date, of which a day with a leap second takes one unit, as any other day.
    scale : str
        ``utc``, ``tai``, ``tt``, ``tdb``, ``ut1``, ``tcg``, ``tcb``, ``gps``, ``gst`` or ``tcl``.

    Attributes
    ----------
    jd1, jd2 : float or ndarray
        Python floats for one instant, read-only arrays for many.
    scale : str

    Raises
    ------
    InputError
        When a part is not a finite number, the shapes do not fit each other, or the date is
        outside the years 1 to 9999.
    CoverageError
        For UTC before 1960-01-01, when it was first kept, or not before 2100-01-01, beyond
        which leap seconds are too uncertain to speak of UTC. From the last entry of the
        leap-second table on none is assumed.
    UnknownNameError
        For a scale not listed.

    Notes
    -----
    Epochs never change; they compare equal when scale, shape and every instant are the same.

    Examples
    --------
    >>> shot = Epoch.parse("2008-03-30T12:39:50")
    >>> print(shot.to("tdb"))
    2008-03-30T12:40:55.185668147206 TDB
    >>> print(shot.shift(2.6170710379889))
    2008-03-30T12:39:52.617071037989 UTC
    """

    jd1: Any
    jd2: Any
    scale: str

    def __post_init__(self) -> None:
        scale = known_scale(self.scale)
        try:
            first = np.asarray(self.jd1, dtype=np.float64)
            second = np.asarray(self.jd2, dtype=np.float64)
        except (TypeError, ValueError):
            raise InputError("Julian date", (self.jd1, self.jd2), "two numbers") from None
        try:
            first, second = np.broadcast_arrays(first, second)
        except ValueError:
            shapes = f"{first.shape} and {second.shape}"
            raise InputError("shapes of jd1 and jd2", shapes, "two that broadcast") from None
        with np.errstate(invalid="ignore", over="ignore"):
            date = twopart.two_sum(first, second)
        _check("Julian date", date[0], scale)
        if scale == "utc":
            utc_days(twopart.day_and_fraction(date)[0])
        jd1, jd2 = twopart.plain((date[0], date[1] + 0.0))
        for part in (jd1, jd2):
            if isinstance(part, np.ndarray):
                part.flags.writeable = False
        object.__setattr__(self, "jd1", jd1)
        object.__setattr__(self, "jd2", jd2)
        object.__setattr__(self, "scale", scale)

    @classmethod
    def parse(cls, value: Any, scale: str = "utc") -> Epoch:
        """An epoch from text or from what other libraries use.

        Parameters
        ----------
        value : str, datetime, numpy.datetime64, astropy.time.Time, Epoch, or array or list
            Text is ISO 8601, ``YYYY-MM-DD`` with ``Thh:mm:ss.fraction``; every digit of the
            fraction counts. In UTC it may end in ``Z``, and the second 60 exists on days that
            end in a leap second. A datetime must know its time zone.
        scale : str, optional
            The scale of text and of ``datetime64``, which do not say. An aware datetime is
            UTC; an astropy Time and an Epoch keep the scale that they have.

        Raises
        ------
        InputError
            When the value cannot be read, with what was found and what is allowed.
        CoverageError
            For UTC before 1960-01-01 or not before 2100-01-01.
        UnknownNameError
            For an unknown scale.

        Examples
        --------
        >>> Epoch.parse("2016-12-31T23:59:60.5").to("tai").isoformat(1)
        '2017-01-01T00:00:36.5'
        """
        from lighttime.timescales.reading import read

        return cls(*read(value, known_scale(scale)))

    @property
    def shape(self) -> tuple[int, ...]:
        """The shape of the array of instants, ``()`` for one."""
        return np.shape(self.jd1)

    def to(
        self,
        scale: str,
        place: Place | None = None,
        earth_orientation: Rotation | None = None,
        tdb: Choice = None,
    ) -> Epoch:
        """The same instants in another scale.

        Parameters
        ----------
        scale : str
            One of the scales of `Epoch`.
        place : object with ``xyz_m``, optional
            ITRF position of the clock, used between TT and TDB: without it the clock is at
            the geocentre, and up to 2 microseconds of daily variation are left out.
        earth_orientation : EarthOrientation, optional
            Gives UT1, for conversions to and from ``ut1`` and, with a place, between TT and
            TDB; the bundled series when not given. Sub-daily terms are not part of this UT1.
        tdb : {"series", "integrated"} or TimeEphemeris, optional
            What TDB - TT is from: the series of Fairhead & Bretagnon when not given, the orbits
            of DE421, or those of the ephemeris of a `TimeEphemeris`. TCL, here at the centre of
            the Moon, is known by integration only, and needs one of the latter two.
        """
        target = known_scale(scale)
        if target == self.scale:
            return self
        date = convert(self.jd1, self.jd2, self.scale, target, place, earth_orientation, tdb)
        return Epoch(*date, target)

    def shift(
        self,
        seconds: ArrayLike,
        rest_s: ArrayLike = 0.0,
        earth_orientation: Rotation | None = None,
    ) -> Epoch:
        """The instants after some elapsed seconds, in the same scale.

        Parameters
        ----------
        seconds : float or array
            Elapsed seconds, of the scale when it is uniform, of TAI when it is UTC or UT1.
        rest_s : float or array, optional
            What `seconds` lost in rounding to a float64, added without loss.
        earth_orientation : EarthOrientation, optional
            For epochs in UT1 only, to reach TAI; the bundled series when not given.

        Examples
        --------
        >>> Epoch.parse("2016-12-31T23:59:59").shift(1.25).isoformat(2)
        '2016-12-31T23:59:60.25'
        """
        if self.scale not in UNIFORM:
            in_tai = self.to("tai", earth_orientation=earth_orientation)
            moved = in_tai.shift(seconds, rest_s)
            return moved.to(self.scale, earth_orientation=earth_orientation)
        seconds = without_unit("seconds", seconds)
        if not (np.all(np.isfinite(seconds)) and np.all(np.isfinite(rest_s))):
            raise InputError("seconds", seconds, "finite numbers")
        try:
            days = twopart.divide(twopart.pair(seconds, rest_s), DAY_PAIR)
            date = twopart.add(twopart.pair(self.jd1, self.jd2), days)
        except ValueError:
            given = f"shape {np.shape(seconds)} for epochs of shape {self.shape}"
            raise InputError("seconds", given, "numbers of a shape that broadcasts") from None
        return Epoch(*date, self.scale)

    def seconds_since(self, other: Epoch, earth_orientation: Rotation | None = None) -> Any:
        """Elapsed seconds from `other` to these instants.

        Counted in the scale of this epoch when it is uniform, else (UTC, UT1) in TAI; leap
        seconds count as any second. Between TT and TDB clocks are taken at the geocentre: use
        `to` with a place first where 2 microseconds matter.

        Parameters
        ----------
        other : Epoch
            Of any scale and a shape that broadcasts.
        earth_orientation : EarthOrientation, optional
            For epochs in UT1 only, to reach TAI; the bundled series when not given.

        Returns
        -------
        float or array
            The exact difference, rounded once.

        Examples
        --------
        >>> after = Epoch.parse("2017-01-01T00:00:00")
        >>> after.seconds_since(Epoch.parse("2016-12-31T23:59:59"))
        2.0
        """
        if not isinstance(other, Epoch):
            raise InputError("other", other, "an Epoch")
        common = self.scale if self.scale in UNIFORM else "tai"
        a = self.to(common, earth_orientation=earth_orientation)
        b = other.to(common, earth_orientation=earth_orientation)
        try:
            days = twopart.subtract(twopart.pair(a.jd1, a.jd2), twopart.pair(b.jd1, b.jd2))
        except ValueError:
            allowed = f"one that broadcasts with {self.shape}"
            raise InputError("shape of other", other.shape, allowed) from None
        return twopart.plain(twopart.multiply(days, DAY_PAIR))[0]

    def day_and_fraction(self) -> tuple[Any, Any]:
        """The Julian date (x.5) of 0h of the day, and the fraction of the day, in [0, 1).

        The fraction is rounded to one float64, a grid of at most 1e-16; where that gives 1,
        it is 0 of the next day.
        """
        day, fraction = twopart.day_and_fraction(twopart.pair(self.jd1, self.jd2))
        full = fraction[0] >= 1.0
        return twopart.plain((day + full, fraction[0] - full))

    def isoformat(self, digits: int = 12) -> Any:
        """Calendar text ``YYYY-MM-DDThh:mm:ss.fraction``, rounded to `digits` decimals.

        Parameters
        ----------
        digits : int, optional
            Decimals of the second, 0 to 21; 12 is picoseconds.

        Returns
        -------
        str or array of str
        """
        if not isinstance(digits, int) or not 0 <= digits <= 21:
            raise InputError("digits", digits, "whole numbers 0 to 21")
        if not self.shape:
            return format_iso(self.jd1, self.jd2, self.scale, digits)
        parts = zip(self.jd1.flat, self.jd2.flat, strict=True)
        texts = [format_iso(float(a), float(b), self.scale, digits) for a, b in parts]
        return np.array(texts, dtype=np.str_).reshape(self.shape)

    def astropy(self) -> Time:
        """The same instants as an `astropy.time.Time` (to its own rounding, 5 to 10 ps).

        GPS and Galileo system time, which astropy does not have as scales, become TAI.
        """
        # Imported when asked for: it takes longer to load than all the rest.
        from astropy.time import Time

        told = self.to("tai") if self.scale in ("gps", "gst") else self
        return Time(told.jd1, told.jd2, format="jd", scale=told.scale)

    def __len__(self) -> int:
        if not self.shape:
            raise TypeError("one instant has no length")
        return self.shape[0]

    def __bool__(self) -> bool:
        return True

    def __getitem__(self, item: Any) -> Epoch:
        if not self.shape:
            raise TypeError("one instant cannot be indexed")
        return Epoch(self.jd1[item], self.jd2[item], self.scale)

    def __iter__(self) -> Iterator[Epoch]:
        if not self.shape:
            raise TypeError("one instant cannot be iterated over")
        return (self[i] for i in range(len(self)))

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Epoch):
            return NotImplemented
        return (
            self.scale == other.scale
            and np.array_equal(self.jd1, other.jd1)
            and np.array_equal(self.jd2, other.jd2)
        )

    def __hash__(self) -> int:
        parts = (np.asarray(part).tobytes() for part in (self.jd1, self.jd2))
        return hash((self.scale, self.shape, *parts))

    def __reduce__(self) -> tuple[Any, ...]:
        return type(self), (self.jd1, self.jd2, self.scale)

    def __str__(self) -> str:
        name = self.scale.upper()
        if not self.shape:
            return f"{self.isoformat()} {name}"
        count = " x ".join(map(str, self.shape))
        if not np.size(self.jd1):
            return f"{count} instants in {name}"
        first = format_iso(float(self.jd1.flat[0]), float(self.jd2.flat[0]), self.scale, 12)
        last = format_iso(float(self.jd1.flat[-1]), float(self.jd2.flat[-1]), self.scale, 12)
        return f"{count} instants from {first} to {last} {name}"

    def __repr__(self) -> str:
        if not self.shape:
            return f"Epoch.parse({self.isoformat()!r}, {self.scale!r})"
        return f"<Epoch: {self}>"


def _check(name: str, jd: Any, scale: str) -> None:
    wrong = ~((jd >= _FIRST_JD) & (jd < _END_JD))
    if np.any(wrong):
        raise InputError(name, float(np.asarray(jd)[wrong].flat[0]), f"finite {_YEARS}")
