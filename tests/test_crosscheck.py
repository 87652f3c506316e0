"""The cross-check from end to end: other models really computed, and the report in every form."""

from __future__ import annotations

import importlib
import json
import subprocess
import sys
from dataclasses import replace
from html.parser import HTMLParser
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from astropy.table import Table

import lighttime as lt
from lighttime.cli import main
from lighttime.crosscheck.report import Report
from lighttime.crosscheck.text import sized, with_sigma
from lighttime.crosscheck.ticks import dates, numbers

HILLTOP = lt.Station.from_geodetic(
    "Hilltop", 46.2, 7.1, 2310.0, velocity_m_per_yr=(-0.014, 0.018, 0.011)
)
ARRAYS = ("Apollo 11", "Lunokhod 2")
OURS = lt.Model()
COUNT = 40


def _epochs() -> tuple[Any, Any, Any]:
    """Epochs of three months at which the Moon is up, the array of each, and the weather."""
    rng = np.random.default_rng(12)
    when = lt.Epoch(2459100.5 + rng.integers(0, 90, 500), rng.uniform(0.0, 1.0, 500), "utc")
    high = OURS.round_trip(when, HILLTOP, lt.reflector("Apollo 11")).uplink.elevation_deg > 25.0
    when = when[high][:COUNT]
    weather = np.stack(
        [rng.normal(770.0, 5.0, COUNT), rng.normal(270.0, 8.0, COUNT), rng.uniform(0.1, 0.9, COUNT)]
    )
    return when, np.array(ARRAYS)[rng.integers(0, 2, COUNT)], weather


WHEN, which, AIR = _epochs()


def other(
    model: lt.Model = OURS, station: lt.Station = HILLTOP, noise_ps: float = 1.0, **changed: Any
) -> dict[str, Any]:
    """What another program with some choices says."""
    noise = np.random.default_rng(7).normal(0.0, noise_ps * 1e-12, COUNT)
    seconds = np.empty(COUNT)
    when = changed.pop("when", WHEN)
    settings = {"tag": "transmit"} | changed
    for name in ARRAYS:
        rows = which == name
        settings["weather"] = lt.Weather(*AIR[:, rows])
        seconds[rows] = model.round_trip(
            when[rows], station, lt.reflector(name), **settings
        ).seconds
    return {
        "epoch_utc": WHEN.isoformat(12),
        "round_trip_s": seconds + noise,
        "array": which,
        "pressure_hpa": AIR[0],
        "temperature_k": AIR[1],
        "relative_humidity": AIR[2],
    }


def found(report: Report) -> dict[str, float | None]:
    return {f.name: f.exact for f in report.findings}


def check(**choices: Any) -> Report:
    return lt.crosscheck(other(**choices), HILLTOP, None)


# -- choices really made ---------------------------------------------------------------------------


@pytest.fixture(scope="module")
def two_terms() -> Report:
    return check(model=lt.Model(omit=("solid_earth_tide", "pole_tide")))


def test_terms_left_out(two_terms: Report) -> None:
    assert found(two_terms) == {"solid_earth_tide": 1.0, "pole_tide": 1.0}
    assert 0.7 < two_terms.rest.rms_ps < 1.2
    assert not two_terms.rest.has_structure
    assert not two_terms.agrees


def test_nothing_to_find() -> None:
    report = check()
    assert not report.findings
    assert not report.inseparable
    assert report.agrees
    assert "nothing significant was found" in report.summary()


def test_a_large_choice_is_applied_and_small_ones_are_found_behind_it() -> None:
    # 37 s of the Earth's rotation change the tide by 15 ps: the effects do not add up
    report = check(model=lt.Model(omit=("lunar_tide",)), when=WHEN.shift(-37.0))
    assert found(report) == {"epoch_as_tai": 1.0, "lunar_tide": 1.0}
    assert report.rest.rms_ps < 1.3


def test_tag_of_another_event() -> None:
    report = check(tag="receive")
    assert found(report) == {"epoch_at_receive": 1.0}


def test_offset_of_the_station_and_gamma() -> None:
    up = np.array(HILLTOP.up) * 0.030
    moved = replace(HILLTOP, xyz_m=tuple(np.add(HILLTOP.xyz_m, up).tolist()))
    (finding,) = check(station=moved).findings
    assert finding.name == "hilltop_up"
    assert finding.fitted == pytest.approx(30.0, abs=max(4.0 * finding.sigma, 0.3))


