"""Fuzzer of the reader of station files, and of what stations do with the values."""

from __future__ import annotations

from pathlib import Path

from blq_file import HEADER, ROWS
from harness import fuzz
from residual_file import SEEDS as RESIDUAL
from sinex_file import SINEX

from lighttime.earth.site_file import read_station

PLACE = b"""\
name = "Hilltop"
latitude_deg = 46.2
longitude_deg = 7.1
height_m = 2310
"""
SEEDS = (
    b"""\
# invented
name = "Hilltop"
xyz_m = [4389842.0, 546779.0, 4582377.0]
velocity_m_per_yr = [-0.0141, 0.0188, 0.0103]
epoch = 2010.0
sigma_m = [0.004, 0.005, 0.006]
source = "local survey of 2019"

[ocean_pole_tide]
up = [-0.0306, 0.0112]
north = [0.0041, -0.0022]
east = [-0.0013, 0.0008]
source = "a grid"

[atmosphere_loading]
s1_up_mm = [0.41, -0.22]
s1_north_mm = [0.03, 0.05]
s1_east_mm = [-0.06, 0.02]
s2_up_mm = [-0.53, 0.36]
s2_north_mm = [0.04, -0.01]
s2_east_mm = [0.07, 0.09]
source = "a service"
""",
    PLACE,
    PLACE + b'[ocean_loading]\nblq = "hill.blq"\nsite = "HILL TOP"\ncentre_of_mass = true\n',
    PLACE + b'[residual_motion]\ncsv = "hill.csv"\n',
    b"""\
name = "Hilltop"
[sinex]
file = "hill.snx"
site = "HILL"
solution = 2
when = "2005-06-01"
point = "A"
eccentricity = true
discontinuities = "hill.snx"
""",
)
BESIDE = {
    "hill.blq": HEADER + b"  HILL TOP\n" + ROWS,
    "hill.csv": RESIDUAL[0],
    "hill.snx": SINEX,
}


def read(path: Path) -> None:
    """The station, compared and told."""
    station = read_station(path)
    hash(station)
    str(station)
    repr(station)


if __name__ == "__main__":
    fuzz(read, SEEDS, BESIDE)
