"""Station files."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from lighttime.earth.loading import AtmosphereLoading, OceanPoleTide
from lighttime.earth.site_file import read_station
from lighttime.earth.station import Station
from lighttime.errors import FileError

GEODETIC = """\
name = "Hilltop"
latitude_deg = 46.2
longitude_deg = 7.1
height_m = 2310
"""

FULL = """\
# a station of our own invention
name = "Hilltop"
xyz_m = [4389842.0, 546779.0, 4582377.0]
velocity_m_per_yr = [-0.0141, 0.0188, 0.0103]
epoch = 2010.0
sigma_m = [0.004, 0.005, 0.006]
source = "local survey of 2019"

[ocean_loading]
blq = "tables/loading.blq"
site = "HILL"
centre_of_mass = true

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
"""

# Onsala, from the test case of the ocean loading routine, IERS Conventions (2010), 7.1.2
BLQ = """\
$$ two stations
  Elsewhere
  .00100 .00100 .00100 .00100 .00100 .00100 .00100 .00100 .00100 .00100 .00100
  .00100 .00100 .00100 .00100 .00100 .00100 .00100 .00100 .00100 .00100 .00100
  .00100 .00100 .00100 .00100 .00100 .00100 .00100 .00100 .00100 .00100 .00100
     0.0    0.0    0.0    0.0    0.0    0.0    0.0    0.0    0.0    0.0    0.0
     0.0    0.0    0.0    0.0    0.0    0.0    0.0    0.0    0.0    0.0    0.0
     0.0    0.0    0.0    0.0    0.0    0.0    0.0    0.0    0.0    0.0    0.0
  HILL
  .00352 .00123 .00080 .00032 .00187 .00112 .00063 .00003 .00082 .00044 .00037
  .00144 .00035 .00035 .00008 .00053 .00049 .00018 .00009 .00012 .00005 .00006
  .00086 .00023 .00023 .00006 .00029 .00028 .00010 .00007 .00004 .00002 .00001
   -64.7  -52.0  -96.2  -55.2  -58.8 -151.4  -65.6 -138.1    8.4    5.2    2.1
    85.5  114.5   56.5  113.6   99.4   19.1   94.1  -10.4 -167.4 -170.0 -177.7
   109.5  147.0   92.7  148.8   50.5  -55.1   36.4 -170.4  -15.0    2.3    5.2
