"""What can go wrong, as one small family of exceptions.

Every error that `lighttime` raises on purpose is a `LighttimeError`. Those that come from a
value handed in are also a `ValueError`, so that code which knows nothing of this library can
still catch them.
"""

from __future__ import annotations

import difflib
from collections.abc import Iterable
from typing import Any

__all__ = [
    "ConvergenceError",
    "CoverageError",
    "FileError",
    "HorizonError",
    "InputError",
    "LighttimeError",
    "UnknownNameError",
]

MOST_NAMES = 40
"""So many known names are told; of more only the first."""

LONGEST_SHOWN = 400
"""Characters of a value that are told; the rest is counted."""

LONGEST_NEAR, MOST_NEAR = 40, 20_000
"""So long a name, and among so many, is looked for near ones: it takes seconds at most."""


def shown(value: Any) -> str:
    """A value as Python writes it, as far as that is possible and of use.

    Examples
    --------
    >>> shown("noon")
    "'noon'"
    >>> shown("9" * 1000).count("9"), shown(10**5000)
    (399, 'of type int and cannot be shown')
    """
    try:
        text = repr(value)
    except Exception:  # of a class of anybody's, or an integer of thousands of digits
        return f"of type {type(value).__name__} and cannot be shown"
    if len(text) <= LONGEST_SHOWN:
        return text
    return f"{text[:LONGEST_SHOWN]}... ({len(text)} characters)"


class LighttimeError(Exception):
    """The root of all errors raised on purpose by this library."""


class InputError(LighttimeError, ValueError):
    """A value that cannot be used.

    Parameters
    ----------
    name : str
        The input, as the caller knows it (``"pressure_hpa"``).
    value : object
        What was given.
    allowed : str
        What would have been accepted, in words or as a range with its unit.

    Examples
    --------
    >>> raise InputError("pressure_hpa", 72439.0, "300 to 1100 hPa")
    Traceback (most recent call last):
        ...
    lighttime.errors.InputError: pressure_hpa is 72439.0; allowed: 300 to 1100 hPa
    """

    def __init__(self, name: str, value: Any, allowed: str) -> None:
        self.name = name
        self.value = value
        self.allowed = allowed
        super().__init__(f"{name} is {shown(value)}; allowed: {allowed}")

    def __reduce__(self) -> tuple[Any, ...]:
        return type(self), (self.name, self.value, self.allowed)


class CoverageError(InputError):
    """An instant that the data in use do not reach."""


class HorizonError(InputError):
    """A ray that arrives at or below the horizon, where no troposphere model holds."""


class UnknownNameError(InputError, LookupError):
    """A name that is not in the list it was looked up in; near names are suggested."""

    def __init__(self, name: str, value: str, known: Iterable[str]) -> None:
        self.known = tuple(known)
        near = _near(value, self.known) if isinstance(value, str) else []
        hint = f"did you mean {' or '.join(near)}? " if near else ""
        names = self.known
        if len(names) > MOST_NAMES:
            names = (*names[:10], f"... ({len(names)} in all)")
        InputError.__init__(self, name, value, f"{hint}one of {', '.join(names)}")

    def __reduce__(self) -> tuple[Any, ...]:
        return type(self), (self.name, self.value, self.known)


def _near(value: str, known: tuple[str, ...]) -> list[str]:
    """Up to three names that resemble a value."""
    if len(value) > LONGEST_NEAR:
        return []
    short = [name for name in known[:MOST_NEAR] if len(name) <= LONGEST_NEAR]
    return difflib.get_close_matches(value, short, n=3, cutoff=0.5)


class FileError(LighttimeError, ValueError):
    """A file that cannot be read as what it should be.

    Parameters
    ----------
    path : object
        The file.
    line : int or None
        The line at which reading stopped, counted from 1; None for the file as a whole.
    reason : str
        What was found and what was expected.
    """

    def __init__(self, path: Any, line: int | None, reason: str) -> None:
        self.path = path
        self.line = line
        self.reason = reason
        where = f"{path}" if line is None else f"{path}, line {line}"
        super().__init__(f"{where}: {reason}")

    def __reduce__(self) -> tuple[Any, ...]:
        return type(self), (self.path, self.line, self.reason)


class ConvergenceError(LighttimeError, ArithmeticError):
    """The light-time equation was not solved to the required accuracy."""
