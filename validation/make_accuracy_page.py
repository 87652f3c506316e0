"""Writes docs/accuracy.md from what the scripts of this folder print.

    python validation/make_accuracy_page.py                     from the outputs in results/
    python validation/make_accuracy_page.py --run               runs every script first, one by one
    python validation/make_accuracy_page.py --run accuracy ...  runs these first

Each output is kept as results/NAME.txt, the numbers of `accuracy` also as results/accuracy.json.
Exits with 1 when a script missed one of its bars; the page is then not written.
"""

from __future__ import annotations

import argparse
import json
import re
import subprocess
import sys
from collections import Counter
from pathlib import Path
from typing import Any

import numpy as np
from losses import LOOK_UP, NAMES
from rungs import BARS

HERE = Path(__file__).parent
RESULTS = HERE / "results"
DOCS = HERE.parent / "docs"
SCRIPTS = (
    "accuracy",
    "twin_convergence",
    "gravity_integration",
    "series_roughness",
    "rotation_against_astropy",
    "scales_against_astropy",
    "station_against_astropy",
    "tides_against_pytmd",
    "normal_points",
)
MM_PER_FS = 0.5 * 299792458.0 * 1e3 * 1e-15


# -- running ---------------------------------------------------------------------------------------


def run(name: str) -> bool:
    """Run a script, keep what it prints; whether it met its bars."""
    command = [sys.executable, "-W", "ignore", str(HERE / f"{name}.py")]
    if name == "accuracy":
        command += ["--save", str(RESULTS / "accuracy.json")]
    print(f"running {name}", flush=True)
    done = subprocess.run(command, stdout=subprocess.PIPE, text=True, check=False)
    text = "\n".join(line.rstrip() for line in done.stdout.splitlines())
    (RESULTS / f"{name}.txt").write_text(text + "\n", encoding="utf-8")
    return done.returncode == 0


def output(name: str) -> str:
    """What a script printed when it was last run."""
    return (RESULTS / f"{name}.txt").read_text(encoding="utf-8").rstrip()


def block(text: str) -> str:
    """As it was printed."""
    return f"```text\n{text.strip(chr(10))}\n```"


def part(name: str, first: str, last: str | None = None) -> str:
    """The lines of an output from the one that begins with `first` to before `last`."""
    text = output(name)
    start = text.index(first)
    end = len(text) if last is None else text.index(last, start)
    return text[start:end].rstrip()


def number(name: str, pattern: str) -> str:
    """A number in an output, by the text around it."""
    found = re.search(pattern, output(name))
    if found is None:
        raise SystemExit(f"results/{name}.txt has nothing like {pattern!r}")
    return found.group(1)


# -- numbers ---------------------------------------------------------------------------------------


def size(values: Any) -> tuple[float, float]:
    """Root mean square and largest."""
    array = np.abs(np.asarray(values, dtype=float))
    return float(np.sqrt(np.mean(array**2))), float(np.max(array))


def power(value: float) -> str:
    """1.2e-07 as people write it."""
    digits, exponent = f"{value:.1e}".split("e")
    return f"{digits} × 10<sup>{int(exponent)}</sup>"


def table(head: tuple[str, ...], rows: list[tuple[str, ...]]) -> str:
    """A table in Markdown."""
    lines = [head, ("---",) * len(head), *rows]
    return "\n".join("| " + " | ".join(line) + " |" for line in lines)


def kinds(results: dict[str, Any]) -> str:
    """Fast minus exact by kind of instant."""
    told = {
        "any": "any instant, 1969 to 2050",
        "seam": "an event within 1 µs of the end of a record of DE421, or on it",
        "leap": "days with a leap second, and inside of it",
        "drift": "1969 to 1971, when UTC ran slow",
        "midnight": "within 3 s of 0h UTC",
    }
    rows = []
    for kind, count in Counter(results["kinds"]).most_common():
        cells = [told[kind], str(count)]
        for mode in ("alone", "tables"):
            pairs = zip(results[mode], results["kinds"], strict=True)
            rms, largest = size([off for off, of in pairs if of == kind])
            cells += [f"{largest:.2f}", f"{rms:.2f}"]
        rows.append(tuple(cells))
    head = ("instants", "cases", "largest/fs", "rms/fs", "tables: largest/fs", "rms/fs")
    return table(head, rows)