def test_what_is_not_on_the_list() -> None:
    table = other()
    hours = np.mod(WHEN.jd2, 1.0) * 24.0
    table["round_trip_s"] = table["round_trip_s"] + 40e-12 * np.sign(np.sin(hours * 2.0))
    report = lt.crosscheck(table, HILLTOP, None)
    assert report.rest.rms_ps > 10.0
    assert len(report.findings) <= 1


def test_a_row_that_stands_apart() -> None:
    table = other(model=lt.Model(omit=("pole_tide",)))
    table["round_trip_s"][17] += 1e-6
    report = lt.crosscheck(table, HILLTOP, None)
    assert found(report) == {"pole_tide": 1.0}
    assert np.flatnonzero(report.apart).tolist() == [17]
    assert "1 rows stand apart" in str(report)
    assert report.residual_ps[17] == pytest.approx(1e6, rel=0.01)


def test_one_range_and_repeated_epochs() -> None:
    table = other(model=lt.Model(omit=("solid_earth_tide",)))
    one = lt.crosscheck({k: v[:1] for k, v in table.items()}, HILLTOP, None)
    assert len(one) == 1
    assert not one.findings
    assert "One range differs" in one.summary()
    assert "too few for a search" in one.summary()
    twice = {k: np.concatenate([v, v]) for k, v in table.items()}
    report = lt.crosscheck(twice, HILLTOP, None)
    assert report.repeated == COUNT
    assert f"{COUNT} rows repeat an epoch" in str(report)


def test_half_of_a_round_trip_and_one_leg() -> None:
    table = other()
    halves = {k: v for k, v in table.items() if k != "round_trip_s"}
    report = lt.crosscheck(
        halves | {"half_round_trip_s": 0.5 * table["round_trip_s"]}, HILLTOP, None
    )
    assert not report.findings
    ups = np.empty(COUNT)
    for name in ARRAYS:
        rows = which == name
        weather = lt.Weather(*AIR[:, rows])
        ups[rows] = lt.Model(omit=("sun_gravity",)).one_way(
            WHEN[rows], HILLTOP, lt.reflector(name), weather=weather
        ).seconds  # fmt: skip
    report = lt.crosscheck(halves | {"uplink_s": ups}, HILLTOP, None)
    assert found(report) == {"sun_gravity": 1.0}


def test_stated_noise_and_tolerance() -> None:
    report = lt.crosscheck(other(), HILLTOP, None, sigma_ps=1.0, tolerance_ps=5.0)
    assert report.sigma_stated
    assert report.agrees == (report.largest_ps <= 5.0)
    strict = lt.crosscheck(other(), HILLTOP, None, sigma_ps=0.25, tolerance_ps=0.01)
    assert not strict.agrees
    assert any("times what was stated" in note for note in strict.notes)


def test_inseparable_choices_come_with_advice() -> None:
    # seen from one station only, x_p and the height of the station are the same but for a constant
    report = check(station=replace(HILLTOP, xyz_m=tuple(np.add(HILLTOP.xyz_m, [0.02, 0.0, 0.0]))))
    assert report.findings
    groups = [g for g in report.inseparable if g.advice]
    assert groups
    assert any("second station" in advice for g in groups for advice in g.advice)
    for group in groups:
        assert len(group.rivals) == len(group.odds) == len(group.apart_sigma)
        assert set(group.findings) <= set(group.names)
        assert all(0.0 <= v <= 1.0 for v in group.singular_value)


def test_another_ephemeris() -> None:
    default = lt.Ephemeris.default()
    constants = dict(default.constants) | {"gm_sun": default.gm("sun") * 1.001}
    theirs = replace(default, name="DE999", constants=constants, origin=())
    table = other(model=lt.Model(ephemeris=theirs))
    report = lt.crosscheck(table, HILLTOP, None, ephemerides=[theirs])
    assert found(report) == {"ephemeris_de999": 1.0}


