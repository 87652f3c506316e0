"""How a series of Earth orientation is told to people."""

from __future__ import annotations

from datetime import date
from typing import TYPE_CHECKING, Final

import numpy as np

from lighttime.earth.series_files import FINAL, PREDICTED, RAPID, UNKNOWN_DXDY_SIGMA_MAS

if TYPE_CHECKING:
    from lighttime.earth.series import EarthOrientation

KINDS: Final = {FINAL: "final", RAPID: "rapid", PREDICTED: "predicted"}

_MJD_OF_ORDINAL: Final = 678576


def calendar(mjd: float) -> str:
    """The date of a modified Julian date."""
    try:
        return date.fromordinal(int(np.floor(mjd)) + _MJD_OF_ORDINAL).isoformat()
    except (ValueError, OverflowError):
        return f"MJD {mjd:.1f}"


def described(series: EarthOrientation) -> str:
    """What the series holds, how far it reaches and how well it is known."""
    lines = [f"Earth orientation: {series.name}"]
    if series.constant is not None:
        ut1, xp, yp, dx, dy = series.constant
        lines += [
            f"  UT1-UTC {ut1:+.7f} s at every instant, without zonal tides",
            f'  pole x {xp:+.6f}", y {yp:+.6f}"; dX {dx:+.3f}, dY {dy:+.3f} mas',
        ]
        return "\n".join(lines)
    for code, word in KINDS.items():
        days = np.flatnonzero(series.kind == code)
        if days.size:
            k = days[-1]
            lines.append(
                f"  {word:9} {calendar(series.mjd[days[0]])} to {calendar(series.mjd[k])}, at "
                f"the end one sigma is {1e6 * series.sigma_ut1_s[k]:.0f} us in UT1, "
                f"{1e3 * series.sigma_xp_arcsec[k]:.3f} and "
                f"{1e3 * series.sigma_yp_arcsec[k]:.3f} mas in the pole"
            )
    unknown = f"zero, with one sigma of {UNKNOWN_DXDY_SIGMA_MAS} mas"
    if series.last_dxdy_mjd < series.mjd[0]:
        lines.append(f"  dX, dY    {unknown}")
    elif series.last_dxdy_mjd < series.mjd[-1]:
        lines.append(f"  dX, dY    to {calendar(series.last_dxdy_mjd)}; after that {unknown}")
    else:
        lines.append(f"  dX, dY    to {calendar(series.last_dxdy_mjd)}")
    return "\n".join(lines)