"""


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    (tmp_path / "tables").mkdir()
    (tmp_path / "tables" / "loading.blq").write_text(BLQ)
    return tmp_path


def write(folder: Path, text: str | bytes) -> Path:
    path = folder / "hilltop.toml"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return path


def test_a_position_is_enough(tmp_path: Path) -> None:
    station = read_station(write(tmp_path, GEODETIC))
    assert station == Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)
    assert station.ocean_loading is None


def test_the_path_may_be_text(tmp_path: Path) -> None:
    assert read_station(str(write(tmp_path, GEODETIC))).name == "Hilltop"


def test_everything(folder: Path) -> None:
    station = read_station(write(folder, FULL))
    assert station.xyz_m == (4389842.0, 546779.0, 4582377.0)
    assert station.velocity_m_per_yr == (-0.0141, 0.0188, 0.0103)
    assert station.epoch == 2010.0
    assert station.sigma_m == (0.004, 0.005, 0.006)
    assert station.source == "local survey of 2019"
    assert station.ocean_loading is not None
    assert station.ocean_loading.amplitudes_m[0, 0] == 0.00352
    assert station.ocean_loading.phases_deg[2, 10] == 5.2
    assert station.ocean_loading.centre_of_mass is True
    assert station.ocean_pole_tide == OceanPoleTide(
        -0.0306 + 0.0112j, 0.0041 - 0.0022j, -0.0013 + 0.0008j, "a grid"
    )
    cosine = np.array([[0.41, -0.53], [0.03, 0.04], [-0.06, 0.07]])
    sine = np.array([[-0.22, 0.36], [0.05, -0.01], [0.02, 0.09]])
    expected = AtmosphereLoading(cosine * 1.0e-3, sine * 1.0e-3, "a service")
    assert station.atmosphere_loading == expected


def test_the_site_of_the_loading_file_is_the_name_if_not_given(folder: Path) -> None:
    text = GEODETIC.replace("Hilltop", "Hill") + '[ocean_loading]\nblq = "tables/loading.blq"\n'
    station = read_station(write(folder, text))
    assert station.ocean_loading is not None
    assert station.ocean_loading.amplitudes_m[1, 0] == 0.00144
    assert station.ocean_loading.centre_of_mass is None


def replaced(old: str, new: str, text: str = FULL) -> str:
    assert text.count(old) == 1
    return text.replace(old, new)


@pytest.mark.parametrize(
    ("text", "line", "message"),
    [
        (replaced("height_m", "heigth_m", GEODETIC), 4, "key is 'heigth_m'; .*mean height_m"),
        (GEODETIC + "[ocean_tide]\n", 5, "key is 'ocean_tide'; .*mean ocean_pole_tide"),
        (replaced("height_m = 2310", "", GEODETIC), None, "height_m is missing"),
        (replaced('name = "Hilltop"', "", GEODETIC), None, "name is missing"),
        ('name = "Hilltop"\n', None, "no position: xyz_m, or latitude_deg, longitude_deg, height"),
        (FULL.replace("epoch", "height_m = 1\nepoch"), 5, "height_m and xyz_m: .* given once"),
        (replaced("2310", '"2310"', GEODETIC), 4, "height_m holds '2310'; allowed: numbers"),
        (replaced("2310", "true", GEODETIC), 4, "height_m holds True; allowed: numbers"),
        (replaced("2310", "nan", GEODETIC), 4, "height_m is nan"),
        (replaced("2310", "1" + "0" * 400, GEODETIC), 4, "height_m holds a number too large"),
        (replaced("46.2", "146.2", GEODETIC), 2, "latitude_deg is 146.2; allowed: -90 to 90"),
        (replaced('"Hilltop"', "7", GEODETIC), 1, "name is 7; allowed: text in quotes"),
        (replaced('"Hilltop"', '" "', GEODETIC), 1, "name is ' '; allowed: text in quotes"),
        (replaced("4389842.0, ", ""), 3, "xyz_m is .*; allowed: a list of 3 numbers"),
        (replaced("4389842.0", "4389.842"), 3, "xyz_m is .*within 100 km of the ellipsoid"),
        (replaced("4389842.0", "inf"), 3, "xyz_m is .*; allowed: .*finite numbers"),
        (replaced("-0.0141", "-14.1"), 4, "velocity_m_per_yr is .*-1 to 1 m/yr"),
        (replaced("epoch = 2010.0\n", ""), 4, "velocity needs the epoch of the position: epoch"),
        (replaced("2010.0", "2455197.5"), 5, "epoch is 2455197.5; allowed: 1900 to 2100"),
        (replaced("0.004, ", ""), 6, "sigma_m is .*; allowed: a list of 3 numbers"),
        ("ocean_loading = 3\n" + GEODETIC, 1, r"ocean_loading is 3; allowed: a table"),
        (replaced('"HILL"', '"HIL"'), 11, r"\[ocean_loading\] site is 'HIL'; .*mean HILL"),
        (replaced('site = "HILL"\n', ""), 9, r"\[ocean_loading\] site is 'Hilltop'"),
        (replaced("blq =", "BLQ ="), 10, r"\[ocean_loading\] key is 'BLQ'; allowed: .*blq"),
        (replaced('blq = "tables/loading.blq"\n', ""), 9, "blq is missing"),
        (replaced("centre_of_mass = true", 'centre_of_mass = "yes"'), 12, "allowed: true or false"),
        (replaced("up = [-0.0306, 0.0112]", "up = -0.03"), 15, "up is -0.03; allowed: a list of 2"),
        (replaced("[-0.0306", "[-30.6"), 15, r"\[ocean_pole_tide\] up is .*absolute value 0 to 2"),
        (replaced("s2_north_mm = [0.04, -0.01]\n", ""), 20, "s2_north_mm is missing"),
        (
            replaced("[0.41, -0.22]", "[410.0, -220.0]"),
            21,
            r"s1_up_mm is \[410.0, .*; allowed: -50 to 50",
        ),
        (replaced("[0.04, -0.01]", "[nan, 0.0]"), 25, r"s2_north_mm is \[nan, 0.0\]"),
        ("name = \n", 1, "not TOML"),
        ("name = 'a'\nname = 'b'\n", 2, "not TOML"),
        ("a = " + "[\n" * 40_000, None, "not TOML"),
        ("a = " + "1" * 10_000, 1, "a line of more than 1000 bytes"),
        (b"name = '\xff'\n", None, "not a text file"),
        (b"#\n" * 50_001, 50_001, "a file of more than 100000 bytes"),
    ],
)
def test_what_is_wrong_is_told_with_its_line(
    folder: Path, text: str | bytes, line: int | None, message: str
) -> None:
    path = write(folder, text)
    with pytest.raises(FileError, match=message) as caught:
        read_station(path)
    assert caught.value.line == line
    assert str(caught.value).startswith(str(path))


def test_no_such_file(tmp_path: Path) -> None:
    with pytest.raises(FileError, match=r"none\.toml: cannot be read: No such file"):
        read_station(tmp_path / "none.toml")
    with pytest.raises(FileError, match="directory"):
        read_station(tmp_path)


def test_no_such_loading_file(tmp_path: Path) -> None:
    with pytest.raises(FileError, match=r"loading\.blq: cannot be read: No such file"):
        read_station(write(tmp_path, FULL))


@settings(
    suppress_health_check=[HealthCheck.function_scoped_fixture],
    max_examples=60,
    deadline=None,
    derandomize=True,
)
@given(cut=st.integers(0, len(FULL)), junk=st.text(max_size=12), length=st.integers(0, 12))
def test_a_damaged_file_is_an_error_or_the_same_station(
    folder: Path, cut: int, junk: str, length: int
) -> None:
    damaged = FULL[:cut] + junk + FULL[cut + length :]
    try:
        station = read_station(write(folder, damaged.encode("utf-8", "replace")))
    except FileError:
        return
    assert isinstance(station, Station)
    assert np.linalg.norm(station.xyz_m) == pytest.approx(6.37e6, rel=0.02)
