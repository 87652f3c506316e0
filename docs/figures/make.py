"""Every figure of the documentation, as SVG beside this file: ``python docs/figures/make.py``."""

from __future__ import annotations

from typing import Any

import matplotlib.pyplot as plt
import numpy as np
from scene import STATIONS, air, model, one_way_mm, seen
from style import BLUE, FAINT, GREEN, INK, ORANGE, PURPLE, RED, SKY, WIDTH_IN, save

import lighttime as lt
from lighttime.constants import DAY, SPEED_OF_LIGHT
from lighttime.path.troposphere import slant_delay

STATION, EQUATORIAL = STATIONS[:2]
ARRAY = lt.reflector("Apollo 15")
NEW_MOON_JD, LUNATION_DAYS = 2461000.0, 30.0
"""2025-11-20 12h UTC, and from one new moon to the next."""

GROUPS = {
    "gravity": (BLUE, ("sun_gravity", "earth_gravity", "moon_gravity", "planet_gravity")),
    "air": (SKY, ("troposphere",)),
    "Earth": (
        GREEN,
        ("solid_earth_tide", "pole_tide", "ocean_loading", "ocean_pole_tide",
         "atmosphere_loading", "subdaily_rotation", "station_contraction"),
    ),
    "Moon": (ORANGE, ("lunar_tide", "reflector_contraction")),
    "clock": (PURPLE, ("clock",)),
}  # fmt: skip
LEAST_MM = 0.05

COLOURS = {name: colour for colour, names in GROUPS.values() for name in names}


def lunation() -> tuple[Any, dict[str, Any]]:
    """Days from new moon and one-way millimetres, NaN while the Moon is low."""
    days = np.arange(0.0, LUNATION_DAYS, 1.0 / 24.0)
    when = lt.Epoch(NEW_MOON_JD, days, "utc")
    high, answer = seen(EQUATORIAL, when, ARRAY)
    rows = np.isin(when.jd1 + when.jd2, high.jd1 + high.jd2)
    mm = {}
    for name, values in one_way_mm(answer).items():
        mm[name] = np.full(days.size, np.nan)
        mm[name][rows] = values
    return days, mm


def anatomy() -> None:
    """What one range is made of, on a scale of powers of ten."""
    when = "2025-12-02T22:00:00"
    answer = model().round_trip(when, STATION, ARRAY, weather=air(STATION.height_m))
    mm = {name: abs(float(v)) for name, v in one_way_mm(answer).items()}
    names = sorted(mm, key=mm.__getitem__)
    figure, axes = plt.subplots(figsize=(WIDTH_IN, 4.6))
    for row, name in enumerate(names):
        axes.plot([LEAST_MM, mm[name]], [row, row], color=FAINT, linewidth=1.0)
        axes.plot(mm[name], row, "o", color=COLOURS.get(name, INK), markersize=7)
        axes.text(mm[name] * 2.2, row, short(mm[name]), va="center", fontsize=9)
    axes.set(xscale="log", xlim=(LEAST_MM, 1e15), yticks=range(len(names)), yticklabels=names)
    axes.set_xticks([1e0, 1e3, 1e6, 1e11], ["1 mm", "1 m", "1 km", "$10^5$ km"])
    axes.minorticks_off()
    axes.tick_params(axis="y", length=0)
    axes.set_xlabel("one-way, without sign")
    legend(axes)
    save(figure, "anatomy")


def short(mm: float) -> str:
    """A length in a unit that suits it."""
    for size, unit in ((1e6, "km"), (1e3, "m")):
        if mm >= size:
            return f"{mm / size:,.0f} {unit}" if mm >= 100 * size else f"{mm / size:.1f} {unit}"
    return f"{mm:.0f} mm" if mm >= 10.0 else f"{mm:.1f} mm"


def legend(axes: Any) -> None:
    """Names of the groups, in their colours."""
    for row, (group, (colour, _)) in enumerate(GROUPS.items()):
        axes.text(
            0.985, 0.04 + 0.06 * row, group, color=colour, fontweight="bold",
            ha="right", transform=axes.transAxes,
        )  # fmt: skip


def over_a_lunation(days: Any, mm: dict[str, Any]) -> None:
    """All terms but geometry, each on its own scale."""
    names = [name for name in mm if name != "geometry"]
    figure, panels = plt.subplots(len(names), 1, figsize=(WIDTH_IN, 0.82 * len(names)), sharex=True)
    for name, axes in zip(names, panels, strict=True):
        draw(axes, days, mm[name], name)
        axes.set_title(name, pad=2)
        axes.spines["bottom"].set_visible(axes is panels[-1])
        axes.tick_params(axis="x", length=3 if axes is panels[-1] else 0)
    panels[-1].set_xlabel("days from new moon")
    figure.supylabel("mm one-way")
    save(figure, "lunation")


def single_terms(days: Any, mm: dict[str, Any]) -> None:
    """One small figure for each term."""
    for name, values in mm.items():
        if name == "geometry":
            continue
        figure, axes = plt.subplots(figsize=(WIDTH_IN, 1.7))
        draw(axes, days, values, name)
        axes.set(xlabel="days from new moon", ylabel="mm one-way")
        save(figure, f"term-{name}")


