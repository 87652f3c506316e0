"""The report as text for people."""

from __future__ import annotations

from collections.abc import Iterator
from textwrap import wrap
from typing import TYPE_CHECKING

import numpy as np

from lighttime.constants import SPEED_OF_LIGHT
from lighttime.vectors import Array

if TYPE_CHECKING:
    from lighttime.crosscheck.findings import Finding
    from lighttime.crosscheck.report import Report
    from lighttime.crosscheck.rungs import Rung
    from lighttime.crosscheck.separation import Inseparable

WIDTH = 92
MOST_NAMES = 12
MOST_ROWS = 6
MM_PER_PS = 0.5e-12 * SPEED_OF_LIGHT * 1e3
"""One-way millimetres in a picosecond of round trip."""


def report_text(report: Report) -> str:
    """See `Report`."""
    parts = [
        *_head(report),
        *_paragraph(summary(report)),
        *_rung_lines(report),
        *_finding_lines(report),
        *_group_lines(report),
        *_rest_lines(report),
        *_closing(report),
    ]
    return "\n".join(parts)


def summary(report: Report) -> str:
    """See `Report.summary`."""
    sentences = [_first_sentence(report)]
    first = next((r for r in report.rungs if r.departs), None)
    if first is not None:
        sentences.append(f"The first rung that departs is {first.name}.")
    if report.findings:
        sentences.append(f"Found: {'; '.join(told(f) for f in report.findings)}.")
    sentences.append(_rest_sentence(report))
    if report.tolerance_ps is not None:
        verdict = "agree" if report.agrees else "do not agree"
        sentences.append(f"The models {verdict} within {report.tolerance_ps:g} ps.")
    return " ".join(sentences)


def _first_sentence(report: Report) -> str:
    before, n = rms(report.difference_ps), len(report)
    count = "One range differs" if n == 1 else f"{n} ranges differ"
    if not report.findings:
        reason = (
            "; there are too few for a search" if n < 6 else ", and nothing significant was found"
        )
        return f"{count} by {sized(before)}{reason}."
    number = len(report.findings)
    choices = "one choice explains" if number == 1 else f"{number} choices explain"
    return f"{count} by {sized(before)}; {choices} all but {sized(rms(report.residual_ps))} of it."


def _rest_sentence(report: Report) -> str:
    rest = report.rest
    if rest.has_structure:
        return (
            f"What remains, {sized(rest.rms_ps)}, is more than noise (neighbours in {rest.order} "
            f"agree): something that is not on the list, or not as it is there."
        )
    noise = f"What remains, {sized(rest.rms_ps)}, is noise."
    if report.rounding and not report.sigma_stated:
        causes = "; or ".join(r.what for r in report.rounding)
        noise += f" Rounding makes noise of this size: {causes}."
    return noise


def told(finding: Finding) -> str:
    """A finding in a few words.

    An offset is told with its size, a choice with what its amplitude means.
    """
    if finding.unit:
        return f"{finding.says} by {amplitude_text(finding)}"
    if finding.reading == "as described":
        return finding.says
    return f"{finding.says} {finding.reading}"


def amplitude_text(finding: Finding) -> str:
    """Amplitude and sigma to as many digits as sigma says."""
    value = finding.fitted if finding.unit else finding.amplitude
    if finding.exact is not None:
        fitted = with_sigma(finding.fitted, finding.sigma)
        return f"{finding.exact:g} (fitted {fitted})"
    unit = f" {finding.unit}" if finding.unit and not finding.unit[0].isdigit() else (
        f" x {finding.unit}" if finding.unit else ""
    )  # fmt: skip
    return f"{with_sigma(value, finding.sigma)}{unit}"


def with_sigma(value: float, sigma: float) -> str:
    """A number with its sigma, both to two digits of sigma.

    Examples
    --------
    >>> with_sigma(1.000123, 0.00345)
    '1.0001 +- 0.0034'
    """
    if not np.isfinite(sigma) or sigma <= 0.0:
        return f"{value:g}"
    digits = max(0, min(12, 1 - int(np.floor(np.log10(sigma)))))
    if digits == 12 or abs(value) >= 1e9:
        return f"{value:.6g} +- {sigma:.1e}"
    return f"{value:.{digits}f} +- {sigma:.{digits}f}"


def sized(ps: float) -> str:
    """Picoseconds for people, with the one-way millimetres.

    Examples
    --------
    >>> sized(200.138)
    '200 ps rms (30 mm one-way)'
    """
    mm = ps * MM_PER_PS
    length = f"{mm / 1e3:.3g} m" if mm >= 1e3 else f"{mm:.2g} mm" if mm >= 0.01 else "below 0.01 mm"
    number = f"{ps:.3g}" if ps < 1e4 else f"{ps:,.0f}".replace(",", " ")
    return f"{number} ps rms ({length} one-way)"


