"""The page of a cross-check in a browser, wide and narrow: does it fit, is it complete?

Run as

    python validation/crosscheck_page.py FOLDER

Makes reports of several kinds, opens each in headless Chromium at 1280 and 400 pixels without a
network, takes pictures into FOLDER (to be looked at, not to be kept), and measures whether
anything sticks out of the window. Ends with a non-zero status if something does.
"""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np

import lighttime as lt

WIDTHS = (1280, 400)
HEIGHT = 4200
STATION = lt.Station.from_geodetic("Hilltop", 46.2, 7.1, 2310.0)

MEASURE = """<!doctype html><body style="margin:0"><iframe id=f src="{page}"
style="border:0;width:{width}px;height:{height}px"></iframe><script>
onload = () => {{
  const d = document.getElementById("f").contentDocument, out = [];
  for (const e of d.querySelectorAll("body *"))
    if (!e.closest(".scroll") && e.getBoundingClientRect().right > {width} + 0.5)
      out.push(e.tagName);
  const charts = d.querySelectorAll("svg.chart").length;
  const small = [...d.querySelectorAll("svg.chart text")]
    .map(t => t.getBoundingClientRect().height).reduce((a, b) => Math.min(a, b), 99);
  const scroll = d.documentElement.scrollWidth;
  document.title = JSON.stringify({{scroll, out, charts, small}});
}}</script>"""


def reports() -> dict[str, Any]:
    """A page with findings, one without, one with groups and rungs, one of very many ranges."""
    rng = np.random.default_rng(3)
    days, part = rng.integers(0, 365, 2000), rng.uniform(0.0, 1.0, 2000)
    when = lt.Epoch(2459800.5 + days, part, "utc")
    array = lt.reflector("Apollo 15")
    high = lt.Model().round_trip(when, STATION, array).uplink.elevation_deg > 20.0
    when = when[high]
    few = when[:120]

    def check(model: lt.Model, epochs: lt.Epoch, **more: Any) -> Any:
        answer = model.round_trip(epochs, STATION, array)
        seconds = answer.seconds + rng.normal(0.0, 1e-12, len(epochs))
        given = {"epoch": epochs, "round_trip_s": seconds} | more
        return lt.crosscheck(given, STATION, array, tolerance_ps=5.0)

    moved = lt.Model(omit=["subdaily_rotation"])
    sheet = moved.round_trip(few, STATION, array).worksheet()
    rungs = {k: sheet[k] for k in ("t1.tdb_minus_tt_s", "t1.x_rad", "t1.era_rad", "uplink.sun_s")}
    return {
        "nothing": check(lt.Model(), few),
        "three": check(lt.Model(omit=["solid_earth_tide", "pole_tide", "clock"]), few),
        "rungs": check(moved, few, **rungs),
        "many": check(lt.Model(omit=["station_contraction", "moon_gravity"]), when),
    }


def chromium() -> str:
    for name in ("chromium", "chromium-browser", "google-chrome"):
        found = shutil.which(name)
        if found:
            return found
    raise SystemExit("no Chromium: apt-get install chromium")


def run(browser: str, *options: str) -> str:
    command = [
        browser, "--headless", "--no-sandbox", "--disable-gpu", "--hide-scrollbars",
        "--allow-file-access-from-files", "--host-resolver-rules=MAP * ~NOTFOUND", *options,
    ]  # fmt: skip
    return subprocess.run(command, capture_output=True, text=True, timeout=120, check=True).stdout


def main() -> int:
    folder = Path(sys.argv[1]).resolve()
    os.makedirs(folder, exist_ok=True)
    browser, failed = chromium(), False
    for name, report in reports().items():
        page = folder / f"{name}.html"
        report.write(page)
        for width in WIDTHS:
            picture = folder / f"{name}-{width}.png"
            size = f"--window-size={width},{HEIGHT}"
            run(browser, size, f"--screenshot={picture}", page.as_uri())
            frame = folder / "measure.html"
            frame.write_text(MEASURE.format(page=page.name, width=width, height=HEIGHT))
            dom = run(browser, "--window-size=1400,4400", "--virtual-time-budget=4000",
                      "--dump-dom", frame.as_uri())  # fmt: skip
            told = re.search(r"<title>(.*?)</title>", dom)
            said = told.group(1) if told else "not measured"
            fits = told is not None and '"out":[]' in said and f'"scroll":{width}' in said
            failed |= not fits
            print(f"{name:8} {width:5} px  {page.stat().st_size / 1e3:7.0f} kB  "
                  f"{'fits' if fits else 'STICKS OUT'}  {said}")  # fmt: skip
    return int(failed)


if __name__ == "__main__":
    sys.exit(main())
