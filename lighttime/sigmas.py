"""How well everything that goes into a range is known: one sigma of each, with its source."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from typing import Any, NamedTuple

import numpy as np

from lighttime.data import table
from lighttime.errors import InputError, UnknownNameError
from lighttime.vectors import Array

__all__ = ["Covariance", "EphemerisSigmas", "Uncertainties", "ephemeris_sigmas"]

PRACTICE = "common practice, no source"


def _sigma(value: float | tuple[float, ...], source: str) -> Any:
    return field(default=value, metadata={"source": source})


@dataclass(frozen=True, eq=False)
class Covariance:
    """A covariance of some parameters, as a fit gives it.

    Parameters
    ----------
    names : tuple of str
        Parameters as in `RoundTrip.partials`.
    matrix : array_like, shape (k, k)
        In the units of the names, squared; symmetric, no negative eigenvalue.

    Raises
    ------
    InputError
        If the matrix is no covariance.
    """

    names: tuple[str, ...]
    matrix: Array

    def __post_init__(self) -> None:
        names = tuple(self.names)
        if len(set(names)) != len(names):
            raise InputError("names of a covariance", names, "each once")
        matrix = np.array(self.matrix, dtype=float)
        if matrix.shape != (len(names), len(names)) or not np.all(np.isfinite(matrix)):
            allowed = f"finite numbers of shape ({len(names)}, {len(names)})"
            raise InputError("covariance", f"an array of shape {matrix.shape}", allowed)
        scale = np.sqrt(np.abs(np.diag(matrix)))
        unit = np.where(scale > 0.0, scale, 1.0)
        correlation = matrix / np.outer(unit, unit)
        if not np.allclose(correlation, correlation.T, rtol=0.0, atol=1e-8):
            raise InputError("covariance", "a matrix that is not symmetric", "a symmetric one")
        lowest = float(np.min(np.linalg.eigvalsh(correlation), initial=0.0))
        if lowest < -1e-8:
            raise InputError(
                "covariance", f"a matrix with a correlation's eigenvalue {lowest:.2g}", "0 or more"
            )
        matrix.flags.writeable = False
        object.__setattr__(self, "names", names)
        object.__setattr__(self, "matrix", matrix)

    @property
    def root(self) -> Array:
        """A matrix R with R R^T the covariance: its columns are independent changes."""
        scale = np.sqrt(np.diag(self.matrix))
        unit = np.where(scale > 0.0, scale, 1.0)
        values, vectors = np.linalg.eigh(self.matrix / np.outer(unit, unit))
        root: Array = unit[:, None] * vectors * np.sqrt(np.maximum(values, 0.0))
        return root

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Covariance):
            return NotImplemented
        return self.names == other.names and np.array_equal(self.matrix, other.matrix)

    def __hash__(self) -> int:
        return hash((self.names, self.matrix.tobytes()))


@dataclass(frozen=True)
class Uncertainties:
    """One sigma of what a range is computed from; every one can be given.

    Those of the pole and of UT1 come with their series; `Station.sigma_m` and
    `Reflector.sigma_m`, where given, go before the values here.

    Parameters
    ----------
    station_m : float
        Each coordinate of a station that gives no `sigma_m`.
    station_velocity_m_per_yr : float
        Each component.
    station_motion_enu_m : 3 floats
        What the ground does beyond the model: seasons, air pressure, ground water.
    reflector_m : float
        Each coordinate of a reflector that gives no `sigma_m`, in the axes of the ephemeris used.
    reflector_axes_m : float
        Each coordinate, where the axes are those of another ephemeris.
    moon_radial_m, moon_along_m, moon_across_m : float, optional
        Geocentric Moon: by its radius, ahead in its orbit, across it. None: the ephemeris'.
    libration_rad : float, optional
        Orientation of the Moon about each principal axis. None: the ephemeris'.
    subdaily_ut1_s, subdaily_pole_arcsec : float
        The models of the daily and half-daily terms, and interpolation between days.
    h2_earth, l2_earth, h2_moon, l2_moon : float
    pole_tide, ocean_loading, ocean_pole_tide, atmosphere_loading, residual_motion : float
        As fractions of the displacement.
    pressure_hpa, temperature_k, relative_humidity : float
    zenith_delay_m : float
        The formula for the zenith delay, given the weather.
    mapping_at_10_deg_m : float
        The mapping function, at 10 degrees of elevation; elsewhere as 1/(sin e tan^2 e).
    gradient_m : float
        Air that is not the same all around: the delay changes by this times m(e)/tan e.
    gamma : float
    tdb_rate : float
        Rate of TDB - TT against the station's clock.
    arithmetic_s : float
    epoch_s : float
        The tagged epoch: 0 for the range at an epoch that is given.
    clock_rate : float
        The station's timer: 0 for the range itself.
    covariance : Covariance, optional
        Of some parameters, instead of what is said of them elsewhere.

    Raises
    ------
    InputError
        For a number that is negative or not finite.
    """

    station_m: float = _sigma(0.005, PRACTICE)
    station_velocity_m_per_yr: float = _sigma(0.0003, PRACTICE)
    station_motion_enu_m: tuple[float, float, float] = _sigma((0.0015, 0.0015, 0.004), PRACTICE)
    reflector_m: float = _sigma(0.05, PRACTICE)
    reflector_axes_m: float = _sigma(
        0.5, "size of the differences between principal axes of DE421 and DE430, from memory"
    )
    moon_radial_m: float | None = _sigma(None, "")  # type: ignore[arg-type]
    moon_along_m: float | None = _sigma(None, "")  # type: ignore[arg-type]
    moon_across_m: float | None = _sigma(None, "")  # type: ignore[arg-type]
    libration_rad: float | None = _sigma(None, "")  # type: ignore[arg-type]
    subdaily_ut1_s: float = _sigma(3.0e-6, PRACTICE)
    subdaily_pole_arcsec: float = _sigma(3.0e-5, PRACTICE)
    h2_earth: float = _sigma(0.001, "spread of determinations by VLBI, from memory")
    l2_earth: float = _sigma(0.0003, "spread of determinations by VLBI, from memory")
    h2_moon: float = _sigma(0.0064, "Williams, Boggs & Folkner 2013, from memory")
    l2_moon: float = _sigma(0.002, PRACTICE)
    pole_tide: float = _sigma(0.05, PRACTICE)
    ocean_loading: float = _sigma(0.1, "spread of ocean tide models, common practice")
    ocean_pole_tide: float = _sigma(0.2, PRACTICE)
    atmosphere_loading: float = _sigma(0.2, PRACTICE)
    residual_motion: float = _sigma(0.3, PRACTICE)
    pressure_hpa: float = _sigma(0.3, PRACTICE)
    temperature_k: float = _sigma(1.0, PRACTICE)
    relative_humidity: float = _sigma(0.05, PRACTICE)
    zenith_delay_m: float = _sigma(0.0007, "Mendes & Pavlis 2004: below a millimetre, from memory")
    mapping_at_10_deg_m: float = _sigma(0.007, "Mendes et al. 2002: 7 mm at 10 deg, from memory")
    gradient_m: float = _sigma(
        0.0005, "Hulley & Pavlis 2007: some centimetres at 10 deg, from memory"
    )
    gamma: float = _sigma(2.3e-5, "Bertotti, Iess & Tortora 2003, from memory")
    tdb_rate: float = _sigma(2.0e-15, "some 10 ns within a year in TDB - TT, from memory")
    arithmetic_s: float = _sigma(0.7e-15, "measured against extended precision")
    epoch_s: float = _sigma(0.0, "the epoch is taken as it is given")
    clock_rate: float = _sigma(0.0, "the range itself, not its measurement")
    covariance: Covariance | None = None

    def __post_init__(self) -> None:
        for item in fields(self):
            value = getattr(self, item.name)
            if item.name == "covariance" or value is None:
                continue
            size = (3,) if item.name == "station_motion_enu_m" else ()
            try:
                number = np.asarray(value, dtype=float)
            except (TypeError, ValueError):
                number = np.full(1, np.nan)
            if number.shape != size or not np.all((number >= 0.0) & np.isfinite(number)):
                what = "three numbers, 0 or more" if size else "a number, 0 or more"
                raise InputError(item.name, value, what)
            put = tuple(number.tolist()) if size else float(number)
            object.__setattr__(self, item.name, put)
        if self.covariance is not None and not isinstance(self.covariance, Covariance):
            raise InputError("covariance", self.covariance, "a Covariance, or None")

    def source(self, name: str) -> str:
        """Where one of the values comes from: "supplied" if it is not the default.

        Examples
        --------
        >>> Uncertainties().source("pressure_hpa")
        'common practice, no source'
        >>> Uncertainties(pressure_hpa=0.1).source("pressure_hpa")
        'supplied'
        """
        for item in fields(self):
            if item.name == name:
                default = getattr(self, name) == item.default
                return str(item.metadata["source"]) if default else "supplied"
        raise UnknownNameError("name", name, [item.name for item in fields(self)])


class EphemerisSigmas(NamedTuple):
    """One sigma of what an ephemeris says of the Moon, and where that is said."""

    radial_m: float
    along_m: float
    across_m: float
    libration_rad: float
    orbit_source: str
    libration_source: str


def ephemeris_sigmas(name: str, given: Uncertainties) -> EphemerisSigmas:
    """What is known of an ephemeris by its name, and what the user gives before it.

    For one that is not in the table, the largest figures of the table are taken, and the source
    says so.
    """
    rows: Mapping[str, Any] = table("ephemeris_sigmas")
    names = [str(n) for n in rows["name"]]
    known = next((k for k, n in enumerate(names) if name.upper().startswith(n)), None)
    source = "order of magnitude, from memory"
    if known is None:
        known, source = 0, f"no figures for {name} at hand: those of {names[0]}, {source}"
    own = {
        "radial_m": given.moon_radial_m,
        "along_m": given.moon_along_m,
        "across_m": given.moon_across_m,
        "libration_rad": given.libration_rad,
    }
    sigmas = {key: float(rows[key][known]) if v is None else v for key, v in own.items()}
    *orbit, libration = (value is not None for value in own.values())
    partly = f"partly supplied, else {source}" if any(orbit) else source
    return EphemerisSigmas(
        **sigmas,
        orbit_source="supplied" if all(orbit) else partly,
        libration_source="supplied" if libration else source,
    )
