"""The published ocean loading case of Onsala, shared by the tests of loading and of BLQ files.

Source: IERS Conventions (2010), ocean loading routine, test case of 2009-06-25 (coefficients
from 2009); displacements in metres: hour, up, south, west.
"""

from __future__ import annotations

import numpy as np

ROWS = """\
  .00352 .00123 .00080 .00032 .00187 .00112 .00063 .00003 .00082 .00044 .00037
  .00144 .00035 .00035 .00008 .00053 .00049 .00018 .00009 .00012 .00005 .00006
  .00086 .00023 .00023 .00006 .00029 .00028 .00010 .00007 .00004 .00002 .00001
   -64.7  -52.0  -96.2  -55.2  -58.8 -151.4  -65.6 -138.1    8.4    5.2    2.1
    85.5  114.5   56.5  113.6   99.4   19.1   94.1  -10.4 -167.4 -170.0 -177.7
   109.5  147.0   92.7  148.8   50.5  -55.1   36.4 -170.4  -15.0    2.3    5.2
"""

NUMBERS = np.array([[float(cell) for cell in row.split()] for row in ROWS.splitlines()])
AMPLITUDES_M, PHASES_DEG = NUMBERS[:3], NUMBERS[3:]

DISPLACEMENTS_M = np.array(
    [
        [0, 0.003513, -0.001893, -0.001513],
        [1, 0.003248, -0.001620, -0.001012],
        [2, 0.002079, -0.001068, -0.000319],
        [3, 0.000498, -0.000374, 0.000328],
        [6, -0.001369, 0.001032, 0.000254],
        [12, 0.006519, -0.000548, -0.001871],
        [18, -0.008606, 0.001637, 0.003347],
        [23, 0.001583, -0.001469, -0.001366],
    ]
)
