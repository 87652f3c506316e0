"""TDB - TT and TCL integrated from the ephemeris: against the series, another file, itself.

    python validation/tdb_integrated.py [FOLDER]

FOLDER holds example1.bsp, example1.tpc and example1spk_time.bsp, a test ephemeris with its own
TT - TDB, as in the folder `examples` of the source of the package calcephpy; without it pip is
asked for that source. Prints a table for each comparison and exits non-zero when one misses its
bar. Times are the best of several runs.
"""

from __future__ import annotations

import re
import subprocess
import sys
import tarfile
import tempfile
import time
from collections.abc import Callable
from dataclasses import fields
from pathlib import Path
from typing import Any

import erfa
import numpy as np
from jplephem.spk import SPK

import lighttime as lt
from lighttime.constants import DAY, J2000, L_G, SCALES_ORIGIN, SPEED_OF_LIGHT
from lighttime.ephemeris import fit, panels, time_integral
from lighttime.ephemeris.chebyshev import Records
from lighttime.ephemeris.panels import Panels
from lighttime.ephemeris.quadrature import antiderivative, nodes
from lighttime.ephemeris.time_integral import TimeEphemeris
from lighttime.ephemeris.time_rate import slowing, tdb_minus_tt_rate
from lighttime.moon.clock import mean_rate_minus_tt, slower_than_tcl, tcl_minus_tcg

c = SPEED_OF_LIGHT
PER_DAY_US = 1e6 * DAY
CENTURY = 36525.0
SPAN = 2433282.5, 2469807.5  # 1950 to 2050

missed: list[str] = []


def row(what: str, value: float, unit: str, bar: float | None = None, why: str = "") -> None:
    """Print a number, and take note if it is not below its bar."""
    judged = "" if bar is None else f"  (bar {bar:g})"
    if bar is not None and not abs(value) < bar:
        missed.append(what)
        judged += "  MISSED"
    print(f"  {what:58}{value:14.6g} {unit}{judged}  {why}".rstrip())


def title(text: str) -> None:
    print(f"\n{text}")


# -- 1: the series -------------------------------------------------------------------------------


def against_series(relation: TimeEphemeris, step: float = 0.5) -> tuple[Any, Any, Any]:
    """Julian dates, integrated minus series in ns, and the straight line in it."""
    jd = SPAN[0] + np.arange(0.0, CENTURY, step)
    apart = 1e9 * (relation.tdb_minus_tt(jd, 0.0) - erfa.dtdb(jd, 0.0, 0.0, 0.0, 0.0, 0.0))
    return jd, apart, np.polyfit((jd - SCALES_ORIGIN[0]) / CENTURY, apart, 1)


def spectrum(values: Any, step: float) -> tuple[Any, Any]:
    """Periods in days and amplitudes, Hann window."""
    n = len(values)
    amplitude = np.abs(np.fft.rfft(values * np.hanning(n))) * 4.0 / n
    return 1.0 / np.fft.rfftfreq(n, step)[1:], amplitude[1:]


def peaks(period: Any, amplitude: Any, count: int) -> list[tuple[float, float]]:
    """The largest local maxima."""
    inner = amplitude[1:-1]
    top = np.flatnonzero((inner > amplitude[:-2]) & (inner > amplitude[2:])) + 1
    best = top[np.argsort(amplitude[top])[::-1][:count]]
    return [(float(period[i]), float(amplitude[i])) for i in best]


def show_series(relation: TimeEphemeris) -> None:
    title("1. Integrated from DE421 minus the series (ERFA dtdb), geocentre, 1950 to 2050")
    jd, apart, line = against_series(relation)
    t = (jd - SCALES_ORIGIN[0]) / CENTURY
    row("greatest", np.abs(apart).max(), "ns", 15.0)
    row("rms", apart.std(), "ns")
    row("constants: on 1977-01-01", line[1], "ns")
    row("constants: rate", line[0], "ns/century", why=f"{line[0] * 1e-9 / CENTURY / DAY:.2e} s/s")
    rest = apart - np.polyval(line, t)
    row("greatest, straight line taken out", np.abs(rest).max(), "ns", 15.0)
    row("rms, straight line taken out", rest.std(), "ns")
    for period, amplitude in peaks(*spectrum(rest, 0.5), 8):
        row(f"  period {period / 365.25:7.3f} years = {period:8.1f} d", amplitude, "ns")


