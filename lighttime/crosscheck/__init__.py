"""Why two models disagree: the choice that explains it, with a number for how sure that is.

`lighttime.crosscheck` is the function; the rooms behind it are imported by name, as in
``from lighttime.crosscheck.suspects import all_suspects``.
"""

from __future__ import annotations

from lighttime.crosscheck.findings import Finding
from lighttime.crosscheck.report import Report
from lighttime.crosscheck.run import crosscheck
from lighttime.crosscheck.separation import Inseparable
from lighttime.crosscheck.suspects import Suspect, all_suspects

__all__ = ["Finding", "Inseparable", "Report", "Suspect", "all_suspects", "crosscheck"]
