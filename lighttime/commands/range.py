"""``lighttime range``: the round-trip light time at one epoch, or at many."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import Any, Final

from lighttime.answer import RoundTrip
from lighttime.commands import options, writing
from lighttime.commands.budget_figure import BudgetFigure, check_figure
from lighttime.commands.epoch_file import CHUNK, Ask, EpochFile
from lighttime.errors import HorizonError, InputError, LighttimeError
from lighttime.model import TAGS
from lighttime.path.troposphere import Weather
from lighttime.printing import MOST_ROWS
from lighttime.progress import Progress
from lighttime.timescales import SCALES, Epoch

SUMMARY: Final = "Round-trip light time from a station to a reflector on the Moon, term by term."

AIR: Final = {
    "pressure_hpa": "--pressure-hpa",
    "temperature_k": "--temperature-k",
    "relative_humidity": "--humidity",
}
"""The option for each part of the weather."""


def add(subparsers: Any) -> None:
    """Describe the command to argparse."""
    parser = options.command(subparsers, "range", run, SUMMARY, writing.RANGE_KEYS)
    _add_epochs(parser.add_argument_group("when"))
    where = parser.add_argument_group("from where to where")
    options.add_station(where, required=True)
    options.add_array(where)
    _add_air(parser.add_argument_group("air (without it there is no troposphere)"))
    options.add_model(parser.add_argument_group("model"))
    _add_output(parser.add_argument_group("output"))


def _add_epochs(group: Any) -> None:
    one = group.add_mutually_exclusive_group(required=True)
    one.add_argument(
        "--at", metavar="EPOCH", nargs="+", help="one or more epochs, 2026-12-01T20:00:00"
    )
    one.add_argument("--epochs", metavar="FILE.csv", type=Path, help="many epochs, from a CSV file")
    group.add_argument(
        "--column", metavar="NAME", help="the column of epochs, if there are several"
    )
    group.add_argument(
        "--scale", choices=SCALES, default="utc", help="their time scale; utc when not given"
    )
    group.add_argument(
        "--tag", choices=TAGS, default="transmit", help="what they are; transmit when not given"
    )


def _add_air(group: Any) -> None:
    for name, unit, words in (
        ("pressure_hpa", "HPA", "total pressure, 300 to 1100 hPa"),
        ("temperature_k", "KELVIN", "temperature, 180 to 340 K"),
        ("relative_humidity", "FRACTION", "relative humidity, 0 to 1"),
    ):
        group.add_argument(
            AIR[name], dest=name, metavar=f"{unit}|COLUMN", type=_number_or_name,
            help=f"{words}; or a column of --epochs",
        )  # fmt: skip
    group.add_argument(
        "--wavelength-nm", metavar="NM", type=float, default=532.0,
        help="355 to 1064; 532 when not given",
    )  # fmt: skip


def _add_output(group: Any) -> None:
    group.add_argument(
        "--budget", action="store_true",
        help="with one sigma of the range, and what contributes to it",
    )  # fmt: skip
    group.add_argument(
        "--plot",
        metavar="FIGURE",
        type=Path,
        help="draw the error budget over the epochs: .png, .svg or .pdf",
    )
    group.add_argument("--json", action="store_true", help="print JSON, for programs")
    group.add_argument(
        "--output",
        metavar="FILE",
        type=Path,
        help="write a table instead of printing: .csv, .ecsv (with units) or .json",
    )
    group.add_argument(
        "--overwrite", action="store_true", help="let --output and --plot replace files"
    )
    group.add_argument("--quiet", action="store_true", help="no progress bar")


def run(arguments: argparse.Namespace) -> int:
    """Do what was asked."""
    if arguments.output is not None:
        inputs = [arguments.epochs] if arguments.epochs is not None else []
        writing.check_output(arguments.output, arguments.overwrite, inputs)
    if arguments.plot is not None:
        check_figure(arguments.plot, arguments.overwrite)
    model, station = options.model(arguments), options.station(arguments)
    reflector, weather = options.array(arguments), _weather(arguments)

    def ask(when: Epoch, air: Weather | None) -> RoundTrip:
        try:
            return model.round_trip(
                when, station, reflector,
                tag=arguments.tag, weather=air, wavelength_nm=arguments.wavelength_nm,
            )  # fmt: skip
        except HorizonError as error:
            hint = "--omit troposphere answers all the same"
            raise LighttimeError(f"{error}; {hint}") from error

    if arguments.epochs is None:
        answer = ask(*_at(arguments, weather))
        _tell(arguments, answer.query.size, answer, iter([answer]))
    else:
        file = EpochFile(arguments.epochs, arguments.column, arguments.scale, weather)
        _tell(arguments, *_from_file(arguments, file, ask))
    return 0


def _weather(arguments: argparse.Namespace) -> dict[str, float | str]:
    """Numbers and names of columns, all three or none."""
    given = {name: getattr(arguments, name) for name in AIR}
    missing = [AIR[name] for name, value in given.items() if value is None]
    if len(missing) == len(given):
        return {}
    if missing:
        raise LighttimeError(f"{missing[0]} is missing: {', '.join(AIR.values())} go together")
    return given


def _at(arguments: argparse.Namespace, weather: dict[str, float | str]) -> tuple[Epoch, Any]:
    """The epochs of ``--at``, and the weather."""
    if arguments.column is not None:
        raise LighttimeError("--column goes with --epochs only")
    for name, value in weather.items():
        if isinstance(value, str):
            raise InputError(AIR[name], value, "a number (the name of a column with --epochs)")
    air = Weather(**weather) if weather else None  # type: ignore[arg-type]
    return options.instants("--at", arguments.at, arguments.scale), air


def _from_file(
    arguments: argparse.Namespace, file: EpochFile, ask: Ask
) -> tuple[int, RoundTrip, Iterator[RoundTrip]]:
    """How many epochs there are, the range at the latest, and chunks of ranges at all.

    The latest says which terms there are and how far the data must reach.
    """
    count, latest = file.survey()
    if count > CHUNK and arguments.output is None and not arguments.json:
        allowed = f"up to {CHUNK} to print; --output FILE or --json for more"
        raise InputError("--epochs", f"{file.path} with {count} rows", allowed)
    outline: RoundTrip = file.answer(ask, [latest])

    def chunks() -> Iterator[RoundTrip]:
        done = 0
        with Progress(count, quiet=arguments.quiet) as progress:
            for answer in file.answers(ask):
                yield answer
                done += answer.query.size
                progress.update(done)

    return count, outline, chunks()


def _tell(
    arguments: argparse.Namespace, count: int, outline: RoundTrip, answers: Iterator[RoundTrip]
) -> None:
    """Write or print the ranges, and draw their budget."""
    drawing = BudgetFigure()
    if arguments.plot is not None:
        answers = drawing.seen(answers)
    _write(arguments, count, outline, answers)
    if arguments.plot is not None:
        drawing.write(arguments.plot, arguments.overwrite)


def _write(
    arguments: argparse.Namespace, count: int, outline: RoundTrip, answers: Iterator[RoundTrip]
) -> None:
    if arguments.output is not None:
        write = writing.FORMATS[arguments.output.suffix.lower()]
        with writing.new_file(arguments.output, arguments.overwrite) as file:
            write(file, outline, answers, arguments.budget)
        said = {"file": str(arguments.output), "count": count} | writing.circumstances(outline)
        if arguments.json:
            writing.print_json(said, sys.stdout)
        else:
            print(_written(said))
    elif arguments.json:
        writing.write_json(sys.stdout, outline, answers, arguments.budget)
    else:
        for answer in answers:  # of a file that is longer than one chunk, nothing is printed
            print(answer)
            if arguments.budget:
                print(f"\n{answer.budget}")
        if count > MOST_ROWS:
            print(f"  {MOST_ROWS} of {count} epochs are shown: --output FILE and --json have all")


def _written(said: dict[str, Any]) -> str:
    """That a file was written, for people."""
    lines = [
        f"{said['count']} ranges {said['station']['name']} - {said['array']['name']} "
        f"written to {said['file']}"
    ]
    if said["not_modelled"]:
        lines.append(f"  not modelled (nothing was given): {', '.join(said['not_modelled'])}")
    if said["model"]["omit"]:
        lines.append(f"  left out on request: {', '.join(said['model']['omit'])}")
    return "\n".join(lines + [f"  {note}" for note in said["notes"]])


def _number_or_name(text: str) -> float | str:
    try:
        return float(text)
    except ValueError:
        return text