def chance_text(chance: float) -> str:
    """A probability for people."""
    return "below 1e-12" if chance < 1e-12 else f"{chance:.1e}"


def rms(values: Array) -> float:
    """Root mean square."""
    return float(np.sqrt(np.mean(values**2))) if len(values) else 0.0


# -- parts -----------------------------------------------------------------------------------------


def _head(report: Report) -> list[str]:
    return [
        f"Cross-check of {report.ranges.source}",
        f"  {report.station} - {report.array}: {len(report)} ranges, "
        f"{str(report.ranges.quantity).replace('_', ' ')}",
        f"  ours: {report.model}",
        "",
    ]


def _paragraph(text: str, indent: str = "  ") -> list[str]:
    return [*wrap(text, WIDTH, initial_indent=indent, subsequent_indent=indent), ""]


def _rung_lines(report: Report) -> list[str]:
    if not report.rungs:
        return []
    lines = [f"  {'rung':32}{'largest difference':>22}{'rms':>14}{'effect, ps':>14}"]
    for rung in _shown(report):
        mark = "  departs" if rung.departs else ""
        lines.append(
            f"  {rung.name:32}{rung.largest:>22.6g}{rung.rms:>14.3g}{rung.effect_ps:>14.3g}{mark}"
        )
    return [*lines, ""]


def _shown(report: Report) -> Iterator[Rung]:
    """All rungs up to the first that departs, and what departs after it, a few."""
    departed = 0
    for rung in report.rungs:
        if departed == 0 or rung.departs:
            yield rung
        departed += rung.departs
        if departed == MOST_ROWS:
            return


def _finding_lines(report: Report) -> list[str]:
    lines: list[str] = []
    for number, finding in enumerate(report.findings, start=1):
        lines += [
            f"  {number}. {told(finding)}   [{finding.name}]",
            f"     amplitude {amplitude_text(finding)}",
            f"     explains {sized(finding.effect_ps)}; without it {finding.without_ps:.3g} ps "
            f"would remain, with it {rms(report.residual_ps):.3g} ps",
            f"     probability of a chance find among {len(report.suspects)} suspects: "
            f"{chance_text(finding.chance)}",
            *_paragraph(f"look for: {finding.look_for}", "     "),
        ]
    return lines


def _group_lines(report: Report) -> list[str]:
    lines: list[str] = []
    for group in report.inseparable:
        lines += group_text(group)
    return lines


def group_text(group: Inseparable) -> list[str]:
    """An inseparable group as lines."""
    lines = [f"  These ranges do not tell {' with '.join(group.findings)} from"]
    for names, odds, apart, value in zip(
        group.rivals, group.odds, group.apart_sigma, group.singular_value, strict=True
    ):
        lines.append(
            f"     {' with '.join(names)}: {odds:.3g} times less probable, {apart:.1f} sigma apart "
            f"(singular value {value:.1e})"
        )
    for advice in group.advice:
        lines += wrap(f"New data: {advice}.", WIDTH, initial_indent="     ",
                      subsequent_indent="     ")  # fmt: skip
    return [*lines, ""]


def _rest_lines(report: Report) -> list[str]:
    rest = report.rest
    said = (
        f"remains: {rest.rms_ps:.3g} ps rms, {rest.largest_ps:.3g} at most; neighbours in "
        f"{rest.order} correlate by {rest.correlation:+.2f} (probability by chance "
        f"{chance_text(rest.chance)})"
    )
    lines = wrap(said, WIDTH, initial_indent="  ", subsequent_indent="    ")
    if report.apart.any():
        rows = np.flatnonzero(report.apart)
        names = ", ".join(str(report.ranges.lines[i]) for i in rows[:MOST_NAMES])
        more = f" and {len(rows) - MOST_NAMES} more" if len(rows) > MOST_NAMES else ""
        lines += wrap(f"{len(rows)} rows stand apart and were set aside in the search: "
                      f"{report.ranges.row_word} {names}{more}", WIDTH, initial_indent="  ",
                      subsequent_indent="  ")  # fmt: skip
    if report.repeated:
        lines.append(f"  {report.repeated} rows repeat an epoch")
    return [*lines, ""]


def _closing(report: Report) -> list[str]:
    lines: list[str] = []
    for what, names in (
        ("not tested (these ranges say nothing about them)", list(report.untested)),
        ("below the noise of these ranges", list(report.invisible)),
    ):
        if names:
            lines += wrap(f"{what}: {', '.join(names)}", WIDTH, initial_indent="  ",
                          subsequent_indent="    ")  # fmt: skip
    for wrong in report.ranges.unreadable[:MOST_ROWS]:
        lines += wrap(f"left out: {report.ranges.row_word} {wrong.line}: {wrong.reason}", WIDTH,
                      initial_indent="  ", subsequent_indent="    ")  # fmt: skip
    for note in report.notes:
        lines += wrap(note, WIDTH, initial_indent="  ", subsequent_indent="    ")
    return lines
