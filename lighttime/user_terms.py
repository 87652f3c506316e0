"""Delay terms of one's own: for tests of gravity, of an atmosphere, of an instrument.

A term is a function of the two events of a leg. It joins the terms of a model: it moves the
events as the built-in ones do, has its place among `terms`, `partials` and the error budget,
and can be left out by its name.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from lighttime.constants import DAY
from lighttime.ephemeris.bodies import BODIES
from lighttime.ephemeris.frame import EarthFrame
from lighttime.errors import InputError, UnknownNameError
from lighttime.path.delays import elevation
from lighttime.terms import TERMS
from lighttime.timescales import Epoch
from lighttime.vectors import Array, norm

__all__ = ["DelayTerm", "Ray"]

LONGEST_S = 1.0
"""A delay above this is taken for a mistake."""


@dataclass(frozen=True, eq=False)
class Ray:
    """One leg, as a delay term sees it. Vectors are (3, n), components first, ICRS axes.

    Attributes
    ----------
    upward : bool
        True from the station to the reflector.
    """

    _frame: EarthFrame
    _near: Any
    _far: Any
    upward: bool

    # -- when ----------------------------------------------------------------------------------

    @property
    def near_epoch(self) -> Epoch:
        """TDB at the station's event, shape (n,)."""
        return self._epoch(self._near.seconds)

    @property
    def far_epoch(self) -> Epoch:
        """TDB at the reflector's event, shape (n,)."""
        return self._epoch(self._far.seconds)

    def _epoch(self, seconds: Array) -> Epoch:
        return Epoch(self._frame.tdb1, self._frame.tdb2 + seconds / DAY, "tdb")

    @property
    def seconds(self) -> Array:
        """Time from the earlier to the later event, TDB seconds, shape (n,)."""
        flight: Array = self._far.seconds - self._near.seconds
        return flight if self.upward else -flight

    # -- where ---------------------------------------------------------------------------------

    @property
    def near_m(self) -> Array:
        """BCRS position of the station at its event, to 30 micrometres, m."""
        position: Array = self._frame.origin[0] + self._near.position
        return position

    @property
    def far_m(self) -> Array:
        """BCRS position of the reflector at its event, to 30 micrometres, m."""
        position: Array = self._frame.origin[0] + self._far.position
        return position

    @property
    def near_velocity(self) -> Array:
        """BCRS velocity of the station, m/s."""
        velocity: Array = self._near.velocity
        return velocity

    @property
    def far_velocity(self) -> Array:
        """BCRS velocity of the reflector, m/s."""
        velocity: Array = self._far.velocity
        return velocity

    @cached_property
    def separation_m(self) -> Array:
        """From the station to the reflector, to all digits, m."""
        vector: Array = self._far.position - self._near.position
        return vector

    @property
    def distance_m(self) -> Array:
        """Length of the leg, shape (n,)."""
        return norm(self.separation_m)

    @property
    def direction(self) -> Array:
        """Unit vector along which the light flies."""
        outward = self.separation_m / self.distance_m
        return outward if self.upward else -outward

    @property
    def elevation_rad(self) -> Array | None:
        """Elevation of the ray in the rest frame of the station, shape (n,); None without one."""
        return elevation(self._near, self._far, self.upward)

    def body(self, name: str) -> tuple[Array, Array]:
        """BCRS position (m) and velocity (m/s) of a body when the light is at the station.

        Parameters
        ----------
        name : str
            "sun", "earth", "moon" or a planet.
        """
        if name not in BODIES:
            raise UnknownNameError("body", name, BODIES)
        ephemeris, frame = self._frame.ephemeris, self._frame
        return ephemeris.barycentric_body(name, frame.tdb1, frame.tdb2, self._near.seconds)


