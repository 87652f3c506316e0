"""Where the Sun and the Moon are, from the series of ERFA: an opinion from outside for tests."""

from __future__ import annotations

import erfa
import numpy as np


def sun_and_moon(tt: np.ndarray, tt_minus_ut1_s: float = 0.0) -> tuple[np.ndarray, np.ndarray]:
    """Geocentric Sun and Moon, (3, n), metres, Earth-fixed but for nutation and polar motion."""
    zero = np.zeros_like(tt)
    sidereal = erfa.gmst06(tt, zero - tt_minus_ut1_s / 86400.0, tt, zero)
    to_date = erfa.rxr(erfa.rz(sidereal, np.eye(3)), erfa.pmat06(tt, zero))
    au = 149597870700.0
    sun = -au * erfa.epv00(tt, zero)[0]["p"]
    moon = au * erfa.moon98(tt, zero)["p"]
    return erfa.rxp(to_date, sun).T, erfa.rxp(to_date, moon).T
