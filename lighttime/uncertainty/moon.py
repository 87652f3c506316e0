"""Parts of the error budget: the Moon's orbit, its orientation, its tide, the reflector."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from lighttime.answer import RoundTrip
from lighttime.moon.reflector import Reflector
from lighttime.moon.tide import permanent_lunar_tide
from lighttime.sigmas import ephemeris_sigmas
from lighttime.uncertainty.case import Case, Contribution
from lighttime.vectors import Array, cross, unit

__all__ = ["moon", "orbit_axes"]

PLACE = tuple(f"reflector_{axis}_m" for axis in "xyz")


def moon(case: Case) -> Iterator[Contribution]:
    """All of them; none if there is no reflector."""
    reflector = case.answer.query.reflector
    if isinstance(reflector, Reflector):
        yield _place(case, reflector)
        yield from _ephemeris(case, reflector)
        yield from _tide(case, reflector)


def _place(case: Case, reflector: Reflector) -> Contribution:
    sizes = case.sigmas
    if reflector.sigma_m is not None:
        sigmas, source = reflector.sigma_m, "Reflector.sigma_m"
    else:
        same = reflector.axes_note(case.answer.model.ephemeris.name) is None
        name = "reflector_m" if same else "reflector_axes_m"
        sigmas, source = (getattr(sizes, name),) * 3, sizes.source(name)
    return Contribution("reflector", "geometry", case.rows(PLACE, sigmas), source)


def _ephemeris(case: Case, reflector: Reflector) -> Iterator[Contribution]:
    """The Moon by its radius, ahead in its orbit and across it; its orientation by its axes."""
    answer = case.answer
    sigma = ephemeris_sigmas(answer.model.ephemeris.name, case.sigmas)
    if case.whole([f"moon_{axis}_m" for axis in "xyz"], "moon_orbit"):
        by_moon = case.three("moon_{}_m")
        sizes = (sigma.radial_m, sigma.along_m, sigma.across_m)
        axes = zip(sizes, orbit_axes(answer), strict=True)
        rows = np.stack([size * np.sum(by_moon * axis, axis=0) for size, axis in axes])
        yield Contribution("moon_orbit", "geometry", rows, sigma.orbit_source)
    angles = [f"libration_{angle}_rad" for angle in ("phi", "theta", "psi")]
    if case.whole(angles, "libration"):
        # turned about an axis e, the reflector goes from r to r + e x r
        moved = np.stack([np.cross(axis, reflector.xyz_m) for axis in np.eye(3)])
        rows = sigma.libration_rad * moved @ case.three("reflector_{}_m")
        yield Contribution("libration", "geometry", rows, sigma.libration_source)


def orbit_axes(answer: RoundTrip) -> tuple[Array, Array, Array]:
    """Unit vectors from the Earth to the Moon, ahead in the orbit and across it, (3, n)."""
    tdb = answer.query.when.to("tdb")
    geocentric = answer.model.ephemeris.moon_geocentric
    position, velocity = geocentric(np.ravel(tdb.jd1), np.ravel(tdb.jd2))
    radial, across = unit(position), unit(cross(position, velocity))
    return radial, cross(across, radial), across


def _tide(case: Case, reflector: Reflector) -> Iterator[Contribution]:
    """Love numbers; coordinates come from a fit with the same ones.

    A coordinate that was found with a Love number too large is too small by what the number
    adds to the permanent tide: only the tide that varies is uncertain with it.
    """
    if not case.has("lunar_tide"):
        return
    gm, sizes = case.answer.model.ephemeris.gm, case.sigmas
    masses = gm("moon"), gm("earth"), gm("sun")
    rows = []
    for name, h2, l2 in (("h2_moon", 1.0, 0.0), ("l2_moon", 0.0, 1.0)):
        row = case.slope(name)
        if name in case.covered:
            continue
        if not reflector.contains_permanent_tide:
            permanent = permanent_lunar_tide(reflector.xyz_m, *masses, h2=h2, l2=l2)
            row = row - permanent @ case.three("reflector_{}_m")
        rows.append(getattr(sizes, name) * row)
    if rows:
        source = sizes.source("h2_moon")
        yield Contribution("lunar_tide", "lunar_tide", np.stack(rows), source)
