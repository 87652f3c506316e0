"""The error budget of many ranges, drawn into a file."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import Final

import numpy as np

from lighttime.answer import RoundTrip
from lighttime.errors import FileError, InputError
from lighttime.vectors import Array

FIGURES: Final = (".png", ".svg", ".pdf")


def check_figure(path: Path, overwrite: bool) -> None:
    """Refuse a file that cannot be meant, before any work is done."""
    if path.suffix.lower() not in FIGURES:
        raise InputError("--plot", str(path), f"a name that ends in {', '.join(FIGURES)}")
    if not path.parent.is_dir():
        raise InputError("--plot", str(path), "a file in a folder that exists")
    if path.exists() and not overwrite:
        raise FileError(path, None, "exists, and is left alone without --overwrite")


class BudgetFigure:
    """Gathers the budgets of ranges as they go by."""

    def __init__(self) -> None:
        self._days: list[Array] = []
        self._parts: dict[str, list[Array]] = {}

    def seen(self, answers: Iterator[RoundTrip]) -> Iterator[RoundTrip]:
        """The same answers; what their budgets are is kept."""
        for answer in answers:
            utc = answer.query.when.to("utc")
            self._days.append(np.ravel((utc.jd1 - 2400000.5) + utc.jd2))
            for name, part in answer.budget.parts.items():
                self._parts.setdefault(name, []).append(np.ravel(part.sigma_s))
            yield answer

    def write(self, path: Path, overwrite: bool) -> None:
        """Draw it."""
        from lighttime.uncertainty.plot import drawn

        parts = {name: np.concatenate(sigmas) for name, sigmas in self._parts.items()}
        figure = drawn(np.concatenate(self._days), parts)
        kind = path.suffix.lower().removeprefix(".")
        try:
            with path.open("wb" if overwrite else "xb") as file:
                figure.savefig(file, format=kind, dpi=150)
        except OSError as error:
            raise FileError(path, None, f"cannot be written: {error.strerror}") from None
