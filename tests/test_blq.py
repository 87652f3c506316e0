"""Reader of BLQ files: whole files, broken files, hostile files."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from ocean_case import AMPLITUDES_M, PHASES_DEG, ROWS

from lighttime.earth import blq
from lighttime.earth.blq import list_blq, read_blq
from lighttime.earth.loading import OceanLoading
from lighttime.errors import FileError, LighttimeError, UnknownNameError

HEADER = """\
$$ Ocean loading displacement
$$
$$ COLUMN ORDER:  M2  S2  N2  K2  K1  O1  P1  Q1  MF  MM SSA
$$
$$ ROW ORDER:
$$ AMPLITUDES (m)
$$   RADIAL
$$   TANGENTL    EW
$$   TANGENTL    NS
$$ PHASES (deg)
$$ CMC:  NO  (corr.tide centre of mass)
$$
"""
SECOND = ROWS.replace(".00352", ".01352").replace("-64.7", " 64.7")
THIRD = ROWS.replace("-151.4", "-138.1").replace(".00006", ".00600")
FILE = (
    HEADER
    + f"  ONSALA\n$$ Model A, 2009\n$$ lon/lat:   11.9264   57.3958\n{ROWS}$$\n"
    + f"  HILL TOP\n$$ Model B\n$$ CMC: YES\n{SECOND}"
    + f"  Hilltown\n{THIRD}$$ END TABLE\n"
)
SITES = ("ONSALA", "HILL TOP", "Hilltown")
LINES = FILE.splitlines(keepends=True)
ROW_LINES = [k for k, line in enumerate(LINES) if line.startswith(" ")]

generous = settings(
    max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)


@pytest.fixture
def path(tmp_path: Path) -> Path:
    return tmp_path / "stations.blq"


def write(path: Path, text: str) -> Path:
    path.write_bytes(text.encode("latin-1"))
    return path


def test_every_station_of_a_file(path: Path) -> None:
    write(path, FILE)
    assert list_blq(path) == SITES
    onsala = read_blq(path, "Onsala")
    np.testing.assert_array_equal(onsala.amplitudes_m, AMPLITUDES_M)
    np.testing.assert_array_equal(onsala.phases_deg, PHASES_DEG)
    assert onsala.source == "Model A, 2009 (stations.blq, ONSALA)"
    assert onsala.centre_of_mass is False
    top = read_blq(str(path), " hill  top ")
    assert top.amplitudes_m[0, 0] == 0.01352
    assert top.phases_deg[0, 0] == 64.7
    assert top.centre_of_mass is True
    town = read_blq(path, "HILLTOWN")
    assert town.amplitudes_m[2, 3] == 0.00600
    assert town.phases_deg[0, 5] == -138.1
    assert town.source == "(stations.blq, Hilltown)"


@pytest.mark.parametrize(
    "changed",
    [
        FILE.replace("\n", "\r\n"),
        FILE.replace("\n", "\n\n"),
        FILE.rstrip("\n"),
        FILE.replace(" -65.6 -138.1", "-165.6-138.1"),  # cells that touch: columns are fixed
        "\n".join(line for line in FILE.splitlines() if not line.startswith("$$")),
        FILE.replace("  ONSALA", "  \xc5NSALA\n$$ ONSALA\n"),
    ],
)
def test_other_spellings_of_the_same_file(path: Path, changed: str) -> None:
    write(path, changed)
    name = list_blq(path)[0]
    loading = read_blq(path, name)
    expected = PHASES_DEG.copy()
    if "-165.6" in changed:
        expected[0, 6] = -165.6
    np.testing.assert_array_equal(loading.phases_deg, expected)
    np.testing.assert_array_equal(loading.amplitudes_m, AMPLITUDES_M)


def test_absent_site_gets_near_names(path: Path) -> None:
    write(path, FILE)
    with pytest.raises(UnknownNameError, match=r"did you mean .*HILL TOP"):
        read_blq(path, "HILL TOPP")
    with pytest.raises(UnknownNameError, match="ONSALA, HILL TOP, Hilltown"):
        read_blq(path, "elsewhere")


def test_centre_of_mass_not_said(path: Path) -> None:
    write(path, FILE.replace("CMC:", "cmc"))
    assert read_blq(path, "onsala").centre_of_mass is None


ROW = ROW_LINES[3]  # of ONSALA: amplitudes south


@pytest.mark.parametrize(
    ("text", "line", "reason"),
    [
        (FILE.replace(".00086", ".0x086", 1), ROW + 1, r"'\.0x086' is no number; the amplitudes s"),
        (FILE.replace(" .00086", "", 1), ROW + 1, "10 numbers instead of 11 in the amplitudes sou"),
        (FILE.replace(" .00086", " .00086 .00001", 1), ROW + 1, "12 numbers instead of 11"),
        (FILE.replace(".00086", "   nan", 1), ROW + 1, "'nan' is no number"),
        (FILE.replace(".00086", "1_0.00", 1), ROW + 1, "'1_0.00' is no number"),
        (FILE.replace(".00086", "0.8600", 1), 13, r"ONSALA: amplitudes_m\[2, 0\] is 0\.86"),
        (FILE.replace("-64.7", "-464.7", 1), 13, r"phases_deg\[0, 0\] is -464\.7"),
        ("".join(LINES[:ROW] + LINES[ROW + 1 :]), 22, "'HILL' is no number; the phases south of O"),
        ("".join(LINES[:12] + LINES[13:]), 15, "a row of numbers where a station's name belongs"),
        ("".join(LINES[: ROW_LINES[-1]]), None, "ends where the phases south of Hilltown belong"),
        (FILE.replace("M2  S2", "S2  M2"), 3, "columns S2  M2 .*, not M2 S2"),
        (
            FILE + "  Onsala\n" + ROWS,
            len(LINES) + 1,
            r"Onsala occurs a second time \(first at line 13\)",
        ),
        (FILE + "  bell\x07\n" + ROWS, len(LINES) + 1, "unprintable"),
        (HEADER, None, "no station in it"),
        ("", None, "no station in it"),
        (FILE + " " * 600 + "\n", len(LINES) + 1, "a line of more than 512 bytes"),
    ],
)
def test_broken_file_is_refused_as_a_whole(
    path: Path, text: str, line: int | None, reason: str
) -> None:
    write(path, text)
    with pytest.raises(FileError, match=reason) as caught:
        read_blq(path, "onsala")
    assert caught.value.line == line
    assert caught.value.path == path


def test_a_broken_station_spoils_the_others(path: Path) -> None:
    write(path, "".join(LINES[: ROW_LINES[-2]]))
    for call in (list_blq, lambda p: read_blq(p, "onsala")):
        with pytest.raises(FileError, match="phases west of Hilltown"):
            call(path)


def test_file_that_cannot_be_opened(tmp_path: Path) -> None:
    with pytest.raises(FileError, match="No such file"):
        read_blq(tmp_path / "absent.blq", "x")
    with pytest.raises(FileError, match="directory"):
        list_blq(tmp_path)


def test_file_of_no_reasonable_size(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(blq, "LARGEST_FILE", 100_000)
    write(path, FILE + "$$\n" * 40_000)
    with pytest.raises(FileError, match="a file of more than 100000 bytes"):
        list_blq(path)


def truth(name: str) -> OceanLoading:
    rows = dict(zip(SITES, (ROWS, SECOND, THIRD), strict=True))[name]
    numbers = np.array([[float(cell) for cell in row.split()] for row in rows.splitlines()])
    return OceanLoading(numbers[:3], numbers[3:])


def right_or_refused(path: Path, text: str) -> None:
    """Whatever is read from a damaged file is what the whole file says."""
    write(path, text)
    for name in SITES:
        try:
            loading = read_blq(path, name)
        except LighttimeError:
            continue
        np.testing.assert_array_equal(loading.amplitudes_m, truth(name).amplitudes_m)
        np.testing.assert_array_equal(loading.phases_deg, truth(name).phases_deg)


@generous
@given(length=st.integers(0, len(FILE)))
def test_truncated_anywhere(path: Path, length: int) -> None:
    right_or_refused(path, FILE[:length])


@pytest.mark.parametrize("which", ROW_LINES)
def test_any_line_missing(path: Path, which: int) -> None:
    write(path, "".join(LINES[:which] + LINES[which + 1 :]))
    with pytest.raises(FileError):
        list_blq(path)


@pytest.mark.parametrize("which", ROW_LINES)
def test_any_line_twice(path: Path, which: int) -> None:
    write(path, "".join(LINES[: which + 1] + LINES[which:]))
    with pytest.raises(FileError):
        list_blq(path)


@generous
@given(
    line=st.sampled_from(ROW_LINES),
    cell=st.integers(0, 10),
    junk=st.text(st.characters(min_codepoint=33, max_codepoint=255), min_size=1, max_size=12),
)
def test_any_cell_not_a_number(path: Path, line: int, cell: int, junk: str) -> None:
    if len(words := LINES[line].split()) != 11:
        return
    words[cell] = f"x{junk}"
    lines = [*LINES[:line], "  " + " ".join(words) + "\n", *LINES[line + 1 :]]
    write(path, "".join(lines))
    with pytest.raises(FileError) as caught:
        list_blq(path)
    assert caught.value.line == line + 1


@generous
@given(start=st.integers(0, len(FILE)), length=st.integers(1, 400))
def test_a_piece_cut_out(path: Path, start: int, length: int) -> None:
    """A cut may join two stations, or two cells into a number: never with a wrong count."""
    text = FILE[:start] + FILE[start + length :]
    write(path, text)
    try:
        names = list_blq(path)
    except LighttimeError:
        return
    for name in names:
        loading = read_blq(path, name)
        assert loading.amplitudes_m.shape == loading.phases_deg.shape == (3, 11)


@generous
@given(data=st.binary(max_size=2000))
def test_any_bytes(path: Path, data: bytes) -> None:
    path.write_bytes(data)
    with pytest.raises(LighttimeError):
        read_blq(path, "ONSALA")


@generous
@given(data=st.binary(min_size=1, max_size=40), where=st.integers(0, len(FILE)))
def test_bytes_amid_a_file(path: Path, data: bytes, where: int) -> None:
    text = FILE.encode("latin-1")
    path.write_bytes(text[:where] + data + text[where:])
    try:
        names = list_blq(path)
    except FileError:
        return
    assert len(names) == 3
