"""Fuzzer of calendar text in every scale."""

from __future__ import annotations

from pathlib import Path

from harness import fuzz

from lighttime.timescales import Epoch

SCALES = ("utc", "tai", "tdb", "gps")
UTC = ("2016-12-31T23:59:60.5Z", "1961-07-31T23:59:59.9+00:00")
ANY = ("2008-03-30T12:39:50.123456789012345678901", "1966-01-01 00:00", "2099-12-31")
SEEDS = (
    *(f"{scale}\n{text}".encode() for scale in SCALES for text in ANY),
    *(f"utc\n{text}".encode() for text in UTC),
)


def read(path: Path) -> None:
    """An epoch, told again and moved; what is told is what was read."""
    scale, _, text = path.read_bytes().decode("utf-8", "surrogateescape").partition("\n")
    epoch = Epoch.parse(text, scale)
    assert Epoch.parse(epoch.isoformat(21), epoch.scale) == epoch
    str(epoch.to("tai"))
    str(epoch.shift(1e-9))


if __name__ == "__main__":
    fuzz(read, SEEDS)