def draw(axes: Any, days: Any, values: Any, name: str) -> None:
    """One term; where the Moon is low there is a gap."""
    axes.plot(days, values, color=COLOURS[name], linewidth=1.4)
    axes.set_xlim(0.0, LUNATION_DAYS)
    axes.locator_params(axis="y", nbins=3)
    if np.nanmin(values) < 0.0 < np.nanmax(values):
        axes.axhline(0.0, color=FAINT, linewidth=0.8, zorder=0)


def geometry() -> None:
    """Three events in a frame in which the Earth moves; not to scale."""
    figure, axes = plt.subplots(figsize=(WIDTH_IN, 2.9))
    path = np.linspace(-0.35, 3.35, 50)
    centres = [(x, 0.1 * x * x / 4.0) for x in (0.0, 1.5, 3.0)]
    axes.plot(path, 0.1 * path**2 / 4.0, color=FAINT, linewidth=1.0)
    angles = np.deg2rad([118.0, 98.0, 78.0])
    stations = []
    for (x, y), angle, label in zip(centres, angles, ("1", "", "3"), strict=True):
        axes.add_patch(plt.Circle((x, y), 0.34, color=BLUE, alpha=0.75 if label else 0.25))
        stations.append((x + 0.34 * np.cos(angle), y + 0.34 * np.sin(angle)))
        if label:
            axes.plot(*stations[-1], "o", color=RED, markersize=5)
            axes.text(x, y - 0.62, f"Earth at $t_{label}$", ha="center")
    bounce = (1.62, 2.42)
    axes.add_patch(plt.Circle((1.66, 2.6), 0.2, color=FAINT))
    axes.plot(*bounce, "o", color=ORANGE, markersize=5)
    axes.text(1.95, 2.6, "Moon at $t_2$", va="center")
    for start, end, words, side in (
        (stations[0], bounce, "up", -0.16),
        (bounce, stations[2], "down", 0.16),
    ):
        axes.annotate("", end, start, arrowprops={"arrowstyle": "-|>", "color": GREEN, "lw": 1.6})
        middle = (0.5 * (start[0] + end[0]) + side, 0.5 * (start[1] + end[1]))
        axes.text(*middle, words, color=GREEN, ha="right" if side < 0 else "left")
    axes.annotate("", (3.75, 0.33), (3.45, 0.27), arrowprops={"arrowstyle": "->", "color": INK})
    axes.text(3.62, 0.5, "30 km/s", ha="center", fontsize=9)
    axes.set(xlim=(-0.6, 4.1), ylim=(-0.75, 2.9), aspect="equal")
    axes.axis("off")
    save(figure, "geometry")


def troposphere() -> None:
    """Slant delay by elevation, for the limits of wavelength and the usual one between."""
    elevation = np.linspace(10.0, 90.0, 81)
    figure, axes = plt.subplots(figsize=(WIDTH_IN, 2.6))
    for row, (wavelength, colour) in enumerate(((1064.0, RED), (532.0, GREEN), (355.0, PURPLE))):
        axes.text(30.0, 6.6 + 1.2 * row, f"{wavelength:.0f} nm", color=colour, fontweight="bold")
        metres = slant_delay(
            np.deg2rad(elevation), STATION.latitude_rad, STATION.height_m,
            air(STATION.height_m), wavelength,
        )  # fmt: skip
        axes.plot(elevation, metres, color=colour)
    axes.set(xlabel="elevation, degrees", ylabel="metres one-way", xlim=(10.0, 90.0))
    axes.set_ylim(bottom=0.0)
    save(figure, "troposphere")


def digits() -> None:
    """How fine float64 is where the digits of a range could be lost, one-way length."""
    metre_per_s = 0.5 * SPEED_OF_LIGHT
    earth, _ = lt.Ephemeris.default().earth(2461012.5, 0.0)
    moon_speed = 1.0e3
    rungs = (
        ("Julian date in one float,\nas the Moon moves", np.spacing(2461012.5) * DAY * moon_speed),
        ("fraction of the day in one float", np.spacing(0.9) * DAY * metre_per_s),
        ("barycentric coordinates", float(np.spacing(np.abs(earth).max()))),
        ("the answer, in one float", np.spacing(2.5) * metre_per_s),
    )
    figure, axes = plt.subplots(figsize=(WIDTH_IN, 2.3))
    for row, (name, metres) in enumerate(reversed(rungs)):
        axes.plot([1e-9, metres], [row, row], color=FAINT, linewidth=1.0)
        axes.plot(metres, row, "o", color=RED if metres > 1e-6 else GREEN, markersize=7)
        axes.text(1.3e-9, row + 0.14, name, fontsize=9, va="bottom")
    axes.set(xscale="log", xlim=(1e-9, 1.0), ylim=(-0.4, 4.1), yticks=[])
    axes.set_xticks([1e-9, 1e-6, 1e-3, 1.0], ["1 nm", "1 \N{MICRO SIGN}m", "1 mm", "1 m"])
    axes.minorticks_off()
    axes.spines["left"].set_visible(False)
    axes.set_xlabel("one step of the grid")
    save(figure, "digits")


def main() -> None:
    days, mm = lunation()
    anatomy()
    over_a_lunation(days, mm)
    single_terms(days, mm)
    geometry()
    troposphere()
    digits()


if __name__ == "__main__":
    main()
