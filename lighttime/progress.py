"""A progress bar for people who wait at a terminal."""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from types import TracebackType
from typing import Final, TextIO

WIDTH: Final = 30
FIRST_SHOWN_AFTER_S: Final = 1.0
"""What is done sooner needs no bar."""
SHOWN_EVERY_S: Final = 0.1


class Progress:
    """A line on a terminal that says how far a long run is; gone when it ends.

    Parameters
    ----------
    total : int
        How many things there are to do.
    stream : text file, optional
        Standard error when not given. On anything but a terminal nothing is shown.
    quiet : bool
        Show nothing.
    clock : callable
        Seconds that only go up.

    Examples
    --------
    >>> with Progress(3, quiet=True) as progress:
    ...     for done in range(3):
    ...         progress.update(done + 1)
    """

    def __init__(
        self,
        total: int,
        stream: TextIO | None = None,
        quiet: bool = False,
        clock: Callable[[], float] = time.monotonic,
    ) -> None:
        self.total = total
        self.stream = sys.stderr if stream is None else stream
        self.shown = not quiet and total > 0 and self.stream.isatty()
        self.clock = clock
        self.start = clock()
        self.next = self.start + FIRST_SHOWN_AFTER_S
        self.length = 0

    def update(self, done: int) -> None:
        """Say how many are done."""
        now = self.clock()
        if self.shown and now >= self.next:
            self.next = now + SHOWN_EVERY_S
            self._show(self._line(done, now - self.start))

    def _line(self, done: int, elapsed_s: float) -> str:
        part = min(done / self.total, 1.0)
        full = int(WIDTH * part)
        bar = "#" * full + "-" * (WIDTH - full)
        left = f", {_duration(elapsed_s * (1.0 / part - 1.0))} left" if part > 0.0 else ""
        return f"[{bar}] {100.0 * part:3.0f} %  {done} of {self.total}{left}"

    def _show(self, line: str) -> None:
        self.stream.write("\r" + line.ljust(self.length))
        self.stream.flush()
        self.length = len(line)

    def __enter__(self) -> Progress:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        if self.length:
            self._show("")
            self.stream.write("\r")
            self.stream.flush()


def _duration(seconds: float) -> str:
    """Examples
    --------
    >>> _duration(59.2), _duration(3700)
    ('1 min 0 s', '1 h 2 min')
    """
    whole = -int(-seconds // 1)
    if whole < 60:
        return f"{whole} s"
    if whole < 3600:
        return f"{whole // 60} min {whole % 60} s"
    return f"{whole // 3600} h {-(-(whole % 3600) // 60)} min"