# -- 2: another integration ----------------------------------------------------------------------


def fetched(folder: str | None, temporary: str) -> Path:
    """Where the test ephemeris is."""
    if folder is not None:
        return Path(folder)
    pip = [sys.executable, "-m", "pip", "download", "--quiet", "--no-deps", "--no-binary", ":all:"]
    subprocess.run([*pip, "--dest", temporary, "calcephpy"], check=True)
    (archive,) = Path(temporary).glob("calcephpy-*.tar.gz")
    with tarfile.open(archive) as source:
        wanted = [m for m in source.getmembers() if re.search(r"/examples/example1", m.name)]
        source.extractall(temporary, wanted, filter="data")
    return next(Path(temporary).glob("*/examples"))


def records(segment: Any, components: int, scale: float) -> Records:
    """The positions of a Chebyshev segment."""
    first, span, size, count = segment.daf.read_array(segment.end_i - 3, segment.end_i)
    rows = segment.daf.map_array(segment.start_i, segment.end_i - 4)
    rows = rows.reshape(int(count), int(size))[:, 2:]
    series = rows.reshape(int(count), 2 * components if scale != 1.0 else 1, -1)[:, :components]
    return Records(J2000 + first / DAY, span / DAY, np.array(series), scale)


def test_ephemeris(folder: Path) -> tuple[lt.Ephemeris, Records]:
    """The bodies of the test ephemeris, with its masses; and its TT - TDB."""
    text = (folder / "example1.tpc").read_text()
    pattern = r"BODY(\d+)_GM\s*=\s*\(\s*(\S+)\s*\)"
    gm = {int(n): 1e9 * float(v.replace("D", "e")) for n, v in re.findall(pattern, text)}
    kernel = SPK.open(folder / "example1.bsp")
    of = {s.target: records(s, 3, 1000.0) for s in kernel.segments}
    names = dict(enumerate(("mercury", "venus", "", "mars", "jupiter", "saturn", "uranus"), 1))
    names |= {8: "neptune", 9: "pluto", 10: "sun"}
    del names[3]
    constants = {f"gm_{name}": gm[n] for n, name in names.items()}
    constants |= {"gm_moon": gm[301], "gm_earth": gm[3] - gm[301]}
    ephemeris = lt.Ephemeris(
        "test", {name: of[n] for n, name in names.items()} | {"earth_moon_barycentre": of[3]},
        of[301], -gm[301] / gm[3], None, constants,
    )  # fmt: skip
    (segment,) = SPK.open(folder / "example1spk_time.bsp").segments
    return ephemeris, records(segment, 1, 1.0)


def show_other(folder: Path) -> None:
    title("2. The same integration over the bodies of the test ephemeris, against its TT - TDB")
    ephemeris, theirs = test_ephemeris(folder)
    relation = TimeEphemeris.integrate(ephemeris)
    jd = relation.earth.start_jd + np.arange(0.0, 9086.0, 0.125)
    apart = relation.tdb_minus_tt(jd, 0.0) + theirs.value(theirs.locate(jd, 0.0))[0]
    row("mean: its TT - TDB in 1977 and ours", apart.mean() * 1e9, "ns")
    apart = 1e9 * (apart - apart.mean())
    row("greatest after the constant, 1975 to 2000", np.abs(apart).max(), "ns", 1.0)
    row("rms after the constant", apart.std(), "ns")
    line = np.polyfit((jd - jd[0]) / CENTURY, apart, 1)
    row(
        "rate left",
        line[0],
        "ns/century",
        why="the term left out at 1/c^4, 1.9e-20, is 0.059; asteroids would be 10",
    )
    terms = int(np.flatnonzero(np.abs(theirs.coefficients).max(axis=(0, 1)))[-1]) + 1
    last = np.abs(theirs.coefficients[:, 0, terms - 1]).max() * 1e9
    row(f"last of the {terms} coefficients it keeps for 16 days", last, "ns", None,
        "what limits the comparison: its series ends there")  # fmt: skip
    # ours by as few terms, through as many zeros of the next Chebyshev polynomial
    middle = theirs.start_jd + (np.arange(len(theirs.coefficients))[:, None] + 0.5) * 16.0
    middle = middle[:-1] if middle[-1] + 8.0 > jd[-1] else middle
    few = fit.series(relation.tdb_minus_tt(middle, 8.0 * fit.nodes(terms)))
    apart = 1e9 * (few + theirs.coefficients[: len(few), 0, :terms])
    apart[:, 0] -= apart[:, 0].mean()
    row("greatest difference of coefficients, ours cut as short", np.abs(apart).max(), "ns", 0.02)


