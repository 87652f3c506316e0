"""TCL, the Moon's coordinate time: what TCG is for the Earth."""

from __future__ import annotations

from typing import Final

from numpy.typing import ArrayLike

from lighttime.constants import SCALES_ORIGIN
from lighttime.errors import InputError
from lighttime.timescales.inputs import Relation, TwoPart, date_pair
from lighttime.timescales.twopart import (
    Pair,
    add,
    divide,
    exact,
    multiply,
    pair,
    plain,
    subtract,
)
from lighttime.timescales.uniform import DAY_PAIR, tcb_to_tdb

TCL_RATE: Final = 1.4825362e-8
"""Rate taken out of TCB - TCL before it is kept as a series: near its mean, and no constant of
nature or of a resolution. What is left is small, and keeps its digits."""

_ORIGIN: Final = add(exact(SCALES_ORIGIN[0]), exact(SCALES_ORIGIN[1]))
_RATE: Final = exact(TCL_RATE)


def _needed(relation: Relation | None) -> Relation:
    if relation is None:
        raise InputError("tdb", "series", '"integrated" or a TimeEphemeris, which TCL needs')
    return relation


def _tcb_minus_tcl(tcb: Pair, relation: Relation) -> Pair:
    periodic = relation.tcb_minus_tcl_periodic(*tcb_to_tdb(*tcb))
    return add(multiply(_RATE, subtract(tcb, _ORIGIN)), divide(pair(periodic), DAY_PAIR))


def tcb_to_tcl(tcb1: ArrayLike, tcb2: ArrayLike, relation: Relation | None) -> TwoPart:
    """TCL at the centre of the Moon, at an instant of TCB.

    Parameters
    ----------
    tcb1, tcb2 : float or array
        Julian date, TCB, in two parts.
    relation : TimeEphemeris
        TCB - TCL, integrated.

    Notes
    -----
    Source: IAU 2024 II (from memory), with the form of IAU 2000 B1.5 for the Moon.
    """
    known = _needed(relation)
    tcb = date_pair("tcb", tcb1, tcb2)
    return plain(subtract(tcb, _tcb_minus_tcl(tcb, known)))


def tcl_to_tcb(tcl1: ArrayLike, tcl2: ArrayLike, relation: Relation | None) -> TwoPart:
    """TCB from TCL, the inverse of `tcb_to_tcl`.

    TCB - TCL grows by 1.5e-8 of time: each step towards its argument leaves so much of what the
    one before left, which was some tens of seconds.
    """
    known = _needed(relation)
    tcl = date_pair("tcl", tcl1, tcl2)
    tcb = tcl
    for _ in range(3):
        tcb = add(tcl, _tcb_minus_tcl(tcb, known))
    return plain(tcb)
