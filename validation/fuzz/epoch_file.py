"""Fuzzer of the reader of epochs from a CSV file, with and without weather."""

from __future__ import annotations

from pathlib import Path

from harness import fuzz

from lighttime.commands.epoch_file import EpochFile
from lighttime.errors import LighttimeError

SEEDS = (
    b"utc\n2020-01-01T00:00:00\n2020-01-02\n",
    b"""\
# a night
"utc",pressure,temperature,humidity,note
2020-03-01T19:00:00,770.1,271.2,0.41,"clear, still"
2020-03-01T19:05:00.5,770.0,271.1,0.42,
""",
)
WEATHER = {"pressure": "pressure", "temperature": "temperature", "humidity": 0.5}
CHOICES = ((None, {}), ("utc", {}), ("utc", WEATHER))


def read(path: Path) -> None:
    """Every row, counted and handed on."""
    for column, weather in CHOICES:
        file = EpochFile(path, column, "utc", weather)
        try:
            count, latest = file.survey()
            assert count >= 1
            assert latest.line >= 2
            for _ in file.answers(lambda epochs, air: epochs.to("tai")):
                pass
        except LighttimeError as error:
            str(error)


if __name__ == "__main__":
    fuzz(read, SEEDS)
