"""What ``lighttime scales`` tells of a clock at a place, and how sure each scale is."""

from __future__ import annotations

from typing import Any, Final

from lighttime.commands import options
from lighttime.constants import DAY
from lighttime.earth import clock as earth_clock
from lighttime.earth.station import Station
from lighttime.errors import InputError
from lighttime.moon import clock as lunar_clock
from lighttime.moon.reflector import Reflector, reflector
from lighttime.timescales import Epoch
from lighttime.timescales.relation import chosen

WHERE: Final = "a station, as --station or --place, or on the Moon: an array, or X,Y,Z in metres"

SERIES_SIGMA_S: Final = 5e-9
"""Of TDB - TT by the series: rms 4 ns, 10 ns at most, from 1950 to 2050 against DE421."""


def place(where: str | None, arguments: Any) -> Station | Reflector | None:
    """The station or the lunar site that was named."""
    if where is None:
        return options.station(arguments)
    if arguments.station is not None or arguments.place is not None:
        raise InputError("--at", where, "not together with --station or --place")
    parts = where.split(",")
    if where.endswith(".toml"):
        arguments.station = where
    elif len(parts) == 4:
        arguments.place = where
    elif len(parts) == 3:
        try:
            x, y, z = (float(part) for part in parts)
        except ValueError:
            raise InputError("--at", where, WHERE) from None
        return Reflector(f"({x:.3f}, {y:.3f}, {z:.3f}) m", (x, y, z))
    else:
        return reflector(where)
    return options.station(arguments)


def sigmas(told: dict[str, Epoch], tdb: str, ut1_s: float | None) -> dict[str, float]:
    """One sigma of each scale, s, at the instant as TAI has it; 0 for what is so by definition.

    Parameters
    ----------
    told : dict of str to Epoch
    tdb : {"series", "integrated"}
    ut1_s : float or None
        Of UT1.
    """
    relation: Any = chosen(tdb)
    found = dict.fromkeys(told, 0.0)
    if ut1_s is not None:
        found["ut1"] = ut1_s
    if "tdb" in told:
        date = told["tdb"].jd1, told["tdb"].jd2
        found["tdb"] = SERIES_SIGMA_S if relation is None else float(relation.sigma_s(*date))
        found |= {scale: found["tdb"] for scale in ("tcb", "tcl") if scale in told}
    return found


def clock(where: Station | Reflector | None, told: dict[str, Epoch]) -> dict[str, Any] | None:
    """A clock at rest at a place: its rate, and what it has gained on TT since 1977."""
    if where is None or "tdb" not in told:
        return None
    if isinstance(where, Station):
        tt = told["tt"]
        rate, sigma = earth_clock.faster_than_tt(where), earth_clock.RATE_SIGMA
        gained = float(earth_clock.earth_clock_minus_tt(where, tt.jd1, tt.jd2))
        return {"on": "Earth", "rate_minus_tt": rate, "rate_sigma": sigma, "minus_tt_s": gained}
    relation: Any = chosen("integrated")
    tdb1, tdb2 = told["tdb"].jd1, told["tdb"].jd2

    def reading(days: float) -> float:
        seconds = lunar_clock.lunar_clock_minus_tt(relation, where.xyz_m, tdb1, tdb2 + days)
        return float(seconds)

    return {
        "on": "Moon",
        "rate_minus_tt": (reading(0.5) - reading(-0.5)) / DAY,
        "mean_rate_minus_tt": lunar_clock.mean_rate_minus_tt(relation, where.xyz_m),
        "rate_sigma": lunar_clock.RATE_SIGMA,
        "minus_tt_s": reading(0.0),
        "slower_than_tcl": lunar_clock.slower_than_tcl(where.xyz_m, relation.ephemeris),
    }


def told_clock(where: Station | Reflector, found: dict[str, Any]) -> list[str]:
    """The same, for people."""
    per_day = 1e6 * DAY
    lines = [
        f"clock at rest on the {found['on']}, at {where.name}",
        f"  rate against TT   {found['rate_minus_tt'] * per_day:+.6f} us/day"
        f"   one sigma {found['rate_sigma'] * per_day:.6f} us/day",
        f"  reading - TT      {found['minus_tt_s']:+.9f} s, set on 1977-01-01 0h TAI",
    ]
    if "slower_than_tcl" in found:
        lines[1] += f"   mean {found['mean_rate_minus_tt'] * per_day:+.6f} us/day"
        lines.append(f"  rate against TCL  {-found['slower_than_tcl'] * per_day:+.6f} us/day")
    return lines