def test_two_stations() -> None:
    valley = lt.Station.from_geodetic("Valley", 40.0, 12.0, 300.0)
    moved = replace(valley, xyz_m=tuple(np.add(valley.xyz_m, 0.1 * valley.up).tolist()))
    first, second = other(), other(station=moved)
    table = {k: np.concatenate([first[k], second[k]]) for k in first}
    table["station"] = np.array(["Hilltop"] * COUNT + ["valley"] * COUNT)
    report = lt.crosscheck(table, [HILLTOP, valley], None)
    (finding,) = report.findings
    assert finding.name == "valley_up"
    assert finding.fitted == pytest.approx(100.0, abs=1.5)
    assert report.station == "Hilltop, Valley"


# -- rungs -----------------------------------------------------------------------------------------


def test_the_first_rung_that_departs() -> None:
    wrong = replace(OURS, omit=("subdaily_rotation",))
    rows = which == ARRAYS[0]
    weather = lt.Weather(*AIR[:, rows])
    answer = wrong.round_trip(WHEN[rows], HILLTOP, lt.reflector(ARRAYS[0]), weather=weather)
    sheet = answer.worksheet()
    table = {
        "epoch_utc": WHEN[rows].isoformat(12),
        "round_trip_s": answer.seconds,
        "t1.tdb_minus_tt_s": sheet["t1.tdb_minus_tt_s"],
        "t1.x_rad": sheet["t1.x_rad"],
        "t1.era_rad": sheet["t1.era_rad"] + 2.0 * np.pi,
        "t1.gcrs_m.x": sheet["t1.gcrs_m"][0],
        "t1.tt_jd": sheet["t1.tt1"] + sheet["t1.tt2"],
        "uplink.sun_s": sheet["uplink.sun_s"],
    }
    report = lt.crosscheck(table, HILLTOP, ARRAYS[0], weather=weather)
    order = [r.name for r in report.rungs]
    assert order.index("t1.tt_jd") < order.index("t1.x_rad") < order.index("t1.era_rad")
    departing = [r.name for r in report.rungs if r.departs]
    assert departing[0] == "t1.era_rad"
    assert "The first rung that departs is t1.era_rad." in report.summary()
    assert found(report) == {"subdaily_rotation": 1.0}
    with pytest.raises(lt.UnknownNameError, match=r"t1\.gcrs_m"):
        lt.crosscheck(table | {"t1.gcrs_km.x": sheet["t1.x_rad"]}, HILLTOP, ARRAYS[0])


# -- the report ------------------------------------------------------------------------------------


def test_printed_report(two_terms: Report) -> None:
    text = str(two_terms)
    assert "1. tide of the solid Earth left out   [solid_earth_tide]" in text
    assert "look for: the displacement of the station by the solid tide" in text
    assert "probability of a chance find among" in text
    assert max(len(line) for line in text.splitlines()) < 125


class Page(HTMLParser):
    """Tags, and whatever would be fetched."""

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.fetched: list[str] = []
        self.charts = 0

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        if tag != "meta":
            self.open.append(tag)
        self.charts += tag == "svg" and ("class", "chart") in attrs
        self.fetched += [v for k, v in attrs if k in ("src", "href", "data") and v is not None]
        assert tag not in ("script", "link", "img", "iframe")

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        assert tag in ("path", "rect")

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag


def test_page_is_complete_in_itself(two_terms: Report, tmp_path: Path) -> None:
    two_terms.write(tmp_path / "report.html")
    text = (tmp_path / "report.html").read_text(encoding="utf-8")
    page = Page()
    page.feed(text)
    assert not page.open
    assert not page.fetched
    assert page.charts == 6
    assert "url(" not in text
    assert "@import" not in text
    assert "http" not in text
    assert "tide of the solid Earth left out" in text


def test_what_others_write_does_not_get_into_the_page(tmp_path: Path) -> None:
    table = other()
    named = replace(HILLTOP, name="<script>alert(1)</script>")
    report = lt.crosscheck(table, named, None)
    report.write(tmp_path / "report.html")
    assert "<script" not in (tmp_path / "report.html").read_text(encoding="utf-8")


