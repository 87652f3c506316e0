"""Scales that are tied to each other by a constant offset or a constant rate."""

from __future__ import annotations

from fractions import Fraction
from typing import Final

from numpy.typing import ArrayLike

from lighttime.constants import DAY, L_B, L_G, SCALES_ORIGIN, TDB_0, TT_MINUS_TAI
from lighttime.timescales.inputs import TwoPart, date_pair
from lighttime.timescales.twopart import Pair, add, exact, multiply, plain, subtract

DAY_PAIR: Final = exact(DAY)
TT_MINUS_TAI_D: Final = exact(Fraction(repr(TT_MINUS_TAI)) / int(DAY))
_SATELLITE_MINUS_TAI_D: Final = exact(Fraction(-19, int(DAY)))
"""GPS time was UTC on 1980-01-06; Galileo's was set 13 s ahead of UTC on 1999-08-22, which is
the same offset. Source: IS-GPS-200, 3.3.4; Galileo OS SIS ICD, 5.1.2."""


def tai_to_tt(tai1: ArrayLike, tai2: ArrayLike) -> TwoPart:
    """TT = TAI + 32.184 s. Source: IAU 1991 A4."""
    return plain(add(date_pair("tai", tai1, tai2), TT_MINUS_TAI_D))


def tt_to_tai(tt1: ArrayLike, tt2: ArrayLike) -> TwoPart:
    """TAI = TT - 32.184 s. Source: IAU 1991 A4."""
    return plain(subtract(date_pair("tt", tt1, tt2), TT_MINUS_TAI_D))


def tai_to_gps(tai1: ArrayLike, tai2: ArrayLike) -> TwoPart:
    """GPS time = TAI - 19 s. Source: IS-GPS-200, 3.3.4."""
    return plain(add(date_pair("tai", tai1, tai2), _SATELLITE_MINUS_TAI_D))


def gps_to_tai(gps1: ArrayLike, gps2: ArrayLike) -> TwoPart:
    """TAI = GPS time + 19 s. Source: IS-GPS-200, 3.3.4."""
    return plain(subtract(date_pair("gps", gps1, gps2), _SATELLITE_MINUS_TAI_D))


def tai_to_gst(tai1: ArrayLike, tai2: ArrayLike) -> TwoPart:
    """Galileo system time = TAI - 19 s. Source: Galileo OS SIS ICD, 5.1.2."""
    return plain(add(date_pair("tai", tai1, tai2), _SATELLITE_MINUS_TAI_D))


def gst_to_tai(gst1: ArrayLike, gst2: ArrayLike) -> TwoPart:
    """TAI = Galileo system time + 19 s. Source: Galileo OS SIS ICD, 5.1.2."""
    return plain(subtract(date_pair("gst", gst1, gst2), _SATELLITE_MINUS_TAI_D))


_ORIGIN: Final = add(exact(SCALES_ORIGIN[0]), exact(SCALES_ORIGIN[1]))
_LG: Final = exact(L_G)
_LG_BACK: Final = exact(Fraction(repr(L_G)) / (1 - Fraction(repr(L_G))))
_LB: Final = exact(L_B)
_LB_BACK: Final = exact(Fraction(repr(L_B)) / (1 - Fraction(repr(L_B))))
_TDB_0_D: Final = exact(Fraction(repr(TDB_0)) / int(DAY))


def _stretch(date: Pair, rate: Pair) -> Pair:
    """rate * (date - 1977-01-01 0h TAI)."""
    return multiply(rate, subtract(date, _ORIGIN))


def tt_to_tcg(tt1: ArrayLike, tt2: ArrayLike) -> TwoPart:
    """TCG = TT + L_G/(1 - L_G) (TT - T0). Source: IAU 2000 B1.9."""
    tt = date_pair("tt", tt1, tt2)
    return plain(add(tt, _stretch(tt, _LG_BACK)))


def tcg_to_tt(tcg1: ArrayLike, tcg2: ArrayLike) -> TwoPart:
    """TT = TCG - L_G (TCG - T0). Source: IAU 2000 B1.9."""
    tcg = date_pair("tcg", tcg1, tcg2)
    return plain(subtract(tcg, _stretch(tcg, _LG)))


def tcb_to_tdb(tcb1: ArrayLike, tcb2: ArrayLike) -> TwoPart:
    """TDB = TCB - L_B (TCB - T0) + TDB0. Source: IAU 2006 B3."""
    tcb = date_pair("tcb", tcb1, tcb2)
    return plain(add(subtract(tcb, _stretch(tcb, _LB)), _TDB_0_D))


def tdb_to_tcb(tdb1: ArrayLike, tdb2: ArrayLike) -> TwoPart:
    """TCB, the inverse of `tcb_to_tdb`. Source: IAU 2006 B3."""
    tdb = subtract(date_pair("tdb", tdb1, tdb2), _TDB_0_D)
    return plain(add(tdb, _stretch(tdb, _LB_BACK)))
