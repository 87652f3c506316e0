"""Which column of a table is what: a short list of our own, or what the user says.

| name | what it is |
| --- | --- |
| ``epoch``, ``epoch_utc``, ``epoch_tai``, ... | the tagged instant: calendar text, time object |
| ``jd_utc``, ``mjd_utc``, ``jd_tt``, ... | the same as a (modified) Julian date, with all digits |
| ``scale`` | the time scale of the epoch in this row |
| ``round_trip_s`` | from transmission to reception, by the clock of the station |
| ``half_round_trip_s`` | half of that |
| ``uplink_s``, ``downlink_s`` | one leg, in TDB |
| ``sigma_s`` | one sigma of the range in this row |
| ``station``, ``array`` | names |
| ``tag`` | ``transmit``, ``bounce`` or ``receive`` |
| ``pressure_hpa``, ``temperature_k``, ``relative_humidity`` | weather (also ``temperature_c``, \
``humidity_percent``) |
| ``wavelength_nm`` | of the laser |
| ``t1.era_rad``, ``term.clock_s``, ... | a rung of the worksheet, by its name there |

Ranges and sigmas end in their unit: ``_s``, ``_ms``, ``_us``, ``_ns``, ``_ps``, ``_fs``, ``_m``,
``_km``, ``_mm`` (a length is light time times c). ``light_time`` and ``two_way`` are other words
for ``round_trip``, ``reflector`` for ``array``; what `lighttime range` writes is recognised.
Capitals, spaces and hyphens do not matter.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from fractions import Fraction
from typing import Final, Literal

from lighttime.errors import InputError, UnknownNameError
from lighttime.timescales import SCALES

C: Final = 299_792_458

UNITS: Final[Mapping[str, Fraction]] = {
    "s": Fraction(1),
    "ms": Fraction(1, 10**3),
    "us": Fraction(1, 10**6),
    "ns": Fraction(1, 10**9),
    "ps": Fraction(1, 10**12),
    "fs": Fraction(1, 10**15),
    "m": Fraction(1, C),
    "km": Fraction(1000, C),
    "mm": Fraction(1, 1000 * C),
}
"""Seconds in each unit of a range."""

QUANTITIES: Final[Mapping[str, str]] = {
    "round_trip": "round_trip",
    "light_time": "round_trip",
    "two_way": "round_trip",
    "half_round_trip": "half_round_trip",
    "uplink": "uplink",
    "uplink_tdb": "uplink",
    "downlink": "downlink",
    "downlink_tdb": "downlink",
}
"""Words for what is compared, in the order in which they are preferred."""

PLAIN: Final[Mapping[str, str]] = {
    "scale": "scale",
    "station": "station",
    "array": "array",
    "reflector": "array",
    "tag": "tag",
    "pressure_hpa": "pressure_hpa",
    "temperature_k": "temperature_k",
    "temperature_c": "temperature_c",
    "relative_humidity": "relative_humidity",
    "humidity_percent": "humidity_percent",
    "wavelength_nm": "wavelength_nm",
}

EpochForm = Literal["calendar", "jd", "mjd"]


@dataclass(frozen=True)
class Layout:
    """Where things are in a table: names of its columns.

    Attributes
    ----------
    epoch : str
    epoch_form : {"calendar", "jd", "mjd"}
    epoch_scale : str
    value : str
    quantity : {"round_trip", "half_round_trip", "uplink", "downlink"}
    unit : Fraction
        Seconds in a unit of the values.
    sigma : str or None
    sigma_unit : Fraction
    others : mapping of str to str
        Our name of each other column that is used, and its own.
    rungs : mapping of str to (str, Fraction)
        Columns that hold a rung of the worksheet: its name, and the factor to its unit.
    ignored : tuple of str
    """

    epoch: str
    epoch_form: EpochForm
    epoch_scale: str
    value: str
    quantity: str
    unit: Fraction
    sigma: str | None = None
    sigma_unit: Fraction = Fraction(1)
    others: Mapping[str, str] = field(default_factory=dict)
    rungs: Mapping[str, tuple[str, Fraction]] = field(default_factory=dict)
    ignored: tuple[str, ...] = ()


def plain(name: str) -> str:
    """A name of a column without differences that do not matter.

    Examples
    --------
    >>> plain(" Round-trip PS")
    'round_trip_ps'
    """
    return str(name).strip().lower().replace(" ", "_").replace("-", "_")


def layout(
    names: Iterable[str],
    given: Mapping[str, str] | None = None,
    units: Mapping[str, str] | None = None,
) -> Layout:
    """Find out what is where.

    Parameters
    ----------
    names : iterable of str
        The columns.
    given : mapping of str to str, optional
        Our name of a column, and the name it has in this table:
        ``{"epoch_utc": "T0", "round_trip_ns": "tof"}``. Goes before what is recognised.
    units : mapping of str to str, optional
        Units that the table itself states, by column.

    Raises
    ------
    InputError
        If there is no column of epochs or of ranges.
    UnknownNameError
        If a given name is not on the list, or a given column is not in the table.

    Examples
    --------
    >>> found = layout(["When", "tof"], {"epoch_tai": "When", "round_trip_us": "tof"})
    >>> found.epoch_scale, found.quantity, found.unit
    ('tai', 'round_trip', Fraction(1, 1000000))
    """
    columns = list(names)
    known = _said(columns, given or {}) | _recognised(columns, units or {}, given or {})
    epochs = {k: v for k, v in known.items() if _epoch(k)}
    values = {k: v for k, v in known.items() if _value(k)}
    if not epochs:
        raise InputError("columns", tuple(columns), "one of epochs, as epoch_utc or mjd_utc")
    if not values:
        ambiguous = [c for c in columns if plain(c).startswith("one_way")]
        hint = (
            f"; {ambiguous[0]!r} may be half_round_trip_s, uplink_s or downlink_s"
            if ambiguous
            else ""
        )
        raise InputError(
            "columns", tuple(columns), f"one of ranges, as round_trip_s or round_trip_ns{hint}"
        )
    epoch_key, epoch_column = next(iter(epochs.items()))
    order = list(QUANTITIES)
    value_key = min(values, key=lambda k: order.index(_value(k)[0]))  # type: ignore[index]
    word, unit = _value(value_key)  # type: ignore[misc]
    form, scale = _epoch(epoch_key)  # type: ignore[misc]
    sigma_key = next((k for k in known if _sigma(k)), None)
    rungs = {v: (k, Fraction(1)) for k, v in known.items() if _is_rung(k)}
    for key, column in values.items():
        leg, leg_unit = _value(key)  # type: ignore[misc]
        if key != value_key and QUANTITIES[leg] in ("uplink", "downlink"):
            rungs[column] = (f"{QUANTITIES[leg]}.seconds", leg_unit)
    used = {epoch_column, values[value_key], *rungs, *(known[k] for k in known if k in PLAIN)}
    if sigma_key is not None:
        used.add(known[sigma_key])
    return Layout(
        epoch=epoch_column,
        epoch_form=form,
        epoch_scale=scale,
        value=values[value_key],
        quantity=QUANTITIES[word],
        unit=unit,
        sigma=None if sigma_key is None else known[sigma_key],
        sigma_unit=Fraction(1) if sigma_key is None else _sigma(sigma_key) or Fraction(1),
        others={PLAIN[k]: v for k, v in known.items() if k in PLAIN},
        rungs=rungs,
        ignored=tuple(c for c in columns if c not in used),
    )


def _said(columns: list[str], given: Mapping[str, str]) -> dict[str, str]:
    found = {}
    for ours, theirs in given.items():
        key = plain(ours)
        if not (_epoch(key) or _value(key) or _sigma(key) or key in PLAIN or _is_rung(key)):
            listed = ("epoch_utc", "mjd_utc", "round_trip_s", "uplink_s", "sigma_ps", *PLAIN)
            raise UnknownNameError("columns", ours, listed)
        if theirs not in columns:
            raise UnknownNameError(f"columns[{ours!r}]", theirs, columns)
        found[key] = theirs
    return found


def _recognised(
    columns: list[str], units: Mapping[str, str], given: Mapping[str, str]
) -> dict[str, str]:
    found: dict[str, str] = {}
    taken = set(given.values())
    for column in columns:
        if column in taken:
            continue
        key = plain(column)
        unit = units.get(column, "")
        if unit in UNITS and not key.endswith(f"_{unit}") and f"{key}_{unit}" not in found:
            key = f"{key}_{unit}"
        if key.startswith("term_") and key.endswith("_s"):
            key = f"term.{key.removeprefix('term_')}"
        if (_epoch(key) or _value(key) or _sigma(key) or key in PLAIN or _is_rung(key)) and not (
            key in given or key in found
        ):
            found[key] = column
    return found


def _epoch(key: str) -> tuple[EpochForm, str] | None:
    """Form and scale of a column of epochs."""
    if key in ("epoch", "utc"):
        return "calendar", "utc"
    word, _, scale = key.partition("_")
    if scale in SCALES and word in ("epoch", "jd", "mjd"):
        return ("calendar" if word == "epoch" else word), scale  # type: ignore[return-value]
    return None


def _value(key: str) -> tuple[str, Fraction] | None:
    """Word and unit of a column of ranges."""
    word, _, unit = key.rpartition("_")
    if word in QUANTITIES and unit in UNITS:
        return word, UNITS[unit]
    return None


def _sigma(key: str) -> Fraction | None:
    word, _, unit = key.rpartition("_")
    return UNITS[unit] if word == "sigma" and unit in UNITS else None


def _is_rung(key: str) -> bool:
    return key.split(".")[0] in ("t1", "t2", "t3", "uplink", "downlink", "term") and "." in key
