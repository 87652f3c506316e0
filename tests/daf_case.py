"""DE421 of some months as an SPK and a PCK file, for tests that open files."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np

from lighttime.ephemeris import Ephemeris


def write_daf(path: Path, kind: bytes, nd: int, ni: int, segments: list[Any]) -> None:
    """A minimal DAF file (the container of SPK and PCK files) with Chebyshev segments of type 2.

    Source of the layout: the published description of the DAF, SPK and PCK formats.
    """
    record = 1024
    arrays, summaries, next_word = [], [], 3 * record // 8 + 1
    for doubles, integers, records, start_s, span_s in segments:
        count, components, terms = records.shape
        rows = []
        for k in range(count):
            middle = start_s + (k + 0.5) * span_s
            rows.append(np.concatenate([[middle, span_s / 2], records[k].ravel()]))
        data = np.concatenate([*rows, [start_s, span_s, 2 + components * terms, count]])
        first, last = next_word, next_word + data.size - 1
        next_word = last + 1
        ints = np.array([*integers, first, last], dtype="<i4")
        if ints.size % 2:
            ints = np.append(ints, np.int32(0))
        summaries.append(np.array(doubles, dtype="<f8").tobytes() + ints.tobytes())
        arrays.append(data.astype("<f8").tobytes())
    head = kind.ljust(8) + np.array([nd, ni], "<i4").tobytes() + b"made here".ljust(60)
    head += np.array([2, 2, next_word], "<i4").tobytes() + b"LTL-IEEE"
    head = head.ljust(699, b"\0") + b"FTPSTR:\r:\n:\r\n:\r\x00:\x81:\x10\xce:ENDFTP"
    summary = np.array([0.0, 0.0, len(summaries)], "<f8").tobytes() + b"".join(summaries)
    body = head.ljust(record, b"\0") + summary.ljust(record, b"\0") + b" " * record
    data = b"".join(arrays)
    path.write_bytes(body + data + b"\0" * (-len(data) % record))


def write_de421(folder: Path) -> tuple[Path, Path]:
    """DE421 of some 128 days from the beginning of 2010, as made.bsp and made.bpc."""
    de421 = Ephemeris.default()
    first = 2455200.5 - (2455200.5 - 2414992.5) % 32
    numbers = {"earth_moon_barycentre": 3, "sun": 10, "mercury": 1, "venus": 2, "mars": 4}
    numbers |= {"jupiter": 5, "saturn": 6, "uranus": 7, "neptune": 8}
    segments = []

    def add(records: Any, target: int, center: int | None, factor: float = 1.0) -> None:
        start = int((first - records.start_jd) / records.span_days)
        rows = factor * records.coefficients[start : start + int(128 / records.span_days)]
        start_s, span_s = (first - 2451545.0) * 86400.0, records.span_days * 86400.0
        doubles = [start_s, start_s + 128 * 86400.0]
        frame = [target, center, 1, 2] if center is not None else [target, 1, 2]
        segments.append((doubles, frame, rows, start_s, span_s))

    for body, number in numbers.items():
        add(de421.barycentric[body], number, 0)
    share = float(de421.earth_from_barycentre)
    add(de421.moon_from_earth, 399, 3, share)
    add(de421.moon_from_earth, 301, 3, 1.0 + share)
    write_daf(folder / "made.bsp", b"DAF/SPK", 2, 6, segments)
    segments = []
    assert de421.angles is not None
    add(de421.angles, 31006, None)
    write_daf(folder / "made.bpc", b"DAF/PCK", 2, 5, segments)
    return folder / "made.bsp", folder / "made.bpc"
