"""Suspects without a choice behind them: free offsets of whatever is measured or fitted."""

from __future__ import annotations

from functools import partial

import numpy as np

from lighttime.constants import EARTH_ROTATION_RATE, MILLIARCSECOND
from lighttime.crosscheck.scene import PS, Effect, Scene
from lighttime.crosscheck.suspects.frame import celestial_pole_moved
from lighttime.crosscheck.suspects.suspect import Suspect
from lighttime.crosscheck.suspects.terms import years_since_2000
from lighttime.crosscheck.suspects.tides import lunar_tide_of
from lighttime.crosscheck.suspects.time import ephemeris_shifted
from lighttime.path.delays import GRAVITY_TERMS
from lighttime.vectors import Array, cross, norm

MM = 1.0e-3
US = 1.0e-6

# -- the measurement -------------------------------------------------------------------------------


def bias(scene: Scene) -> Array:
    """A picosecond on all ranges."""
    return scene.zero + 1.0


def drift(scene: Scene, middle_year: float) -> Array:
    """A picosecond more every year."""
    return years_since_2000(scene.t1) + (2000.0 - middle_year)


def scale(scene: Scene) -> Array:
    """A part in 10^9 of the range."""
    return PS * 1e-9 * scene.seconds[0]


def late_epoch(scene: Scene) -> Array:
    """Epochs a microsecond late: the rate of the range."""
    return scene.moved(
        at1=US * scene.t1.velocity, at2=US * scene.t2.velocity, at3=US * scene.t3.velocity
    )


# -- the Earth -------------------------------------------------------------------------------------


def late_ut1(scene: Scene) -> Array:
    """UT1 a microsecond more."""
    return scene.turned_itrf(scene.zero, scene.zero, scene.zero + EARTH_ROTATION_RATE * US)


def ut1_drift(scene: Scene, middle_year: float) -> Array:
    """UT1 a microsecond more every year."""
    years = years_since_2000(scene.t1) + (2000.0 - middle_year)
    return scene.turned_itrf(scene.zero, scene.zero, EARTH_ROTATION_RATE * US * years)


def pole_offset(scene: Scene, x: float, y: float) -> Array:
    """A milliarcsecond in x_p or y_p."""
    mas = scene.zero + MILLIARCSECOND
    return scene.turned_itrf(x * mas, y * mas, scene.zero)


def celestial_pole_offset(scene: Scene, x: float, y: float) -> Array:
    """A milliarcsecond in X or Y."""
    mas = scene.zero + MILLIARCSECOND
    return celestial_pole_moved(scene, x * mas, y * mas)


# -- the Moon --------------------------------------------------------------------------------------


def libration_offset(scene: Scene, axis: int) -> Array:
    """The Moon turned by a milliarcsecond about a principal axis."""
    turned = MILLIARCSECOND * np.cross(np.eye(3)[axis], scene.reflector.xyz_m)
    return scene.moved(at2=scene.lunar(turned))


def orbit_along(scene: Scene) -> Array:
    """The Moon a millimetre ahead in its orbit."""
    speed = scene.t2.moon_velocity - scene.frame.earth(scene.t2.seconds)[1]
    return scene.moved(at2=MM * speed / norm(speed))


def orbit_across(scene: Scene) -> Array:
    """The Moon a millimetre to the north of its orbit."""
    place = -scene.selenocentric("earth")
    speed = scene.t2.moon_velocity - scene.frame.earth(scene.t2.seconds)[1]
    pole = cross(place, speed)
    return scene.moved(at2=MM * pole / norm(pole))


def orbit_radial(scene: Scene) -> Array:
    """The Moon a millimetre further away."""
    place = -scene.selenocentric("earth")
    return scene.moved(at2=MM * place / norm(place))


def late_ephemeris(scene: Scene) -> Array:
    """The argument of the ephemeris a microsecond late."""
    late = scene.zero + US
    return ephemeris_shifted(scene, late, late, late)


