"""Options that several commands have, and the things that they name."""

from __future__ import annotations

import argparse
from collections.abc import Iterable
from typing import Any, Final

from lighttime.earth.series import EarthOrientation
from lighttime.earth.station import Station
from lighttime.ephemeris import Ephemeris
from lighttime.errors import InputError, LighttimeError
from lighttime.model import Model
from lighttime.moon.reflector import Reflector, reflector
from lighttime.terms import TERMS
from lighttime.timescales import Epoch
from lighttime.timescales.text import parse_iso

PLACE: Final = "NAME,LATITUDE_DEG,LONGITUDE_DEG,HEIGHT_M"


def command(subparsers: Any, name: str, run: Any, summary: str, keys: str) -> Any:
    """A parser for a command, with its help ending in what `--json` prints.

    Parameters
    ----------
    subparsers : argparse's special action
    name : str
    run : callable
        Takes the parsed arguments, returns the exit status.
    summary : str
        One sentence.
    keys : str
        The keys of its JSON output, as lines of text.
    """
    parser = subparsers.add_parser(
        name,
        help=summary,
        description=summary,
        epilog=f"keys of the JSON output:\n{keys}",
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.set_defaults(run=run)
    return parser


# -- stations ------------------------------------------------------------------------------------


def add_station(parser: Any, required: bool) -> None:
    """``--station`` and ``--place``."""
    one = parser.add_mutually_exclusive_group(required=required)
    one.add_argument("--station", metavar="FILE.toml", help="station file")
    one.add_argument(
        "--place",
        metavar="NAME,LAT,LON,HEIGHT",
        help='station by geodetic coordinates in degrees (east positive) and metres, "Hilltop,'
        '46.2,7.1,2310"',
    )


def station(arguments: argparse.Namespace) -> Station | None:
    """The station that was named, or None."""
    if arguments.station is not None:
        from lighttime.earth.site_file import read_station

        return read_station(arguments.station)
    return None if arguments.place is None else _place(arguments.place)


def _place(text: str) -> Station:
    name, *numbers = (part.strip() for part in text.rsplit(",", 3))
    values = _floats(numbers)
    if not name or values is None or len(values) != 3:
        raise InputError("--place", text, f'{PLACE}, as "Hilltop,46.2,7.1,2310"')
    return Station.from_geodetic(name, *values)


# -- reflectors ----------------------------------------------------------------------------------


def add_array(parser: Any) -> None:
    """``--array`` and ``--axes``."""
    parser.add_argument(
        "--array",
        metavar="NAME|X,Y,Z",
        required=True,
        help='reflector array, "Apollo 15", or its coordinates in the principal axes of the Moon, '
        "metres",
    )
    parser.add_argument(
        "--axes",
        metavar="EPHEMERIS",
        help="whose principal axes X,Y,Z are in; DE430 when not given",
    )


def array(arguments: argparse.Namespace) -> Reflector:
    """The reflector array that was named."""
    parts = arguments.array.split(",")
    if len(parts) == 1:
        if arguments.axes is not None:
            raise LighttimeError("--axes goes with --array X,Y,Z only: a name says its axes")
        return reflector(arguments.array)
    values = _floats(parts)
    if values is None or len(values) != 3:
        raise InputError("--array", arguments.array, "a name, or X,Y,Z in metres")
    axes = {} if arguments.axes is None else {"axes": arguments.axes}
    x, y, z = values
    return Reflector(f"reflector at ({x:.3f}, {y:.3f}, {z:.3f}) m", (x, y, z), **axes)


# -- models --------------------------------------------------------------------------------------


def add_data(parser: Any) -> None:
    """Options for the data of a model: ephemeris and Earth orientation."""
    parser.add_argument("--ephemeris", metavar="FILE.bsp", help="ephemeris; DE421 when not given")
    parser.add_argument(
        "--orientation", metavar="FILE.bpc", help="lunar orientation that goes with --ephemeris"
    )
    parser.add_argument(
        "--earth-orientation",
        metavar="FILE",
        help="IERS series of Earth orientation (C04 or finals2000A); the bundled when not given",
    )


def ephemeris(arguments: argparse.Namespace, needs_moon: bool) -> Ephemeris:
    """The ephemeris that was named, or the default."""
    bsp, bpc = arguments.ephemeris, arguments.orientation
    if bsp is None:
        if bpc is not None:
            raise LighttimeError("--orientation goes with --ephemeris only: DE421 has its own")
        return Ephemeris.default()
    if bpc is None and needs_moon:
        raise LighttimeError("--orientation is missing: the FILE.bpc that goes with --ephemeris")
    return Ephemeris.open(bsp, orientation=bpc)


def earth_orientation(arguments: argparse.Namespace) -> EarthOrientation:
    """The series that was named, or the bundled one."""
    if arguments.earth_orientation is None:
        return EarthOrientation.bundled()
    return EarthOrientation.read(arguments.earth_orientation)


def add_model(parser: Any) -> None:
    """Options for a model: its data and its terms."""
    add_data(parser)
    parser.add_argument(
        "--omit",
        metavar="TERM[,TERM]",
        action="append",
        default=[],
        help=f"leave terms out: {', '.join(TERMS[1:])}",
    )
    parser.add_argument(
        "--gamma",
        type=float,
        default=1.0,
        help="gamma of the post-Newtonian formalism; 1 when not given",
    )


def model(arguments: argparse.Namespace) -> Model:
    """The model that was described."""
    omit = [name.strip() for names in arguments.omit for name in names.split(",")]
    return Model(
        ephemeris=ephemeris(arguments, needs_moon=True),
        earth_orientation=earth_orientation(arguments),
        omit=omit,
        gamma=arguments.gamma,
    )


# -- instants ------------------------------------------------------------------------------------


def instants(name: str, texts: list[str], scale: str) -> Epoch:
    """One instant, or an array of them when there are several."""
    parts = [parse_iso(text, scale, name) for text in texts]
    if len(parts) == 1:
        return Epoch(*parts[0], scale)
    return Epoch([jd1 for jd1, _ in parts], [jd2 for _, jd2 in parts], scale)


def _floats(texts: Iterable[str]) -> list[float] | None:
    try:
        return [float(text) for text in texts]
    except ValueError:
        return None