@dataclass(frozen=True)
class DelayTerm:
    """A delay of one's own, the same function on both legs.

    Parameters
    ----------
    name : str
        Of the term: a Python name that no built-in term has.
    delay : callable
        Called as ``delay(ray, **parameters)`` with a `Ray`; gives the delay of that leg in
        seconds, shape (n,) or a scalar. A function of a module, if models are to be pickled.
    parameters : mapping of str to float
        Its parameters and their values. Each is differentiated by as ``"name.parameter"``.
    sigmas : mapping of str to float
        One sigma of parameters, for the error budget; those left out count as exact.

    Raises
    ------
    InputError
        For a name that cannot be used, or a number that is not finite.

    Notes
    -----
    The events move with the delay, and the delay is taken where they are. Derivatives by
    built-in parameters, however, take the function as constant: for a delay of d seconds they
    are off by its change with the position of the ends, some d/1.3 s of themselves.

    Examples
    --------
    A shift of the light along the velocity of the Earth:

    >>> import lighttime as lt
    >>> from lighttime.vectors import dot
    >>> def drift(ray, a):
    ...     return a * dot(ray.direction, ray.body("earth")[1]) / 299792458.0
    >>> term = lt.DelayTerm("drift", drift, {"a": 1e-9})
    >>> model = lt.Model(delays=[term])
    >>> hilltop = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
    >>> answer = model.round_trip("2020-03-01T19:00:00", hilltop, lt.reflector("Apollo 15"))
    >>> answer.terms["drift"] == 0.0, abs(answer.partials(["drift.a"])["drift.a"]) < 1e-7
    (False, True)
    """

    name: str
    delay: Callable[..., Any]
    parameters: Mapping[str, float] | tuple[tuple[str, float], ...] = ()
    sigmas: Mapping[str, float] | tuple[tuple[str, float], ...] = ()

    def __post_init__(self) -> None:
        taken = (*TERMS, *BODIES)
        if not self.name.isidentifier() or self.name in taken:
            raise InputError("name of a delay term", self.name, "a Python name not in use yet")
        if not callable(self.delay):
            raise InputError(f"delay of {self.name}", self.delay, "a function of a Ray")
        for field in ("parameters", "sigmas"):
            pairs = tuple((str(k), float(v)) for k, v in dict(getattr(self, field)).items())
            for key, value in pairs:
                if not np.isfinite(value) or (field == "sigmas" and value < 0.0):
                    allowed = "a finite number" + (", 0 or more" if field == "sigmas" else "")
                    raise InputError(f"{field} of {self.name}: {key}", value, allowed)
            object.__setattr__(self, field, pairs)
        for key in dict(self.sigmas):
            if key not in self.values:
                raise UnknownNameError(f"sigmas of {self.name}", key, tuple(self.values))

    @property
    def values(self) -> dict[str, float]:
        """The parameters as a dict."""
        return dict(self.parameters)

    @property
    def partial_names(self) -> tuple[str, ...]:
        """What the derivatives by its parameters are called."""
        return tuple(f"{self.name}.{key}" for key in self.values)

    def seconds(self, ray: Ray, **changed: float) -> Array:
        """The delay of a leg, checked; with some parameters changed.

        Raises
        ------
        InputError
            If the function gives anything but finite numbers below 1 s in the shape of the
            epochs.
        """
        value = self.delay(ray, **{**self.values, **changed})
        shape = np.shape(ray.distance_m)
        try:
            late = np.broadcast_to(np.asarray(value, dtype=float), shape)
        except (TypeError, ValueError):
            what = f"an array of shape {np.shape(value)}"
            raise InputError(f"delay of {self.name}", what, f"numbers of shape {shape}") from None
        bad = ~(np.abs(late) < LONGEST_S)
        if bad.any():
            raise InputError(
                f"delay of {self.name}", float(late[bad][0]), f"below {LONGEST_S:g} s, and finite"
            )
        return late

    def slope(self, ray: Ray, parameter: str) -> tuple[Array, str]:
        """Derivative of the delay of a leg by a parameter, and a word on how it was found.

        Central differences with two steps, the second half the first; what is left of their
        difference in Richardson's combination is of fourth order. Steps begin with a thousandth
        of the value (or 1) and shrink until the two agree.

        Raises
        ------
        InputError
            If no step agrees with its half to a millionth.
        """
        value = self.values[parameter]
        step = 1.0e-3 * (abs(value) or 1.0)
        for _ in range(8):
            whole, half = (self._difference(ray, parameter, h) for h in (step, 0.5 * step))
            size = float(np.max(np.abs(half), initial=0.0))
            apart = float(np.max(np.abs(whole - half), initial=0.0))
            if apart <= 1.0e-6 * size:
                share = apart / size if size else 0.0
                note = f"central differences, steps {step:g} and half of it agree to {share:.0e}"
                return (4.0 * half - whole) / 3.0, note
            step *= 0.1
        raise InputError(
            f"delay of {self.name}",
            f"not smooth in {parameter} (differences disagree by {apart / size:.0e})",
            "a function that has a derivative",
        )

    def _difference(self, ray: Ray, parameter: str, step: float) -> Array:
        value = self.values[parameter]
        ahead, behind = (self.seconds(ray, **{parameter: value + s}) for s in (step, -step))
        return (ahead - behind) / ((value + step) - (value - step))


def delay_terms(given: Iterable[DelayTerm]) -> tuple[DelayTerm, ...]:
    """Check the delay terms of a model: all are such, no name twice."""
    terms = tuple(given)
    for term in terms:
        if not isinstance(term, DelayTerm):
            raise InputError("delays", term, "DelayTerm objects")
    names = [term.name for term in terms]
    for name in names:
        if names.count(name) > 1:
            raise InputError("delays", name, "a name that only one of the terms has")
    return terms
