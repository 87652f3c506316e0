"""What the figures of a report show, whoever draws them."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from lighttime.constants import MJD_ZERO
from lighttime.crosscheck.svg import Axis
from lighttime.crosscheck.ticks import dates, numbers

if TYPE_CHECKING:
    from lighttime.crosscheck.report import Report


def axes(report: Report) -> tuple[Axis, ...]:
    """Time, hour angle, elevation, phase of the Moon."""
    when = report.ranges.when
    mjd = (when.jd1 - MJD_ZERO) + when.jd2
    seen = report.circumstances
    return (
        Axis("time (UTC)", mjd, dates(float(np.min(mjd)), float(np.max(mjd)))),
        _numbered("hour angle, h", seen.hour_angle_h),
        _numbered("elevation, deg", seen.elevation_deg),
        Axis(
            "elongation of the Moon, deg (0 new, 180 full)",
            seen.phase_deg,
            [(float(d), str(d)) for d in range(0, 361, 60)],
        ),
    )


def _numbered(name: str, values: Any) -> Axis:
    return Axis(name, values, numbers(float(np.min(values)), float(np.max(values))))


def kinds(report: Report) -> tuple[list[str], Any]:
    """Names of the arrays (and "set aside"), and which of them each row belongs to."""
    names = report.array.split(", ")
    if report.ranges.array is None or len(names) == 1:
        number = np.zeros(len(report), dtype=int)
        names = names[:1]
    else:
        plain = ["".join(c for c in n.lower() if c.isalnum()) for n in names]
        theirs = [
            "".join(c for c in str(n).lower() if c.isalnum())
            for n in np.unique(report.ranges.array)
        ]
        place = {n: plain.index(n) if n in plain else 0 for n in theirs}
        given = [
            "".join(c for c in str(n).lower() if c.isalnum()) for n in report.ranges.array.tolist()
        ]
        number = np.array([place[n] for n in given], dtype=int)
    if report.apart.any():
        names = [*names, "set aside"]
        number = np.where(report.apart, len(names) - 1, number)
    return names, number
