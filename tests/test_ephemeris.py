"""The default ephemeris, and files made here from its own coefficients."""

from __future__ import annotations

import pickle
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from daf_case import write_de421

from lighttime.ephemeris import Ephemeris
from lighttime.errors import FileError, LighttimeError, UnknownNameError


@pytest.fixture(scope="module")
def de421() -> Ephemeris:
    return Ephemeris.default()


def test_against_jplephem(de421: Ephemeris) -> None:
    """jplephem reads the same package, and finds its records in one float64: to 1 mm only."""
    import de421 as package
    from jplephem.ephem import Ephemeris as Other

    other = Other(package)
    jd, fraction = 2454321.5, np.linspace(0.0, 400.0, 101)
    for ours, theirs in (("sun", "sun"), ("venus", "venus"), ("jupiter", "jupiter")):
        position, velocity = de421.barycentric_body(ours, jd, fraction)
        expected = other.position_and_velocity(theirs, np.full(101, jd), fraction)
        assert np.abs(position / 1e3 - expected[0]).max() < 2e-4  # km, of 1e8
        assert np.abs(velocity * 86.4 - expected[1]).max() < 1e-4  # km/day
    moon, _ = de421.moon_geocentric(jd, fraction)
    assert np.abs(moon / 1e3 - other.position("moon", np.full(101, jd), fraction)).max() < 1e-6
    angles, _ = de421.libration(jd, fraction)
    turn = angles - other.position("librations", np.full(101, jd), fraction)
    assert np.abs(np.remainder(turn + np.pi, 2 * np.pi) - np.pi).max() < 2e-11


def test_psi_is_reduced_without_loss(de421: Ephemeris) -> None:
    """psi less its whole turns, by mpmath from the raw file: 1e-15 rad measured."""
    import de421 as package
    import mpmath

    raw = np.load(Path(package.__file__).parent / "jpl-librations.npy", mmap_mode="r")[:, 2, 0]
    assert de421.angles is not None
    reduced = de421.angles.coefficients[:, 2, 0]
    assert raw.max() > 4000.0
    with mpmath.workdps(40):
        for k in range(0, len(raw), 997):
            turns = mpmath.nint(mpmath.mpf(float(raw[k])) / (2 * mpmath.pi))
            exact = mpmath.mpf(float(raw[k])) - turns * 2 * mpmath.pi
            assert abs(float(exact - mpmath.mpf(float(reduced[k])))) < 1e-15


def test_masses(de421: Ephemeris) -> None:
    """GM of the Sun and the Earth in DE421 (Folkner et al. 2009, table 8; from memory)."""
    assert de421.gm("sun") == pytest.approx(1.32712440040945e20, rel=1e-12)
    assert de421.gm("earth") == pytest.approx(3.98600436233e14, rel=1e-11)
    assert de421.gm("earth") / de421.gm("moon") == pytest.approx(81.3005691, rel=1e-8)
    with pytest.raises(UnknownNameError, match="did you mean mars"):
        de421.gm("marz")


def test_displacement_of_the_earth(de421: Ephemeris) -> None:
    """The difference of polynomials is the difference of positions, to the grid of those."""
    jd2 = np.linspace(0.0, 30.0, 200)
    moved = de421.earth_displacement(2455000.5, jd2, -1.3, 1.3)
    a, _ = de421.earth(2455000.5, jd2, -1.3)
    b, _ = de421.earth(2455000.5, jd2, 1.3)
    assert np.abs(moved - (b - a)).max() < 1.2e-4


def test_says_what_it_is(de421: Ephemeris) -> None:
    expected = "<Ephemeris DE421: JD 2414992.5 to 2524624.5 TDB, lunar orientation of DE421>"
    assert repr(de421) == expected


def test_pickles_as_a_reference(de421: Ephemeris) -> None:
    data = pickle.dumps(de421)
    assert len(data) < 200
    assert pickle.loads(data) is de421


# -- files -----------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def files(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, Path]:
    return write_de421(tmp_path_factory.mktemp("ephemeris"))


def test_files_give_the_same_moon(files: tuple[Path, Path], de421: Ephemeris) -> None:
    bsp, bpc = files
    other = Ephemeris.open(bsp, orientation=bpc)
    jd, fraction = 2455210.5, np.linspace(0.0, 60.0, 50)
    ours, theirs = de421.moon_geocentric(jd, fraction)[0], other.moon_geocentric(jd, fraction)[0]
    assert np.abs(ours - theirs).max() < 3e-7
    moved = de421.earth_displacement(jd, fraction, 0.0, 2.6)
    assert np.abs(other.earth_displacement(jd, fraction, 0.0, 2.6) - moved).max() < 1e-10
    assert np.abs(other.libration(jd, fraction)[0] - de421.libration(jd, fraction)[0]).max() < 1e-14
    assert other.name == "made"
    assert other.gm("sun") == de421.gm("sun")
    assert pickle.loads(pickle.dumps(other)).coverage == other.coverage


def test_a_file_without_orientation_says_so(files: tuple[Path, Path]) -> None:
    other = Ephemeris.open(files[0])
    with pytest.raises(LighttimeError, match=r"made carries no lunar orientation.*orientation=bpc"):
        other.libration(2455210.5, 0.0)


def test_files_that_cannot_be_read(tmp_path: Path, files: tuple[Path, Path]) -> None:
    with pytest.raises(FileError, match=r"absent\.bsp: cannot be read: No such file"):
        Ephemeris.open(tmp_path / "absent.bsp")
    (tmp_path / "text.bsp").write_text("no ephemeris at all " * 100)
    with pytest.raises(FileError, match="not an ephemeris file"):
        Ephemeris.open(tmp_path / "text.bsp")
    with pytest.raises(FileError, match="not an ephemeris file"):
        Ephemeris.open(files[1])


# -- an ephemeris of one's own -------------------------------------------------------------------


def test_fields_of_ones_own_travel(de421: Ephemeris) -> None:
    """What was not opened from a file is pickled as it is."""
    bodies, constants = dict(de421.barycentric), {"gm_sun": de421.gm("sun")}
    own = replace(de421, name="mine", barycentric=bodies, constants=constants, origin=())
    same = pickle.loads(pickle.dumps(own))
    assert same.name == "mine"
    there = same.barycentric_body("sun", 2455200.5, 0.3)[0]
    assert np.array_equal(there, de421.barycentric_body("sun", 2455200.5, 0.3)[0])
    with pytest.raises(UnknownNameError, match="did you mean sun"):
        own.barycentric_body("sunn", 2455200.5, 0.3)