# -- 3: order doubling ---------------------------------------------------------------------------


def show_order(relation: TimeEphemeris) -> None:
    title("3. Error of the integration over a century, from 1977 on")
    row("half the order (11 samples in 4 days) and this one (23)", relation.error_s, "s", 1e-13)
    ephemeris, count = relation.ephemeris, 2 * time_integral.SAMPLES + 1
    gm = {name: ephemeris.gm(name) for name in ("earth", "moon")}
    gm |= {n: ephemeris.gm(n) for n in ephemeris.barycentric if n != "earth_moon_barycentre"}
    distant = time_integral.mean_potential(ephemeris.constants)
    whole = Panels.over(ephemeris, *SPAN)
    ends = []
    for block in whole.blocks():
        slow = slowing("earth", panels.states(ephemeris, block, nodes(count)), gm, distant)
        rates = tdb_minus_tt_rate(slow)
        ends.append((rates @ antiderivative(count).T).sum(axis=-1) * 0.5 * whole.days * DAY)
    doubled = np.concatenate([[0.0], np.cumsum(np.concatenate(ends))])
    jd = whole.start_jd + whole.days * np.arange(whole.count + 1)
    apart = relation.tdb_minus_tt(jd, 0.0) - doubled
    origin = np.searchsorted(jd, SCALES_ORIGIN[0])
    row("this order and its double (47)", np.abs(apart - apart[origin]).max(), "s", 1e-13)


# -- 4: rates of lunar clocks --------------------------------------------------------------------


def show_rates(relation: TimeEphemeris) -> None:
    title("4. Mean rates, microseconds a day, 1950 to 2050 (published ones from memory)")
    tcl = mean_rate_minus_tt(relation, None) * PER_DAY_US
    row("TCL - TCG", tcl - L_G * PER_DAY_US, "us/day",
        why="published -1.4769 (Kopeikin & Kaplan 2024)")  # fmt: skip
    row("  distance from the published one", tcl - L_G * PER_DAY_US + 1.4769, "us/day", 1e-4)
    row("TCL - TT", tcl, "us/day", why="published 58.7 (in use at NASA)")
    for name, xyz in (
        ("lunar clock, mean sphere, on the long axis", (1737400.0, 0.0, 0.0)),
        ("lunar clock, mean sphere, at the pole", (0.0, 0.0, 1737400.0)),
        ("lunar clock, Apollo 15", lt.reflector("Apollo 15").xyz_m),
    ):
        rate = mean_rate_minus_tt(relation, xyz) * PER_DAY_US
        below = slower_than_tcl(xyz, relation.ephemeris)
        row(f"{name} - geoid", rate, "us/day", why=f"{below:.5e} below TCL")
    print(f"  {'':58}{'':14} published 56.02 (Ashby & Patla 2024), L_L = 3.14027e-11 (Turyshev)")
    jd = SPAN[0] + np.arange(0.0, CENTURY, 0.25)
    values = tcl_minus_tcg(relation, jd, 0.0)
    rest = 1e6 * (values - np.polyval(np.polyfit(jd - jd[0], values, 1), jd - jd[0]))
    row("TCL - TCG, to and fro at most", np.abs(rest).max(), "us")
    for period, amplitude in peaks(*spectrum(rest, 0.25), 5):
        row(f"  period {period:8.3f} d", amplitude, "us")