def love_number(scene: Scene, **derivative: float) -> Array:
    """A thousandth in h2 or l2 of the Moon."""
    tide = sum(lunar_tide_of(scene, body, **derivative) for body in ("earth", "sun"))
    return scene.moved(at2=1e-3 * scene.lunar(tide))


def gamma(scene: Scene) -> Array:
    """A thousandth in the parameter gamma."""
    up, down = (
        sum((d for b, d in leg.delays.items() if b in GRAVITY_TERMS), scene.zero)
        for leg in (scene.legs.up, scene.legs.down)
    )
    factor = 1e-3 / (1.0 + scene.model.gamma)
    return scene.delayed(factor * up, factor * down)


# -- the list --------------------------------------------------------------------------------------


def offset(
    name: str,
    says: str,
    look_for: str,
    effect: Effect,
    size: tuple[float, str],
    block: str = "",
) -> Suspect:
    """A free offset, with a plausible size and its unit."""
    plausible, unit = size
    return Suspect(
        name, "offset", says, look_for, effect, unit=unit, plausible=plausible, block=block
    )


def general_offsets(middle_year: float) -> tuple[Suspect, ...]:
    """Free offsets that all ranges share; drifts are counted from a year."""
    series, orbit = "the series of Earth orientation", "the ephemeris"
    return (
        offset(
            "bias", "a constant", "a calibration constant; the reference point", bias, (1e3, "ps")
        ),
        offset(
            "drift", "a drift", "a quantity that is not moved in time",
            partial(drift, middle_year=middle_year), (100.0, "ps/yr"),
        ),
        offset("scale", "a scale", "the unit of length or of time", scale, (10.0, "1e-9")),
        offset(
            "epoch_offset", "offset of the epochs",
            "the clock, or the tagged instant within the pulse", late_epoch, (100.0, "us"),
        ),
        offset(
            "ephemeris_time", "offset of the time of the ephemeris", "TDB-TT, and its constant",
            late_ephemeris, (1e3, "us"),
        ),
        offset("ut1_offset", "offset of UT1", series, late_ut1, (100.0, "us")),
        offset(
            "ut1_drift", "drift of UT1", series, partial(ut1_drift, middle_year=middle_year),
            (10.0, "us/yr"),
        ),
        *(
            offset(
                f"pole_{axis}_offset", f"offset of {axis}_p", series,
                partial(pole_offset, x=x, y=y), (10.0, "mas"), "pole",
            )
            for axis, x, y in (("x", 1.0, 0.0), ("y", 0.0, 1.0))
        ),
        *(
            offset(
                f"celestial_{axis}_offset", f"offset of {axis.upper()} of the celestial pole",
                f"the frame of the ephemeris; d{axis.upper()}",
                partial(celestial_pole_offset, x=x, y=y), (1.0, "mas"), "celestial pole",
            )
            for axis, x, y in (("x", 1.0, 0.0), ("y", 0.0, 1.0))
        ),
        *(
            offset(
                f"libration_{axis}", f"the Moon turned about its {axis} axis",
                "the libration angles and their axes", partial(libration_offset, axis=k),
                (100.0, "mas"), "libration",
            )
            for k, axis in enumerate("xyz")
        ),
        offset(
            "orbit_radial", "the Moon further away", orbit, orbit_radial, (100.0, "mm"), "orbit"
        ),
        offset(
            "orbit_along", "the Moon ahead in its orbit", orbit, orbit_along, (1e3, "mm"), "orbit"
        ),
        offset(
            "orbit_across", "the Moon north of its orbit", orbit, orbit_across, (1e3, "mm"), "orbit"
        ),
        offset(
            "moon_h2", "Love number h2 of the Moon", "h2 of the lunar tide",
            partial(love_number, h2=1.0, l2=0.0), (10.0, "1e-3"),
        ),
        offset(
            "moon_l2", "Shida number l2 of the Moon", "l2 of the lunar tide",
            partial(love_number, h2=0.0, l2=1.0), (10.0, "1e-3"),
        ),
        offset("gamma", "parameter gamma", "gamma of the gravity delay", gamma, (1.0, "1e-3")),
    )  # fmt: skip
