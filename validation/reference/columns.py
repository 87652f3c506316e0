"""What the columns of the reference tables are: name, unit, description."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

BODIES = (
    "sun", "earth", "moon", "mercury", "venus", "mars", "jupiter", "saturn", "uranus", "neptune",
)  # fmt: skip
DISPLACEMENTS = (
    "solid_earth_tide",
    "pole_tide",
    "ocean_loading",
    "ocean_pole_tide",
    "atmosphere_loading",
    "residual_motion",
)


@dataclass(frozen=True)
class Column:
    """One column; vectors are three of them, x, y and z."""

    name: str
    datatype: str
    unit: str
    description: str


def _inputs() -> Iterator[Column]:
    yield Column("case", "int64", "", "number of the case")
    yield Column("kind", "string", "", "any, seam, leap, drift or midnight: see the README")
    yield Column("tag", "string", "", "which event the epoch is: transmit (t1), bounce, receive")
    yield Column("epoch_scale", "string", "", "utc or tdb")
    yield Column("epoch_jd1", "float64", "d", "the epoch is exactly jd1 + jd2, a Julian date;")
    yield Column("epoch_jd2", "float64", "d", "in UTC a day with a leap second is 86401 s long")
    yield Column("epoch_text", "string", "", "the same for people, to 1e-18 s")
    yield Column("station", "string", "", "its name; Harbour has loading: harbour.toml")
    for axis in "xyz":
        yield Column(f"station_{axis}", "float64", "m", f"{axis}, ITRF, tide free, at its epoch")
    for axis in "xyz":
        yield Column(f"station_v{axis}", "float64", "m/yr", "its velocity, per year of 365.25 d")
    yield Column("station_epoch", "float64", "yr", "2000.0 is J2000.0, TT")
    yield Column("array", "string", "", "the reflector array")
    for axis in "xyz":
        yield Column(f"array_{axis}", "float64", "m", f"{axis}, principal axes, TDB-compatible")
    yield Column("wavelength", "float64", "nm", "in vacuum")
    yield Column("pressure", "float64", "hPa", "at the station; empty: no troposphere")
    yield Column("temperature", "float64", "K", "likewise")
    yield Column("humidity", "float64", "", "relative, 0 to 1")
    yield Column("vapour_pressure", "float64", "hPa", "of water, from these (CIPM equation)")


def _nodes() -> Iterator[Column]:
    yield Column("mjd", "int64", "d", "0h UTC of this day")
    yield Column("ut1_minus_tai", "float64", "s", "UT1 - TAI, zonal tides included")
    yield Column("xp", "float64", "arcsec", "pole")
    yield Column("yp", "float64", "arcsec", "pole")
    yield Column("dx", "float64", "mas", "celestial pole offset dX, IAU 2006/2000A")
    yield Column("dy", "float64", "mas", "dY")


def _number(name: str, unit: str, description: str) -> Column:
    return Column(name, "string", unit, description)


def _vector(name: str, unit: str, description: str) -> Iterator[Column]:
    for axis in "xyz":
        yield _number(f"{name}_{axis}", unit, f"{description}, {axis}")


def _instant(event: str, scale: str, description: str) -> Iterator[Column]:
    yield _number(f"{event}_{scale}_day", "d", f"{description}: Julian date of 0h of its day")
    yield _number(f"{event}_{scale}_s", "s", f"{description}: seconds since then")


def _station(event: str, told: str) -> Iterator[Column]:
    yield from _instant(event, "tai", f"{told}, TAI")
    yield from _instant(event, "tt", f"{told}, TT of the station's clock")
    yield from _instant(event, "ut1", f"{told}, UT1 with sub-daily terms")
    yield from _instant(event, "tdb", f"{told}, TDB")
    yield _number(f"{event}_tdb_minus_tt", "s", "TDB - TT at the station")
    yield _number(f"{event}_series_ut1_minus_tai", "s", "interpolated, no sub-daily terms")
    yield _number(f"{event}_series_xp", "rad", "interpolated, no sub-daily terms")
    yield _number(f"{event}_series_yp", "rad", "interpolated, no sub-daily terms")
    yield _number(f"{event}_series_dx", "rad", "interpolated dX")
    yield _number(f"{event}_series_dy", "rad", "interpolated dY")
    yield _number(f"{event}_xp", "rad", "pole with sub-daily terms")
    yield _number(f"{event}_yp", "rad", "pole with sub-daily terms")
    yield _number(f"{event}_cip_x", "rad", "X of the celestial pole, dX included")
    yield _number(f"{event}_cip_y", "rad", "Y, dY included")
    yield _number(f"{event}_s", "rad", "CIO locator s")
    yield _number(f"{event}_era", "rad", "Earth rotation angle")
    for name in DISPLACEMENTS:
        told = name.replace("_", " ")
        yield from _vector(f"{event}_{name}", "m", f"displacement, ITRF: {told}")
    yield from _vector(f"{event}_station_itrf", "m", "station, ITRF, displaced")
    yield from _vector(f"{event}_station_gcrs", "m", "station, GCRS")
    yield from _vector(f"{event}_station_bcrs", "m", "station, BCRS")
    yield from _vector(f"{event}_station_velocity", "m/s", "station, BCRS")
    yield from _vector(f"{event}_earth", "m", "Earth, BCRS")
    yield from _vector(f"{event}_earth_velocity", "m/s", "Earth, BCRS")
    yield from _vector(f"{event}_sun", "m", "Sun, BCRS")


def _bounce() -> Iterator[Column]:
    yield from _instant("t2", "tdb", "bounce, TDB")
    yield from _vector("t2_earth", "m", "Earth, BCRS")
    yield from _vector("t2_moon", "m", "Moon, BCRS")
    yield from _vector("t2_moon_velocity", "m/s", "Moon, BCRS")
    yield _number("t2_phi", "rad", "libration angle: node")
    yield _number("t2_theta", "rad", "libration angle: inclination")
    yield _number("t2_psi", "rad", "libration angle: rotation, not reduced")
    yield from _vector("t2_lunar_tide", "m", "displacement, principal axes")
    yield from _vector("t2_reflector_principal", "m", "reflector, principal axes, displaced")
    yield from _vector("t2_reflector_icrs", "m", "the same along the axes of the ICRS")
    yield from _vector("t2_reflector_bcrs", "m", "reflector, BCRS")


def _leg(name: str) -> Iterator[Column]:
    yield _number(f"{name}_geometry", "s", "distance over c")
    for body in BODIES:
        more = ", its oblateness included" if body == "earth" else ""
        yield _number(f"{name}_{body}_gravity", "s", f"delay by the gravity of {body}{more}")
    yield _number(f"{name}_earth_oblateness", "s", "the part of it that is due to J2")
    yield _number(f"{name}_elevation", "deg", "of the aberrated ray, no refraction")
    yield _number(f"{name}_troposphere", "s", "delay by the air; 0 without weather")
    yield _number(name, "s", "the whole leg, TDB")


def _rungs() -> Iterator[Column]:
    yield Column("case", "int64", "", "number of the case, as in cases.ecsv")
    yield from _station("t1", "transmission")
    yield from _bounce()
    yield from _station("t3", "reception")
    yield from _leg("uplink")
    yield from _leg("downlink")
    yield _number("clock", "s", "what the change of TDB - TT from t1 to t3 adds")
    yield _number("answer", "s", "the round trip, TT(t3) - TT(t1)")


INPUTS = tuple(_inputs())
NODES = tuple(_nodes())
RUNGS = tuple(_rungs())
