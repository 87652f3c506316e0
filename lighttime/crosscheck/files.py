"""The report as a file: a page, JSON, or a table."""

from __future__ import annotations

import json
from dataclasses import asdict
from os import PathLike, fspath
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from lighttime.errors import FileError, InputError
from lighttime.version import __version__

if TYPE_CHECKING:
    from lighttime.crosscheck.report import Report

FORMS = (".html", ".json", ".ecsv")


def write(report: Report, path: str | PathLike[str]) -> None:
    """See `Report.write`."""
    text = rendered(report, form_of(path))
    try:
        Path(fspath(path)).write_text(text, encoding="utf-8")
    except OSError as error:
        raise FileError(fspath(path), None, f"cannot be written: {error.strerror}") from None


def form_of(path: str | PathLike[str]) -> str:
    """The form that the ending of a name says; InputError for another."""
    form = Path(fspath(path)).suffix.lower()
    if form not in FORMS:
        raise InputError("path", fspath(path), f"a name that ends in {', '.join(FORMS)}")
    return form


def rendered(report: Report, form: str) -> str:
    """The report as the text of a file of one of `FORMS`."""
    if form == ".html":
        from lighttime.crosscheck.page import page

        return page(report)
    if form == ".json":
        return json.dumps(report_json(report), indent=2, allow_nan=False) + "\n"
    return _ecsv(report)


def report_json(report: Report, rows: bool = True) -> dict[str, Any]:
    """The report as numbers, texts and lists.

    Parameters
    ----------
    report : Report
    rows : bool
        With what every range says.
    """
    ranges = report.ranges
    out: dict[str, Any] = {
        "lighttime": __version__,
        "source": ranges.source,
        "station": report.station,
        "array": report.array,
        "model": report.model,
        "quantity": ranges.quantity,
        "ranges": len(report),
        "agrees": report.agrees,
        "tolerance_ps": report.tolerance_ps,
        "summary": report.summary(),
        "difference_rms_ps": _rms(report.difference_ps),
        "difference_largest_ps": report.largest_ps,
        "residual_rms_ps": _rms(report.residual_ps),
        "sigma_stated": report.sigma_stated,
        "findings": [_plain(asdict(f)) for f in report.findings],
        "inseparable": [_plain(asdict(g)) for g in report.inseparable],
        "rest": _plain(asdict(report.rest)) | {"has_structure": report.rest.has_structure},
        "rounding": [_plain(asdict(r)) for r in report.rounding],
        "rungs": [_plain(asdict(r)) for r in report.rungs],
        "untested": dict(report.untested),
        "invisible": list(report.invisible),
        "unreadable": [u._asdict() for u in ranges.unreadable],
        "set_aside": [int(ranges.lines[i]) for i in np.flatnonzero(report.apart)],
        "repeated": report.repeated,
        "searched": report.searched,
        "notes": list(report.notes),
        "suspects": dict(report.suspects),
    }
    if rows:
        out["rows"] = {name: np.asarray(v).tolist() for name, v in columns(report).items()}
    return out


def columns(report: Report) -> dict[str, Any]:
    """What every range says, by name and unit."""
    ranges, seen = report.ranges, report.circumstances
    table: dict[str, Any] = {
        ranges.row_word: ranges.lines,
        "epoch_utc": ranges.when.isoformat(12),
        "difference_ps": report.difference_ps,
        "residual_ps": report.residual_ps,
        "sigma_ps": report.sigma_ps,
        "elevation_deg": seen.elevation_deg,
        "hour_angle_h": seen.hour_angle_h,
        "phase_deg": seen.phase_deg,
        "set_aside": report.apart,
    }
    for name in ("station", "array"):
        if getattr(ranges, name) is not None:
            table[name] = getattr(ranges, name)
    for finding in report.findings:
        table[f"effect_{finding.name}_ps"] = finding.amplitude * report.signatures[finding.name]
    return table


def _ecsv(report: Report) -> str:
    from io import StringIO

    from astropy.table import Table

    units = {"_ps": "ps", "_deg": "deg", "_h": "h"}
    table = Table()
    for name, values in columns(report).items():
        table[name] = values
        for ending, unit in units.items():
            if name.endswith(ending):
                table[name].unit = unit
    table.meta["report"] = report_json(report, rows=False)
    stream = StringIO()
    table.write(stream, format="ascii.ecsv")
    return stream.getvalue()


def _plain(value: Any) -> Any:
    """Tuples as lists, numbers of numpy as plain ones, what is not finite as text."""
    if isinstance(value, dict):
        return {k: _plain(v) for k, v in value.items()}
    if isinstance(value, (list, tuple)):
        return [_plain(v) for v in value]
    if isinstance(value, np.generic):
        value = value.item()
    if isinstance(value, float) and not np.isfinite(value):
        return str(value)
    return value


def _rms(values: Any) -> float:
    return float(np.sqrt(np.mean(np.square(values))))
