"""The report as one page for a browser, complete in itself."""

from __future__ import annotations

from html import escape
from importlib.resources import files
from typing import TYPE_CHECKING

import numpy as np

from lighttime.crosscheck.figures import axes, kinds
from lighttime.crosscheck.svg import Panel, figure
from lighttime.crosscheck.text import (
    amplitude_text,
    chance_text,
    rms,
    sized,
    summary,
    told,
)
from lighttime.version import __version__

if TYPE_CHECKING:
    from lighttime.crosscheck.findings import Finding
    from lighttime.crosscheck.report import Report
    from lighttime.crosscheck.separation import Inseparable

MOST_UNREADABLE = 50


def page(report: Report) -> str:
    """The whole page as text: no script, no font, no picture from elsewhere."""
    style = files(__package__).joinpath("page.css").read_text(encoding="utf-8")
    title = f"Cross-check of {report.ranges.source}"
    body = [
        f"<header><h1>{escape(title)}</h1>",
        f"<p class=where>{escape(report.station)} \u2013 {escape(report.array)}; ours: "
        f"{escape(report.model)}</p></header>",
        f"<p class=lead>{escape(summary(report))}</p>",
        _numbers(report),
        _rungs(report),
        _findings(report),
        _groups(report),
        _before_and_after(report),
        _signatures(report),
        _remarks(report),
        f"<footer>lighttime {escape(__version__)}</footer>",
    ]
    return (
        '<!doctype html>\n<html lang="en"><head><meta charset="utf-8">'
        '<meta name="viewport" content="width=device-width, initial-scale=1">'
        f"<title>{escape(title)}</title><style>{style}</style></head><body><main>"
        + "\n".join(part for part in body if part)
        + "</main></body></html>\n"
    )


def _numbers(report: Report) -> str:
    cells = [
        ("ranges", f"{len(report)}"),
        ("differ by", sized(rms(report.difference_ps))),
        ("remains", sized(rms(report.residual_ps))),
        ("suspects tried", f"{len(report.suspects)}"),
    ]
    if report.tolerance_ps is not None:
        verdict = "agree" if report.agrees else "do not agree"
        cells.append((f"within {report.tolerance_ps:g} ps", verdict))
    items = "".join(f"<div><dt>{escape(k)}</dt><dd>{escape(v)}</dd></div>" for k, v in cells)
    return f"<dl class=numbers>{items}</dl>"


def _findings(report: Report) -> str:
    if not report.findings:
        return "<section><h2>Findings</h2><p>Nothing significant.</p></section>"
    cards = "".join(_card(f, report) for f in report.findings)
    return f"<section><h2>Findings</h2><ol class=cards>{cards}</ol></section>"


def _card(finding: Finding, report: Report) -> str:
    rows = [
        ("amplitude", amplitude_text(finding).replace("+-", "\u00b1")),
        ("explains", sized(finding.effect_ps)),
        ("without it", f"{sized(finding.without_ps)} would remain"),
        ("chance find", f"probability {chance_text(finding.chance)}"),
        ("look for", finding.look_for),
    ]
    items = "".join(f"<dt>{escape(k)}</dt><dd>{escape(v)}</dd>" for k, v in rows)
    return (
        f"<li><h3>{escape(told(finding))}</h3><p class=name>{escape(finding.name)}, "
        f"{escape(finding.family)}</p><dl>{items}</dl></li>"
    )


def _groups(report: Report) -> str:
    if not report.inseparable:
        return ""
    parts = "".join(_group(g) for g in report.inseparable)
    return f"<section><h2>Not told apart by these ranges</h2>{parts}</section>"


def _group(group: Inseparable) -> str:
    rows = "".join(
        f"<tr><td>{escape(' with '.join(names))}</td><td>{odds:.3g}</td><td>{apart:.1f}</td>"
        f"<td>{value:.1e}</td></tr>"
        for names, odds, apart, value in zip(
            group.rivals, group.odds, group.apart_sigma, group.singular_value, strict=True
        )
    )
    advice = "".join(f"<li>{escape(a)}</li>" for a in group.advice)
    advice = f"<p>New data:</p><ul>{advice}</ul>" if advice else ""
    return (
        f"<p><b>{escape(' with '.join(group.findings))}</b> or</p><div class=scroll><table>"
        "<thead><tr><th>in its place</th><th>times less probable</th><th>sigma apart</th>"
        f"<th>singular value</th></tr></thead><tbody>{rows}</tbody></table></div>{advice}"
    )