# -- 5: speed ------------------------------------------------------------------------------------


def best(work: Callable[[], Any], runs: int = 5) -> float:
    """Shortest of some runs, s."""
    taken = []
    for _ in range(runs):
        start = time.perf_counter()
        work()
        taken.append(time.perf_counter() - start)
    return min(taken)


def show_speed() -> None:
    title("5. Time taken, best of 5")

    def years(first: int, last: int) -> Callable[[], Any]:
        return lambda: TimeEphemeris.integrate(first=f"{first}-01-01", last=f"{last}-01-01")

    row("integrating 50 years (1977 to 2027)", best(years(1977, 2027)), "s", 10.0)
    row("integrating 300 years", best(TimeEphemeris.integrate, 3), "s")
    relation = TimeEphemeris.integrate(first="1977-01-01", last="2027-01-01")
    jd = np.random.default_rng(7).uniform(2443200.5, 2461000.5, 100_000)
    row("100 000 epochs", best(lambda: relation.tdb_minus_tt(jd, 0.0)), "s", 0.1)
    row("100 000 epochs of the series (ERFA)",
        best(lambda: erfa.dtdb(jd, 0.0, 0.0, 0.0, 0.0, 0.0), 1), "s")  # fmt: skip


# -- 6: the range --------------------------------------------------------------------------------


class SeriesAtCentre(TimeEphemeris):
    """The series at the geocentre, with the station's term as the integrated one has it."""

    def tdb_minus_tt(self, tdb1: Any, tdb2: Any, *place: Any, **pole: Any) -> Any:
        own = super().tdb_minus_tt
        at_centre = own(tdb1, tdb2) - erfa.dtdb(tdb1, tdb2, 0.0, 0.0, 0.0, 0.0)
        return own(tdb1, tdb2, *place, **pole) - at_centre


def show_range() -> None:
    title(
        "6. Range to Apollo 15 by integrated minus by series, one way, 1970 to 2026, above 10 deg"
    )
    if "tdb" not in {field.name for field in fields(lt.Model)}:
        missed.append("range: the model has no choice of TDB")
        return
    whole = time_integral.of(lt.Ephemeris.default())
    of_series = SeriesAtCentre(**{f.name: getattr(whole, f.name) for f in fields(TimeEphemeris)})
    models = [lt.Model(tdb=choice) for choice in ("integrated", "series", of_series)]
    jd = np.sort(np.random.default_rng(3).uniform(2440587.5, 2461400.5, 12_000))
    for latitude in (46.2, 0.0, -30.0):
        station = lt.Station.from_geodetic("H", latitude, 7.1, 2310.0)
        answers = [
            m.round_trip(lt.Epoch(jd, 0.0, "tt"), station, lt.reflector("Apollo 15"))
            for m in models
        ]
        high = answers[0].uplink.elevation_deg > 10.0
        integrated, series, at_centre = (a.seconds[high] for a in answers)
        apart, of_centre = 0.5e6 * c * (integrated - series), 0.5e6 * c * (integrated - at_centre)
        name = f"latitude {latitude:g}"
        row(f"{name}: greatest", np.abs(apart).max(), "um", 10.0)
        row(f"{name}: rms", np.std(apart), "um")
        row(f"{name}: greatest, of the geocentre's part",
            np.abs(of_centre).max(), "um", 10.0)  # fmt: skip


def main() -> int:
    """All comparisons."""
    relation = TimeEphemeris.integrate(
        first=lt.Epoch(SPAN[0], 0.0, "tdb"), last=lt.Epoch(SPAN[1], 0.0, "tdb")
    )
    print(relation)
    show_series(relation)
    with tempfile.TemporaryDirectory() as temporary:
        show_other(fetched(sys.argv[1] if len(sys.argv) > 1 else None, temporary))
    show_order(relation)
    show_rates(relation)
    show_speed()
    show_range()
    print(f"\nmissed: {', '.join(missed) or 'none'}")
    return min(len(missed), 1)


if __name__ == "__main__":
    sys.exit(main())
