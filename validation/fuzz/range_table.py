"""Fuzzer of the reader of other programs' ranges: CSV with any delimiter, and ECSV."""

from __future__ import annotations

from pathlib import Path

from harness import fuzz

from lighttime.crosscheck.ranges import read_ranges
from lighttime.errors import LighttimeError

SEEDS = (
    b"""\
# somebody's ranges
epoch_utc,round_trip_s,sigma_ps,station,array
2020-03-01T19:00:00,2.594379123456789,5.0,Hilltop,Apollo 15
2020-03-01T19:05:00.5,2.594380123456789012345,5.0,Hilltop,"Apollo 15"
""",
    b"""\
mjd_tt;uplink_m;pressure_hpa;temperature_c;humidity_percent;wavelength_nm
58909.8;389000123.4567;770.1;-2.5;41;532
58909.9;389000124.4567D0;770.1;-2.5;41;532
""",
    b"""\
# %ECSV 1.0
# ---
# delimiter: ','
# datatype:
# - {name: epoch, datatype: string}
# - {name: scale, datatype: string}
# - {name: half_round_trip, unit: km, datatype: float64}
# - {name: tag, datatype: string}
epoch,scale,half_round_trip,tag
2020-03-01T19:00:00,utc,389000.1234567,transmit
2020-03-01T19:05:00,tdb,389000.1244567,bounce
""",
    b"epoch_tai round_trip_ns\n2020-03-01T19:00:00 2594379123.456789\n2020-03-02 2.6e9\n",
)


def read(path: Path) -> None:
    """The ranges, with and without rows that cannot be used."""
    try:
        ranges = read_ranges(path, skip_unreadable=True)
    except LighttimeError:
        pass
    else:
        assert len(ranges) == len(ranges.high_s) >= 1
        assert all(ranges.high_s > 0.0)
    read_ranges(path)


if __name__ == "__main__":
    fuzz(read, SEEDS)
