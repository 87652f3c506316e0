"""Fuzzer of the reader of SINEX files, and of the choice of a solution."""

from __future__ import annotations

from pathlib import Path

from harness import fuzz

from lighttime.earth.sinex import read_sinex
from lighttime.errors import LighttimeError

_ESTIMATES = (
    ("STAX", "m", ".438997800000000E+07"),
    ("STAY", "m", ".546801000000000E+06"),
    ("STAZ", "m", ".458233000000000E+07"),
    ("VELX", "m/y", "-.141000000000000E-01"),
    ("VELY", "m/y", ".188000000000000E-01"),
    ("VELZ", "m/y", ".103000000000000E-01"),
)
_LINES = "".join(
    f" {6 * solution + k:5d} {kind:6s} HILL  A {solution + 1:>4d} 10:001:00000 {unit:4s} 2 "
    f"{value:>21s}  .12000E-02\n"
    for solution in (0, 1)
    for k, (kind, unit, value) in enumerate(_ESTIMATES, start=1)
)
SINEX = f"""\
%=SNX 2.02 INV 20:001:00000 INV 94:002:00000 10:365:86370 C 00012 2 S V
*-------------------------------------------------------------------------------
+FILE/REFERENCE
 DESCRIPTION        invented
-FILE/REFERENCE
+SITE/ID
 HILL  A 10002M001 L Hilltop, invented        7  6  0.4 46 12  0.0  2310.0
-SITE/ID
+SITE/ECCENTRICITY
 HILL  A    1 L 94:002:00000 01:050:00000 UNE   3.0000   0.0100  -0.0200
 HILL  A    2 L 01:050:00300 10:365:86370 XYZ   2.0700   0.2600   2.1600
-SITE/ECCENTRICITY
+SOLUTION/EPOCHS
 HILL  A    1 L 94:002:00000 01:050:00000 94:002:00000
 HILL  A    2 L 01:050:00300 10:365:86370 01:050:00300
-SOLUTION/EPOCHS
+SOLUTION/ESTIMATE
{_LINES}-SOLUTION/ESTIMATE
+SOLUTION/DISCONTINUITY
 HILL  A    1 L 00:000:00000 01:050:00000 P - earthquake
 HILL  A    2 L 01:050:00000 00:000:00000 P -
-SOLUTION/DISCONTINUITY
%ENDSNX
""".encode()
"""Every block that is read, of an invented site."""


def read(path: Path) -> None:
    """The file, and the station of each of its solutions and of an instant."""
    file = read_sinex(path)
    str(file)
    for site in file.sites[:3]:
        choices = [{"when": "2005-06-01"}, *({"solution": s.number} for s in site.solutions[:3])]
        for choice in choices:
            for eccentricity in (True, False):
                try:
                    station = site.station(**choice, eccentricity=eccentricity)
                    str(station)
                except LighttimeError as error:
                    str(error)


if __name__ == "__main__":
    fuzz(read, (SINEX,))