def test_json_and_ecsv(two_terms: Report, tmp_path: Path) -> None:
    two_terms.write(tmp_path / "report.json")
    told = json.loads((tmp_path / "report.json").read_text(encoding="utf-8"))
    assert [f["name"] for f in told["findings"]] == ["solid_earth_tide", "pole_tide"]
    assert len(told["rows"]["residual_ps"]) == COUNT
    assert told["agrees"] is False
    two_terms.write(tmp_path / "report.ecsv")
    table = Table.read(tmp_path / "report.ecsv", format="ascii.ecsv")
    np.testing.assert_allclose(table["difference_ps"], two_terms.difference_ps)
    effects = table["effect_solid_earth_tide_ps"] + table["effect_pole_tide_ps"]
    np.testing.assert_allclose(table["difference_ps"] - effects, two_terms.residual_ps, atol=1e-9)
    assert table["difference_ps"].unit == "ps"
    assert table.meta["report"]["findings"][0]["name"] == "solid_earth_tide"
    with pytest.raises(lt.InputError, match=r"\.html, \.json, \.ecsv"):
        two_terms.write(tmp_path / "report.pdf")
    with pytest.raises(lt.FileError, match="cannot be written"):
        two_terms.write(tmp_path / "none" / "report.json")


def test_plot(two_terms: Report) -> None:
    pytest.importorskip("matplotlib")
    figure = two_terms.plot()
    assert len(figure.axes) == 16


def test_numbers_for_people() -> None:
    assert with_sigma(12.3456, 0.0123) == "12.346 +- 0.012"
    assert with_sigma(12.3, np.inf) == "12.3"
    assert sized(1e6) == "1 000 000 ps rms (150 m one-way)"
    assert [label for _, label in numbers(0.0, 1e-3, 4)][:2] == ["0", "0.00025"]
    assert numbers(1.0, 1.0) == [(1.0, "1")]
    assert [label for _, label in dates(59100.0, 59104.0, 5)][:2] == ["8 Sep", "9 Sep"]
    assert dates(50000.0, 60000.0, 6)[0][1] == "2000"


# -- names and arguments ---------------------------------------------------------------------------


def test_the_name_at_the_front_door_stays_a_function() -> None:
    for name in ("tables", "report", "suspects", "suspects.time", "run"):
        importlib.import_module(f"lighttime.crosscheck.{name}")
        assert callable(lt.crosscheck)
    code = (
        "import lighttime.crosscheck, lighttime.crosscheck.tables, lighttime as lt, sys;"
        "from lighttime.crosscheck.report import Report;"
        "from lighttime.crosscheck import suspects;"
        "assert lt.crosscheck.__name__ == 'crosscheck';"
        "assert not {'astropy', 'matplotlib', 'mpmath', 'yaml'} & set(sys.modules)"
    )
    subprocess.run([sys.executable, "-c", code], check=True)


def test_importing_the_library_does_not_load_the_cross_check() -> None:
    code = (
        "import lighttime, sys;"
        "assert callable(lighttime.crosscheck);"
        "assert 'lighttime.crosscheck.run' not in sys.modules"
    )
    subprocess.run([sys.executable, "-c", code], check=True)


@pytest.mark.parametrize(
    ("changed", "words"),
    [
        ({"station": None}, "station is None"),
        ({"station": [HILLTOP, replace(HILLTOP, name="Valley")]}, "a column 'station'"),
        ({"reflector": "Apollo 12"}, "did you mean Apollo 1"),
        ({"tag": "sent"}, "tag is 'sent'"),
        ({"model": "DE430"}, "model is 'DE430'"),
        ({"weather": 770.0}, "weather is 770.0"),
        ({"sigma_ps": 0.0}, "sigma_ps"),
        ({"tolerance_ps": -1.0}, "tolerance_ps is -1.0"),
        ({"most": 0}, "most is 0"),
        ({"chance": 1.0}, "chance is 1.0"),
        ({"wavelength_nm": 5.32}, "wavelength_nm is 5.32"),
        ({"ephemerides": ["de430.bsp"]}, "ephemerides is 'de430.bsp'"),
        ({"columns": {"range": "x"}}, "columns is 'range'"),
    ],
)
def test_arguments_that_do_not_do(changed: dict[str, Any], words: str) -> None:
    arguments: dict[str, Any] = {"station": HILLTOP, "reflector": None} | changed
    with pytest.raises(lt.InputError) as error:
        lt.crosscheck(other(), **arguments)
    assert words in str(error.value)


