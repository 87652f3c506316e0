"""The command line: ``lighttime COMMAND``, one module of `lighttime.commands` for each."""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Sequence
from typing import Final, NoReturn

import lighttime.commands.coverage as coverage_command
import lighttime.commands.crosscheck as crosscheck_command
import lighttime.commands.range as range_command
import lighttime.commands.scales as scales_command
import lighttime.commands.station as station_command
from lighttime.errors import LighttimeError
from lighttime.version import __version__

COMMANDS: Final = (
    range_command,
    crosscheck_command,
    scales_command,
    coverage_command,
    station_command,
)
"""Modules with ``add(subparsers)``, which sets the default ``run``, and ``run(arguments)``."""

REFUSED, INTERRUPTED, BROKEN_PIPE = 2, 130, 141
"""Exit status after an error of input, Ctrl-C (128 + SIGINT) and a closed pipe (128 + SIGPIPE)."""


class Parser(argparse.ArgumentParser):
    """A parser that tells an error in one line."""

    def error(self, message: str) -> NoReturn:
        """Say what is wrong and end."""
        self.exit(REFUSED, f"{self.prog}: error: {message} ({self.prog} --help tells more)\n")


def parser() -> Parser:
    """The parser of the whole command line."""
    top = Parser(
        prog="lighttime",
        description="Light time between stations on the Earth and reflectors on the Moon.",
        epilog="lighttime COMMAND --help tells more. Exit status: 0, or 2 after an error; "
        "1 when a cross-check finds that models differ.",
    )
    top.add_argument("--version", action="version", version=f"lighttime {__version__}")
    subparsers = top.add_subparsers(dest="command", metavar="COMMAND", required=True)
    for command in COMMANDS:
        command.add(subparsers)
    return top


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command; returns the exit status.

    Parameters
    ----------
    argv : sequence of str, optional
        Arguments after the name of the program; those of the process when not given.
    """
    arguments = parser().parse_args(argv)
    try:
        status = int(arguments.run(arguments))
        sys.stdout.flush()
        return status
    except LighttimeError as error:
        return _refuse(arguments.command, str(error))
    except BrokenPipeError:  # whoever read the output has seen enough
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return BROKEN_PIPE
    except OSError as error:
        return _refuse(arguments.command, f"{error.filename or 'output'}: {error.strerror}")
    except KeyboardInterrupt:
        return INTERRUPTED


def _refuse(command: str, reason: str) -> int:
    one_line = " ".join(reason.split())
    print(f"lighttime {command}: error: {one_line}", file=sys.stderr)
    return REFUSED