def rungs(results: dict[str, Any]) -> str:
    """The rungs that have a bar; the planets as one."""
    found = results["rungs"]
    rows = []
    for name, bar in BARS.items():
        planet = name.startswith("gravity") and name.split()[-1] not in ("sun", "earth", "moon")
        if planet and not name.endswith("jupiter"):
            continue
        unit = "m" if bar == 0.3e-6 else "s"
        cells = [power(found[mode][name]) for mode in ("alone", "tables")]
        told = "gravity, any planet" if planet else name
        rows.append((told, *cells, f"{power(bar)} {unit}"))
    return table(("rung", "one epoch a call", "from tables", "bar"), rows)


def beside(results: dict[str, Any]) -> str:
    """The plain assembly and its roundings."""
    plain = np.array(results["plain"])
    look_up = np.array(results["losses"][LOOK_UP])
    rows = [
        ("this library", np.array(results["alone"])[results["compared"]]),
        ("plain assembly of jplephem, ERFA and astropy", plain),
        ("the same, less what its record look-up costs", plain - look_up),
        *((f"alone: {name}", results["losses"][name]) for name in NAMES),
    ]
    cells = []
    for told, values in rows:
        rms, largest = size(values)
        cells.append((told, f"{rms:.3g}", f"{largest:.3g}", f"{largest * MM_PER_FS:.2g}"))
    return table(("", "rms/fs", "largest/fs", "largest, one-way/mm"), cells)


def values() -> dict[str, str]:
    """Everything that stands in braces in the page."""
    results = json.loads((RESULTS / "accuracy.json").read_text(encoding="utf-8"))
    found: dict[str, str] = {}
    for mode in ("alone", "tables", "alone_pair"):
        rms, largest = size(results[mode])
        found |= {f"rms_{mode}": f"{rms:.2f}", f"largest_{mode}": f"{largest:.2f}"}
    off = np.array(results["plain"])
    plain_rms, plain_largest = size(off)
    rest_rms, _ = size(off - np.array(results["losses"][LOOK_UP]))
    plain = {
        "plain_mm": f"{plain_largest * MM_PER_FS:.0f}",
        "factor": f"{plain_rms / rest_rms:.0f}",
    }
    gravity = {
        name: f"{float(number('gravity_integration', pattern)):.2g}"
        for name, pattern in (
            ("integration", r"largest difference (\S+) fs"),
            ("second_sun", r"sun, second order\s+(\S+)"),
            ("second_earth", r"earth, second order\s+(\S+)"),
            ("spin", r"earth, spin\s+(\S+)"),
        )
    }
    return found | plain | gravity | {
        "count": str(len(results["kinds"])),
        "compared": str(len(off)),
        "doubled": number("twin_convergence", r"largest (\S+) s, limit"),
        "kinds": kinds(results),
        "rungs": rungs(results),
        "beside": beside(results),
        "derivatives": block(part("twin_convergence", "3. derivatives")),
        "iteration": block(part("twin_convergence", "2. repeated", "3. derivatives")),
        "integrals": block(part("gravity_integration", "Rays between")),
        "roughness": block(output("series_roughness")),
        "rotation": block(output("rotation_against_astropy")),
        "scales": block(output("scales_against_astropy")),
        "station": block(output("station_against_astropy")),
        "tides": block(output("tides_against_pytmd")),
        "normal_points": " and ".join(
            f"{-float(mm) / 1e3:.2f} m"
            for mm in re.findall(r"observed minus computed (\S+) mm", output("normal_points"))
        ),
    }  # fmt: skip


def main() -> int:
    """Run what is asked for, draw the figures, write the page."""
    asked = argparse.ArgumentParser(description="Writes docs/accuracy.md.")
    asked.add_argument(
        "--run", nargs="*", choices=SCRIPTS, help="scripts to run first; all of them"
    )
    given = asked.parse_args()
    RESULTS.mkdir(exist_ok=True)
    if given.run is not None:
        missed = [name for name in given.run or SCRIPTS if not run(name)]
        if missed:
            print(f"missed their bars: {', '.join(missed)}", file=sys.stderr)
            return 1
    subprocess.run([sys.executable, str(DOCS / "figures" / "accuracy.py")], check=True)
    page = (HERE / "accuracy_page.md").read_text(encoding="utf-8")
    for name, value in values().items():
        page = page.replace("{" + name + "}", value)
    left = re.findall(r"\{[a-z_]+\}", page.replace("{image}", ""))
    if left:
        raise SystemExit(f"the page asks for what is not there: {left}")
    (DOCS / "accuracy.md").write_text(page, encoding="utf-8")
    print(f"{DOCS / 'accuracy.md'}: {len(page.splitlines())} lines")
    return 0


if __name__ == "__main__":
    sys.exit(main())