def _rungs(report: Report) -> str:
    if not report.rungs:
        return ""
    first = next((r.name for r in report.rungs if r.departs), None)
    said = f"The first that departs: <b>{escape(first)}</b>." if first else "None departs."
    rows = "".join(
        f"<tr{' class=departs' if r.departs else ''}><td>{escape(r.name)}</td>"
        f"<td>{r.largest:.6g}</td><td>{r.rms:.3g}</td><td>{r.effect_ps:.3g}</td></tr>"
        for r in report.rungs
    )
    return (
        f"<section><h2>Rung by rung</h2><p>{said}</p><div class=scroll><table><thead><tr>"
        "<th>rung</th><th>largest difference</th><th>rms</th><th>effect, ps</th></tr></thead>"
        f"<tbody>{rows}</tbody></table></div></section>"
    )


def _before_and_after(report: Report) -> str:
    names, colours = kinds(report)
    drawn = []
    for axis in axes(report):
        panels = [Panel("difference before", report.difference_ps)]
        if report.findings:
            panels.append(Panel("after the findings", report.residual_ps))
        alt = f"{', '.join(p.title for p in panels)}, against {axis.name}"
        drawn.append(f"<figure>{figure(axis, panels, colours, alt)}</figure>")
    legend = "".join(
        f'<li><svg viewBox="0 0 10 10"><path class="p{k}" d="M5 5h0"/></svg>{escape(n)}</li>'
        for k, n in enumerate(names)
    )
    return (
        f"<section><h2>The other\u2019s range minus ours</h2><ul class=legend>{legend}</ul>"
        f"<div class=charts>{''.join(drawn)}</div></section>"
    )


def _signatures(report: Report) -> str:
    if not report.findings:
        return ""
    _, colours = kinds(report)
    drawn = []
    for axis in axes(report)[:2]:
        panels = [
            Panel(f.name, f.amplitude * np.asarray(report.signatures[f.name]))
            for f in report.findings
        ]
        alt = f"what each finding does to the ranges, against {axis.name}"
        drawn.append(f"<figure>{figure(axis, panels, colours, alt)}</figure>")
    return (
        "<section><h2>What each finding does to the ranges</h2>"
        f"<div class=charts>{''.join(drawn)}</div></section>"
    )


def _remarks(report: Report) -> str:
    rest = report.rest
    lines = [
        f"Remains: {rest.rms_ps:.3g} ps rms, {rest.largest_ps:.3g} at most; neighbours in "
        f"{rest.order} correlate by {rest.correlation:+.2f} (probability by chance "
        f"{chance_text(rest.chance)}).",
        *report.notes,
    ]
    parts = "".join(f"<li>{escape(line)}</li>" for line in lines)
    more = "".join(
        _details(what, items)
        for what, items in (
            ("Not tested: these ranges say nothing about them",
             [f"{name}: {why}" for name, why in report.untested.items()]),
            ("Below the noise of these ranges", list(report.invisible)),
            ("Rows that were left out",
             [f"{report.ranges.row_word} {w.line}: {w.reason}"
              for w in report.ranges.unreadable[:MOST_UNREADABLE]]),
            ("Rows that stand apart",
             [f"{report.ranges.row_word} {report.ranges.lines[i]}: "
              f"{report.residual_ps[i]:.4g} ps"
              for i in np.flatnonzero(report.apart)[:MOST_UNREADABLE]]),
            ("All suspects", [f"{name}: {says}" for name, says in report.suspects.items()]),
        )
    )  # fmt: skip
    return f"<section><h2>Remarks</h2><ul>{parts}</ul>{more}</section>"


def _details(what: str, items: list[str]) -> str:
    if not items:
        return ""
    listed = "".join(f"<li>{escape(item)}</li>" for item in items)
    return f"<details><summary>{escape(what)} ({len(items)})</summary><ul>{listed}</ul></details>"