def test_rows_that_ours_cannot_answer() -> None:
    table = {k: v[:6].copy() for k, v in other().items()}
    table["epoch_utc"] = table["epoch_utc"].astype(object)
    table["epoch_utc"][1] = "2199-01-01T00:00:00"
    table["epoch_utc"][3] = "2080-01-01T00:00:00"
    night = lt.Epoch(2459105.5, np.linspace(0.0, 0.999, 200), "utc")
    low = OURS.round_trip(night, HILLTOP, lt.reflector(str(which[4]))).uplink.elevation_deg < -5.0
    table["epoch_utc"][4] = night[low][0].isoformat(12)
    table["round_trip_s"][4] = OURS.round_trip(
        night[low][0], HILLTOP, lt.reflector(str(which[4]))
    ).seconds
    with pytest.raises(lt.InputError) as error:
        lt.crosscheck(table, HILLTOP, None)
    assert "row 1" in str(error.value)
    report = lt.crosscheck(table, HILLTOP, None, skip_unreadable=True)
    reasons = {u.line: u.reason for u in report.ranges.unreadable}
    assert reasons.keys() == {1, 3, 4}
    assert "covers" in reasons[3]
    assert "elevation" in reasons[4]


# -- the command -----------------------------------------------------------------------------------


@pytest.fixture
def csv_file(tmp_path: Path) -> Path:
    table = other(model=lt.Model(omit=("station_contraction",)), noise_ps=0.1)
    path = tmp_path / "other.csv"
    rows = zip(*(np.asarray(v).tolist() for v in table.values()), strict=True)
    lines = [",".join(table), *(",".join(map(repr, row)).replace("'", "") for row in rows)]
    path.write_text("\n".join(lines) + "\n")
    return path


PLACE = "Hilltop,46.2,7.1,2310"


def test_command(csv_file: Path, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    page = tmp_path / "why.html"
    command = ["crosscheck", str(csv_file), "--place", PLACE, "--quiet"]
    assert main([*command, "--tolerance-ps", "50", "--report", str(page)]) == 1
    out = capsys.readouterr().out
    assert "scale and contraction of the station's geocentric vector left out" in out
    assert "The models do not agree within 50 ps." in out
    assert page.read_text(encoding="utf-8").startswith("<!doctype html>")
    assert main([*command, "--report", str(page)]) == 2
    assert "is left alone without --overwrite" in capsys.readouterr().err
    assert main([*command, "--json", "--tolerance-ps", "1e6"]) == 0
    told = json.loads(capsys.readouterr().out)
    assert told["agrees"] is True
    assert "station_contraction" in {f["name"] for f in told["findings"]}


@pytest.mark.parametrize(
    ("options", "words"),
    [
        (["--place", PLACE, "--column", "round_trip_s"], "OURS=THEIRS"),
        (["--place", PLACE, "--column", "round_trip_s=tof"], "tof"),
        (["--place", PLACE, "--report", "why.txt"], ".html, .json, .ecsv"),
        ([], "--station is None"),
    ],
)
def test_command_on_bad_input(
    csv_file: Path, options: list[str], words: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["crosscheck", str(csv_file), "--quiet", *options]) == 2
    assert words in capsys.readouterr().err


def test_command_on_unreadable_rows(csv_file: Path, capsys: pytest.CaptureFixture[str]) -> None:
    with csv_file.open("a") as file:
        file.write("2020-13-01T00:00:00,2.5,Apollo 11,770,270,0.3\n")
    assert main(["crosscheck", str(csv_file), "--place", PLACE, "--quiet"]) == 2
    assert "line 42: epoch_utc is '2020-13-01T00:00:00'" in capsys.readouterr().err
    command = ["crosscheck", str(csv_file), "--place", PLACE, "--quiet", "--skip-unreadable"]
    assert main(command) == 1
    assert "left out: line 42" in capsys.readouterr().out


# -- the guide -------------------------------------------------------------------------------------


def test_the_guide_lists_every_suspect() -> None:
    from lighttime.crosscheck.suspects import CHOICES

    guide = Path(__file__).parent.parent / "docs" / "crosscheck.md"
    text = guide.read_text(encoding="utf-8")
    assert [s.name for s in CHOICES if f"| `{s.name}` | {s.says} |" not in text] == []
