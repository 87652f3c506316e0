"""How rough the bundled series of Earth orientation is: where a day does not fit its neighbours.

UT1 freed of the zonal tides, and the pole, go smoothly from day to day; a cubic through the two
days before and the two after says what a day should be. What the published value is off from that
is noise of measurement, or a seam of the series, and no interpolation can know better than it.

Exits with 1 if UT1 is off by more than 0.2 ms (9 cm at the equator) on any other days than those of
the known seam, 1984-01-01.
"""

from __future__ import annotations

import sys
from itertools import pairwise

import numpy as np

import lighttime as lt
from lighttime.constants import ARCSECOND, EARTH_EQUATORIAL_RADIUS, EARTH_ROTATION_RATE

YEARS = (1962, 1972, 1980, 1984, 1985, 1988, 1990, 1995, 2000, 2010, 2020, 2030)
SEAM = ("1983-12-30", "1983-12-31", "1984-01-01", "1984-01-02")
LIMIT_S = 2e-4
SHOWN = 10
MM_PER_MS = 1e3 * 1e-3 * EARTH_ROTATION_RATE * EARTH_EQUATORIAL_RADIUS
MM_PER_MAS = 1e3 * 1e-3 * ARCSECOND * EARTH_EQUATORIAL_RADIUS


def misfit(values: np.ndarray) -> np.ndarray:
    """Each value less that of the cubic through two before and two after it."""
    before2, before, here, after, after2 = (values[k : len(values) - 4 + k] for k in range(5))
    return here - (4.0 * (before + after) - before2 - after2) / 6.0


def main() -> int:
    """Print by years and the worst days; 0 when only the known seam is above the limit."""
    series = lt.EarthOrientation.bundled()
    measured = slice(None, int(series.last_measured_mjd - series.mjd[0]) + 1)
    mjd = series.mjd[measured][2:-2]
    ut1 = misfit(series.ut1_tai_tide_free_s[measured])
    pole = misfit(series.xp_arcsec[measured]) * 1e3
    dates = [lt.Epoch(2400000.5 + day, 0.0, "utc").isoformat(0)[:10] for day in mjd]
    year = np.array([int(date[:4]) for date in dates])
    print(f"{series.name}\nA day less the cubic through its neighbours; mm at the equator\n")
    print(f"{'years':<12}{'UT1, rms/us':>12}{'mm':>7}{'largest/us':>12}{'mm':>7}", end="")
    print(f"{'x_p, rms/mas':>14}{'mm':>7}")
    for first, end in pairwise(YEARS):
        some = (year >= first) & (year < end)
        rms, largest = np.sqrt(np.mean(ut1[some] ** 2)) * 1e3, np.max(np.abs(ut1[some])) * 1e3
        of_pole = np.sqrt(np.mean(pole[some] ** 2))
        print(f"{first}-{year[some].max():<7}{1e3 * rms:>12.1f}{rms * MM_PER_MS:>7.1f}", end="")
        print(f"{1e3 * largest:>12.1f}{largest * MM_PER_MS:>7.1f}", end="")
        print(f"{of_pole:>14.3f}{of_pole * MM_PER_MAS:>7.1f}")
    worst = np.argsort(-np.abs(ut1))[:SHOWN]
    print("\nworst days of UT1, ms: " + ", ".join(f"{dates[k]} {1e3 * ut1[k]:+.2f}" for k in worst))
    others = [date for date, off in zip(dates, ut1, strict=True) if abs(off) > LIMIT_S]
    unknown = sorted(set(others) - set(SEAM))
    print(f"above {1e3 * LIMIT_S:g} ms: {', '.join(sorted(others))}")
    print("ok" if not unknown else f"MISS: {unknown}")
    return int(bool(unknown))


if __name__ == "__main__":
    sys.exit(main())
